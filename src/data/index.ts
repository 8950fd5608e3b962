/** The door of the data room: readers, exact columns, and the steps that turn one table into the next. */
export { asNumbers, columnNamed, numberValue, rowsOf, textCodes, usedTexts } from "./columns.ts";
export { deriveColumn, excludeRows } from "./expression.ts";
export { cellSums } from "./moments.ts";
export { computedColumn, nearestValues, numberColumn } from "./numbers.ts";
export { previewTable, tableDigest } from "./preview.ts";
export { DataProblem, type DataProblemCode } from "./problem.ts";
export { type ReadOptions, readTable, typedTable } from "./read.ts";
export { type AverageQuestion, averageTable, foldTable } from "./reshape.ts";
export type * from "./types.ts";
