/** Meanwise as a library: the portable core, without files, sockets or a front end. */
export * from "../grammar/index.ts";
export type { Host, Watch } from "./host/index.ts";
export { HostError, Interrupted, silentWatch } from "./host/index.ts";
export { type Bundle, presentResult, presentText } from "./present/index.ts";
export type { ComparisonsResult, DescribeResult, OmnibusResult, Result } from "./results/index.ts";
export { openSession, runCell, type Session } from "./session/index.ts";
