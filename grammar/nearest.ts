import { distance } from "fastest-levenshtein";

/** The candidate that was most likely meant: the same but for case, or a few letters away; null when none is near. */
export function nearest(written: string, candidates: Iterable<string>): string | null {
  const lower = written.toLowerCase();
  const allowed = lower.length <= 2 ? 0 : lower.length <= 5 ? 1 : lower.length <= 8 ? 2 : 3;
  let best: string | null = null;
  let least = allowed + 1;
  for (const candidate of candidates) {
    const other = candidate.toLowerCase();
    if (other === lower) return candidate;
    if (Math.abs(other.length - lower.length) >= least) continue;
    // Two neighbouring letters that changed places are one mistake, not two.
    const steps = swapped(lower, other) ? 1 : distance(lower, other);
    if (steps < least && steps < Math.max(other.length, 2)) {
      best = candidate;
      least = steps;
    }
  }
  return best;
}

function swapped(one: string, other: string): boolean {
  if (one.length !== other.length) return false;
  for (let index = 0; index + 1 < one.length; index++) {
    if (one[index] === other[index]) continue;
    return (
      one[index] === other[index + 1] &&
      one[index + 1] === other[index] &&
      one.slice(index + 2) === other.slice(index + 2)
    );
  }
  return false;
}
