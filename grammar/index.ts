/** The door of the grammar room: text of a cell in, typed statements with places out. Knows nothing of statistics, data or files. */
export type * from "./ast.ts";
export { parseCell } from "./cell.ts";
export type { Span } from "./span.ts";
export { sameUnit } from "./units.ts";
