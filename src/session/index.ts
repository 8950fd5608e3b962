/** The door of the session room: statements in, results out, the study as a value between them. */
export { presentOptions } from "./handlers/record.ts";
export { knownNames } from "./known.ts";
export {
  type CellOutcome,
  ledgerPathOf,
  openSession,
  type RunOptions,
  runCell,
  type Session,
  type StatementOutcome,
} from "./run.ts";
export { emptyStudy, type Study } from "./study.ts";
