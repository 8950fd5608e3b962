/**
 * Whether a unit as written means a declared one: the same word, or its plain English plural ("between operators" for
 * `operator`, "batches" for `batch`, "colonies" for `colony`).
 */
export function sameUnit(written: string, declared: string): boolean {
  if (written === declared || written === `${declared}s`) return true;
  if (/(s|x|z|ch|sh)$/.test(declared) && written === `${declared}es`) return true;
  return /[^aeiou]y$/.test(declared) && written === `${declared.slice(0, -1)}ies`;
}
