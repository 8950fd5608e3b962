import { expect } from "vitest";
import {
  asNumbers,
  cellSums,
  columnNamed,
  deriveColumn,
  excludeRows,
  readTable,
  textCodes,
} from "../../../src/data/index.ts";
import type { CellAnswer, FileQuestion } from "../../../src/data/node/index.ts";

export const factors = [
  { name: "glove", levels: ["bare", "knit", "10"] },
  { name: "shift", levels: ["day", "night"] },
];
/** The same by way of the small tables, as every other analysis takes its data. */
export async function smallPath(source: string | Uint8Array, more: Partial<FileQuestion> = {}) {
  let { table } = await readTable(typeof source === "string" ? new TextEncoder().encode(source) : source, {
    format: more.format ?? "csv",
    missing: more.missing ?? [],
    ...(more.decimal === undefined ? {} : { decimal: more.decimal }),
    ...(more.separator === undefined ? {} : { separator: more.separator }),
  });
  for (const { name, expression } of more.derive ?? []) table = deriveColumn(table, name, expression);
  for (const condition of more.exclude ?? []) table = excludeRows(table, condition).table;
  const response = asNumbers(columnNamed(table, more.response ?? "seconds"), table.sourceRows);
  const texts = [...factors.map((factor) => factor.name), "operator"].map((name) =>
    textCodes(columnNamed(table, name)),
  );
  const cells = new Int32Array(table.rows).fill(-1);
  const subjects = new Int32Array(table.rows).fill(-1);
  const labels: string[] = [];
  for (let row = 0; row < table.rows; row++) {
    const own = texts.map(({ codes, categories }) => (codes[row]! < 0 ? null : categories[codes[row]!]!));
    const glove = factors[0]!.levels.findIndex(
      (level) => level === own[0] || (own[0] !== null && Number(level) === Number(own[0])),
    );
    const shift = factors[1]!.levels.indexOf(own[1] ?? "");
    if (glove < 0 || shift < 0 || own[2] === null || Number.isNaN(response.offsets[row]!)) continue;
    cells[row] = glove * 2 + shift;
    if (!labels.includes(own[2]!)) labels.push(own[2]!);
    subjects[row] = labels.indexOf(own[2]!) * 6 + cells[row]!;
  }
  return {
    statistics: cellSums(response, cells, 6),
    subjects: cellSums(response, subjects, labels.length * 6),
    labels,
  };
}

function close(value: number, expected: number, scale: number, digits = 1e-12): void {
  expect(Math.abs(value - expected)).toBeLessThanOrEqual(digits * scale);
}

/** To 1e-12 of the numbers themselves or, where the small path's centre lies far off, of its offsets, which it rounds to doubles. */
export function expectSame(answer: CellAnswer, small: Awaited<ReturnType<typeof smallPath>>): void {
  const { statistics } = answer;
  expect([...statistics.n]).toEqual([...small.statistics.n]);
  for (let cell = 0; cell < 6; cell++) {
    const n = small.statistics.n[cell]!;
    if (n === 0) continue;
    const spread = Math.sqrt(small.statistics.sumOfSquares[cell]! / n);
    const expected = small.statistics.center - statistics.center + small.statistics.mean[cell]!;
    close(
      statistics.mean[cell]!,
      expected,
      Math.max(Math.abs(expected), spread, Math.abs(small.statistics.mean[cell]!)),
    );
    // Squares of the smallest double that the values' offsets are rounded to do not count as a difference.
    close(
      statistics.sumOfSquares[cell]!,
      small.statistics.sumOfSquares[cell]!,
      small.statistics.sumOfSquares[cell]! + small.statistics.mean[cell]! ** 2 * 1e-3 + 1e-18,
    );
  }
  const { labels, n, mean, sumOfSquares } = answer.subjects!;
  expect([...labels].sort()).toEqual([...small.labels].sort());
  for (const [subject, label] of labels.entries()) {
    for (let cell = 0; cell < 6; cell++) {
      const place = subject * 6 + cell;
      const other = small.labels.indexOf(label) * 6 + cell;
      expect(n[place]).toBe(small.subjects.n[other]);
      if (n[place] === 0) continue;
      const expected = small.subjects.center - statistics.center + small.subjects.mean[other]!;
      const squares = small.subjects.sumOfSquares[other]!;
      close(
        mean[place]!,
        expected,
        Math.max(Math.abs(expected), Math.sqrt(squares), Math.abs(small.subjects.mean[other]!)),
      );
      close(sumOfSquares[place]!, squares, squares + small.subjects.mean[other]! ** 2 * 1e-3 + 1e-18);
    }
  }
}

/** Numbers from a fixed seed (mulberry32), for inputs only. */
function uniform(seed: number): () => number {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let t = state;
    t = Math.imul(t ^ (t >>> 15), t | 1);
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61);
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296;
  };
}

export type Writer = (value: number, u: () => number) => string;
export function rowsOf(count: number, seed: number, write: Writer, messy = true): string[] {
  const u = uniform(seed);
  const pick = <T>(list: readonly T[]): T => list[Math.floor(u() * list.length)]!;
  return Array.from({ length: count }, () => {
    const glove = pick(messy ? ["bare", "knit", "10", "10.0", " bare", '"knit"', "wool", ""] : ["bare", "knit", "10"]);
    const shift = pick(messy ? ["day", "night", "night ", '"da""y"', ""] : ["day", "night"]);
    const operator = pick(messy ? ["p1", "p2", "\u00e9va", '"p,4"', ""] : ["p1", "p2", "p3"]);
    const value = messy && u() < 0.05 ? "" : write(40 + 9 * (u() + u() - 1), u);
    return `${operator},${glove},note ${Math.floor(u() * 99)},${shift},${value}`;
  });
}
export const header = "operator,glove,note,shift,seconds";
