import { DataProblem } from "../problem.ts";
import type { Table, TextColumn } from "../types.ts";
import type { CellAnswer, CellQuestion } from "./question.ts";

/**
 * A row for each subject and cell with at least one value: the mean of the subject's values there. From here on a
 * design with factors within subjects is analysed as a small study is, with trials averaged.
 *
 * @param answer to a question with a subject
 * @throws DataProblem "unknown-column" where the question named no subject
 */
export function subjectTable(answer: CellAnswer, question: CellQuestion): Table {
  const { subjects, statistics } = answer;
  if (subjects === null) throw new DataProblem("unknown-column", { column: "subject", nearest: null, columns: "" });
  const cells = statistics.n.length;
  let rows = 0;
  for (const count of subjects.n) if (count > 0) rows++;
  const places = new Int32Array(rows);
  for (let place = 0, row = 0; place < subjects.n.length; place++) if (subjects.n[place]! > 0) places[row++] = place;
  const text = (name: string, categories: readonly string[], codeOf: (place: number) => number): TextColumn => {
    const codes = new Int32Array(rows);
    for (let row = 0; row < rows; row++) codes[row] = codeOf(places[row]!);
    return { kind: "text", name, codes, categories };
  };
  const columns: Table["columns"][number][] = [
    text(question.subject!, subjects.labels, (place) => Math.floor(place / cells)),
  ];
  let below = cells;
  for (const { name, levels } of question.factors) {
    below /= levels.length;
    const step = below;
    columns.push(text(name, levels, (place) => Math.floor((place % cells) / step) % levels.length));
  }
  const offsets = new Float64Array(rows);
  const sourceRows = new Int32Array(rows);
  for (let row = 0; row < rows; row++) {
    offsets[row] = subjects.mean[places[row]!]!;
    // The rows behind a mean have no one line of their own.
    sourceRows[row] = row + 1;
  }
  columns.push({
    kind: "number",
    name: question.response,
    center: statistics.center,
    offsets,
    texts: null,
    decimals: null,
  });
  return { rows, columns, sourceRows };
}
