/** The door of the planning room: what is expected, power, size, detectable effects, rehearsal and calibration. */
export { PlanningError, type PlanningCode } from "./problem.ts";
export type * from "./types.ts";
export { expectedDesign } from "./expectation.ts";
export { powerCurve, powerOf } from "./power.ts";
export { sizeFor } from "./size.ts";
export { detectableFor } from "./detectable.ts";
export { type RehearsalRows, rehearsalRows } from "./rehearse.ts";
export { calibrate, mergeCalibrations } from "./calibrate.ts";
export { runTask } from "./tasks.ts";
