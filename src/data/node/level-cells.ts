import { DataProblem } from "../problem.ts";
import { levelPlace } from "./chunk-kernel.ts";
import type { CellAnswer, CellQuestion } from "./question.ts";

/** A row of an aggregate: the texts of the factors, and what the rows with them came to. */
export interface GroupRow {
  readonly factors: readonly (string | null)[];
  readonly subject: string | null;
  /** Rows, and those of them with a response. */
  readonly rows: number;
  readonly n: number;
  /** Mean of value minus centre, and squared deviations from it; taken only where n > 0. */
  readonly mean: number;
  readonly sumOfSquares: number;
}

/** Adds up groups that are one cell, such as the levels 10 and 10.0 (Chan, Golub & LeVeque 1983, eq. 2.1). */
function joined(n: Float64Array, mean: Float64Array, squares: Float64Array, place: number, group: GroupRow): void {
  const before = n[place]!;
  const total = before + group.n;
  const apart = group.mean - mean[place]!;
  squares[place]! += group.sumOfSquares + (before === 0 ? 0 : (apart * apart * before * group.n) / total);
  mean[place] = before === 0 ? group.mean : mean[place]! + (apart * group.n) / total;
  n[place] = total;
}

/** The cells of an aggregate that an engine or a database computed. */
export function cellsOfGroups(
  groups: readonly GroupRow[],
  question: CellQuestion,
  center: number,
): Omit<CellAnswer, "excluded" | "sample" | "notes"> {
  const { factors } = question;
  const cells = factors.reduce((product, factor) => product * factor.levels.length, 1);
  const missing = new Set(question.missing ?? []);
  const places = factors.map(() => new Map<string, number>());
  const [n, mean, sumOfSquares] = [new Float64Array(cells), new Float64Array(cells), new Float64Array(cells)];
  const subjects = new Map<string, { n: Float64Array; mean: Float64Array; sumOfSquares: Float64Array }>();
  const missingColumn = new Array<number>(factors.length + 1).fill(0);
  const undeclared = new Map<string, { factor: string; level: string; rows: number; firstRow: null }>();
  const hasSubject = question.subject !== undefined && question.subject !== null;
  let rows = 0;
  let entered = 0;
  let missingResponse = 0;
  for (const group of groups) {
    rows += group.rows;
    missingResponse += group.rows - group.n;
    let cell = 0;
    let complete = true;
    for (const [index, factor] of factors.entries()) {
      const text = (group.factors[index] ?? "").trim();
      let place = places[index]!.get(text);
      if (place === undefined) {
        place = levelPlace(text, factor.levels, missing);
        places[index]!.set(text, place);
      }
      if (place >= 0) cell = cell * factor.levels.length + place;
      else {
        complete = false;
        if (place === -2) missingColumn[index]! += group.n;
        else {
          const key = `${index} ${text}`;
          const had = undeclared.get(key);
          if (had !== undefined) had.rows += group.rows;
          else undeclared.set(key, { factor: factor.name, level: text, rows: group.rows, firstRow: null });
        }
      }
    }
    const subject = (group.subject ?? "").trim();
    if (hasSubject && (subject === "" || missing.has(subject))) {
      missingColumn[factors.length]! += group.n;
      complete = false;
    }
    if (!complete || group.n === 0) continue;
    entered += group.n;
    joined(n, mean, sumOfSquares, cell, group);
    if (!hasSubject) continue;
    let own = subjects.get(subject);
    if (own === undefined) {
      own = { n: new Float64Array(cells), mean: new Float64Array(cells), sumOfSquares: new Float64Array(cells) };
      subjects.set(subject, own);
    }
    joined(own.n, own.mean, own.sumOfSquares, cell, group);
  }
  if (rows === 0) throw new DataProblem("header-only");
  const names = [...factors.map((factor) => factor.name), question.subject ?? ""];
  return {
    rows,
    entered,
    statistics: { center, n, mean, sumOfSquares },
    subjects: hasSubject ? subjectRows(subjects, cells) : null,
    missingResponse,
    missingColumn: missingColumn.flatMap((count, index) => (count > 0 ? [{ column: names[index]!, rows: count }] : [])),
    // An engine gives groups in any order; the answer has one.
    undeclared: [...undeclared].sort(([left], [right]) => (left < right ? -1 : 1)).map(([, level]) => level),
  };
}

function subjectRows(
  subjects: ReadonlyMap<
    string,
    { readonly n: Float64Array; readonly mean: Float64Array; readonly sumOfSquares: Float64Array }
  >,
  cells: number,
): NonNullable<CellAnswer["subjects"]> {
  const labels = [...subjects.keys()].sort();
  const size = labels.length * cells;
  const answer = {
    labels,
    n: new Float64Array(size),
    mean: new Float64Array(size),
    sumOfSquares: new Float64Array(size),
  };
  for (const [index, label] of labels.entries()) {
    const own = subjects.get(label)!;
    answer.n.set(own.n, index * cells);
    answer.mean.set(own.mean, index * cells);
    answer.sumOfSquares.set(own.sumOfSquares, index * cells);
  }
  return answer;
}
