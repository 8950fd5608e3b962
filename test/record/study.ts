import type { Problem, Result } from "../../src/results/index.ts";
import { openSession, runCell, type Session } from "../../src/session/index.ts";
import type { MemoryHost } from "../session/memory-host.ts";

/** An invented study: three kinds of lamp, six subjects each, minutes to read a page. */
export const declarations = `response minutes in "min"
subjects reader
factor lamp between reader: warm, cool, daylight`;

export const planning = `${declarations}
family primary: all pairs of lamp
  hold error 5% by holm
seal plan as "trial"`;

export const analysis = `open plan "trial"
read "data.csv"
exclude where reader = "r1" because "lamp failed, noted before the reading"
describe minutes by lamp
omnibus
compare primary`;

export function invented(shift = 0): string {
  const rows = ["reader,lamp,minutes"];
  for (let reader = 1; reader <= 18; reader++) {
    const lamp = ["warm", "cool", "daylight"][reader % 3]!;
    rows.push(`r${reader},${lamp},${(2 + (reader % 3) * 0.4 + ((reader * 7) % 11) / 10 + shift).toFixed(1)}`);
  }
  return `${rows.join("\n")}\n`;
}

/** Runs cells one after another, each in a session opened anew unless one is given. */
export async function runAll(
  host: MemoryHost,
  cells: readonly string[],
  session?: Session,
): Promise<{ readonly results: readonly Result[]; readonly problems: readonly Problem[]; readonly session: Session }> {
  const results: Result[] = [];
  const problems: Problem[] = [];
  let current = session ?? (await openSession(host, "test"));
  for (const [index, cell] of cells.entries()) {
    const done = await runCell(current, cell, { cell: index + 1, host });
    current = done.session;
    results.push(...done.outcomes.flatMap(({ result }) => result ?? []));
    problems.push(...done.problems);
  }
  return { results, problems, session: current };
}
