/** The door of the models room: omnibus tests and estimates of comparisons, design by design. */
export { ModelError } from "./model-error.ts";
export * from "./assumptions/index.ts";
export * from "./between/index.ts";
export * from "./effect-size/index.ts";
export * from "./ranks/index.ts";
export * from "./resampling/index.ts";
export * from "./within/index.ts";
export * from "./multilevel/index.ts";
