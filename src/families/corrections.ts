import { bh } from "./benjamini-hochberg.ts";
import { by } from "./benjamini-yekutieli.ts";
import { bonferroni } from "./bonferroni.ts";
import { conover } from "./conover.ts";
import type { Correction } from "./correction.ts";
import { dunn } from "./dunn.ts";
import { dunnett } from "./dunnett.ts";
import { fallback } from "./fallback.ts";
import { fixedSequence } from "./fixed-sequence.ts";
import { gamesHowell } from "./games-howell.ts";
import { graph } from "./graph.ts";
import { hochberg } from "./hochberg.ts";
import { holm } from "./holm.ts";
import { hommel } from "./hommel.ts";
import { nemenyi } from "./nemenyi.ts";
import { none } from "./none.ts";
import { resampling } from "./resampling.ts";
import { scheffe } from "./scheffe.ts";
import { shaffer } from "./shaffer.ts";
import { sidak } from "./sidak.ts";
import { singleStep } from "./single-step.ts";
import { stepDown } from "./step-down.ts";
import { tukey } from "./tukey.ts";
import type { CorrectionName } from "./types.ts";

/** Every method by its name in the language. */
export const corrections: Readonly<Record<CorrectionName, Correction>> = {
  none,
  bonferroni,
  sidak,
  holm,
  hochberg,
  hommel,
  shaffer,
  tukey,
  "games-howell": gamesHowell,
  dunnett,
  scheffe,
  "single-step": singleStep,
  "step-down": stepDown,
  resampling,
  "fixed sequence": fixedSequence,
  fallback,
  graph,
  bh,
  by,
  dunn,
  conover,
  nemenyi,
};

export const correctionNames: readonly CorrectionName[] = Object.keys(corrections) as CorrectionName[];
