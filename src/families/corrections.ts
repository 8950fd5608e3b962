import { bh } from "./benjamini-hochberg.ts";
import { by } from "./benjamini-yekutieli.ts";
import { bonferroni } from "./bonferroni.ts";
import type { Correction } from "./correction.ts";
import { fallback } from "./fallback.ts";
import { fixedSequence } from "./fixed-sequence.ts";
import { graph } from "./graph.ts";
import { hochberg } from "./hochberg.ts";
import { holm } from "./holm.ts";
import { hommel } from "./hommel.ts";
import { none } from "./none.ts";
import { sidak } from "./sidak.ts";
import type { CorrectionName } from "./types.ts";

/** Every method by its name in the language. */
export const corrections: Readonly<Record<CorrectionName, Correction>> = {
  none,
  bonferroni,
  sidak,
  holm,
  hochberg,
  hommel,
  "fixed sequence": fixedSequence,
  fallback,
  graph,
  bh,
  by,
} as Readonly<Record<CorrectionName, Correction>>;

export const correctionNames: readonly CorrectionName[] = Object.keys(corrections) as CorrectionName[];
