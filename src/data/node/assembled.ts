import type { Note } from "../../results/index.ts";
import { type ChunkAnswer, type KernelPlan, type SubjectAnswer, totalsAt } from "./chunk-kernel.ts";
import { addTotals, type CellTotals, statisticsOf } from "./exact-sums.ts";
import { LabelTable } from "./label-table.ts";
import type { PartsRead } from "./part-readers.ts";
import type { CellAnswer, SubjectCells } from "./question.ts";
import { joinedSamples } from "./row-sample.ts";
import { fields, productRest, type SubjectParts, SubjectSums } from "./subject-sums.ts";

function summedLists(lists: readonly (readonly number[])[]): number[] {
  const sums: number[] = [];
  for (const list of lists) for (const [index, value] of list.entries()) sums[index] = (sums[index] ?? 0) + value;
  return sums;
}

function undeclaredLevels(
  answers: readonly ChunkAnswer[],
  plan: KernelPlan,
  linesInFront: number,
): CellAnswer["undeclared"] {
  const levels = new Map<string, { factor: string; level: string; rows: number; firstRow: number }>();
  let line = linesInFront + 1;
  for (const answer of answers) {
    for (const { factor, level, rows, firstLine } of answer.undeclared) {
      const key = `${factor} ${level}`;
      const had = levels.get(key);
      if (had !== undefined) had.rows += rows;
      else levels.set(key, { factor: plan.factors[factor]!.name, level, rows, firstRow: firstLine + line });
    }
    line += answer.lines;
  }
  return [...levels.values()];
}

/** One answer from the answers of all parts. */
export function assembled(read: PartsRead, plan: KernelPlan, linesInFront: number): CellAnswer {
  const { answers } = read;
  const places = Math.max(...answers.flatMap((answer) => answer.parts.map((part) => part.places)));
  let totals: CellTotals | null = null;
  for (const answer of answers) {
    const own = totalsAt(answer.parts, places);
    totals = totals === null ? own : addTotals(totals, own);
  }
  const missing = summedLists(answers.map((answer) => answer.missingColumn));
  const names = [...plan.factors.map((factor) => factor.name), plan.subject ?? ""];
  const entered = answers.reduce((sum, answer) => sum + answer.entered, 0);
  const notes: Note[] = answers.some((answer) => answer.rounded)
    ? [{ code: "rounded-to-places", facts: { column: plan.response, places: plan.mostPlaces } }]
    : [];
  return {
    rows: answers.reduce((sum, answer) => sum + answer.rows, 0),
    entered,
    statistics: statisticsOf(totals!, plan.center, 10n ** BigInt(places)),
    subjects: plan.subject === null ? null : subjectCells(read.subjects, plan),
    excluded: summedLists(answers.map((answer) => answer.excluded)),
    missingResponse: answers.reduce((sum, answer) => sum + answer.missingResponse, 0),
    missingColumn: missing.flatMap((rows, index) => (rows > 0 ? [{ column: names[index]!, rows }] : [])),
    undeclared: undeclaredLevels(answers, plan, linesInFront),
    sample: {
      ...joinedSamples(
        answers.map((answer) => answer.sample),
        plan.sample.size,
      ),
      of: entered,
    },
    notes,
  };
}

function subjectCells(parts: readonly SubjectAnswer[], plan: KernelPlan): SubjectCells {
  const cells = plan.factors.reduce((product, factor) => product * factor.levels.length, 1);
  const places = Math.max(0, ...parts.map((part) => part.places));
  const table = new LabelTable();
  let sums: SubjectSums | null = null;
  for (const part of parts) {
    const { bytes, ends } = part.labels;
    const subjectOf = new Int32Array(ends.length);
    for (let subject = 0, start = 0; subject < ends.length; subject++) {
      const end = ends[subject]!;
      subjectOf[subject] = table.find(bytes, start, end, LabelTable.hash(bytes, start, end));
      start = end;
    }
    // The first part's subjects are the first of all: its sums are taken up as they are.
    if (sums === null) {
      sums = SubjectSums.of(cells, part);
      if (part.places < places) sums.rescale(10 ** (places - part.places));
    } else sums.merge(part, subjectOf, 10 ** (places - part.places));
  }
  sums ??= new SubjectSums(cells);
  return finished(sums.parts(table.count), table, cells, 10 ** places);
}

/** square + lost - sum * sum / count, with the roundings of product and quotient kept (Dekker 1971). */
function aboutMean(square: number, lost: number, sum: number, count: number): number {
  const product = sum * sum;
  const share = product / count;
  const rest = product - share * count - productRest(share, count, share * count) + productRest(sum, sum, product);
  return square - share + (lost - rest / count);
}

/** Means and squares about them, subjects in the order in which the file first has a row of theirs that enters. */
function finished({ sums, firsts }: SubjectParts, table: LabelTable, cells: number, scale: number): SubjectCells {
  const met: number[] = [];
  for (let subject = 0; subject < table.count; subject++) if (firsts[subject]! > 0) met.push(subject);
  // Threads meet subjects in any order; the answer must not depend on it.
  met.sort((left, right) => firsts[left]! - firsts[right]!);
  const labels = met.map((subject) => table.text(subject));
  const n = new Float64Array(labels.length * cells);
  const mean = new Float64Array(labels.length * cells);
  const sumOfSquares = new Float64Array(labels.length * cells);
  for (const [subject, own] of met.entries()) {
    const from = own * cells;
    for (let cell = 0; cell < cells; cell++) {
      const place = subject * cells + cell;
      const at = (from + cell) * fields;
      const count = sums[at]!;
      if (count === 0) continue;
      const sum = sums[at + 1]!;
      n[place] = count;
      mean[place] = sum / (count * scale);
      if (count > 1) {
        const about = aboutMean(sums[at + 2]!, sums[at + 3]!, sum, count);
        sumOfSquares[place] = Math.max(0, about / scale / scale);
      }
    }
  }
  return { labels, n, mean, sumOfSquares };
}
