import type { Result } from "../../results/index.ts";

export const ofKind = <K extends Result["kind"]>(results: readonly Result[], kind: K): Extract<Result, { kind: K }>[] =>
  results.filter((result): result is Extract<Result, { kind: K }> => result.kind === kind);

/** Whether a result rests on simulated data. */
export function isRehearsed(result: Result): boolean {
  switch (result.kind) {
    case "omnibus":
    case "comparisons":
      return result.state === "rehearsal";
    case "picture":
      return result.picture.state === "rehearsal";
    case "describe":
    case "check":
      return result.rehearsal;
    default:
      return false;
  }
}

/** The last result of each key: a statement that was run again is reported once, at the place of its last run. */
export function latestBy<R extends Result>(results: readonly R[], key: (result: R) => string): R[] {
  const last = new Map<string, R>();
  for (const result of results) {
    last.delete(key(result));
    last.set(key(result), result);
  }
  return [...last.values()];
}
