import { check, compare, describe, draw, explore, omnibus } from "./analyses.ts";
import { average, data, derive, exclude, read, show } from "./data.ts";
import { assume, blocks, contrast, covariate, expect, factor, family, items, response, study, subjects } from "./declarations.ts";
import { calibrate, detectable, powerOf, rehearse, size } from "./planning.ts";
import { amend, audit, exportTo, help, open, report, seal, set } from "./record.ts";

/** Every statement of the language, by verb: everything else is computed from this list. */
export const statements = {
  study,
  response,
  subjects,
  items,
  blocks,
  factor,
  covariate,
  contrast,
  family,
  assume,
  expect,
  size,
  power: powerOf,
  detectable,
  rehearse,
  seal,
  open,
  amend,
  read,
  data,
  derive,
  exclude,
  average,
  show,
  check,
  describe,
  draw,
  omnibus,
  compare,
  explore,
  calibrate,
  report,
  audit,
  export: exportTo,
  set,
  help,
} as const;

export type Verb = keyof typeof statements;
export const verbs = Object.keys(statements) as readonly Verb[];
