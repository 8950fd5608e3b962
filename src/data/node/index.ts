/** The door of reading at scale: files larger than memory and databases, on Node only. */
import type { Watch } from "../../host/index.ts";
import { delimitedCells } from "./delimited-cells.ts";
import { parquetCells } from "./parquet-cells.ts";
import type { CellAnswer, FileQuestion } from "./question.ts";

export type { CellAnswer, CellQuestion, FactorLevels, FileQuestion, SubjectCells } from "./question.ts";

/** Statistics by cell, and by subject and cell where asked for, of a file of any size. */
export async function aggregateCells(question: FileQuestion, watch: Watch): Promise<CellAnswer> {
  return question.format === "parquet" ? parquetCells(question, watch) : delimitedCells(question, watch);
}

export {
  databaseCells,
  databaseColumns,
  type DatabaseQuestion,
  type DatabaseSource,
  databaseTable,
} from "./database.ts";
export { subjectTable } from "./subject-table.ts";
export { fileDigest } from "./file-digest.ts";
