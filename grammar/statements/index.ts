import type { Statement } from "../ast.ts";
import type { StatementDescription } from "../statement.ts";
import { amend } from "./amend.ts";
import { assume } from "./assume.ts";
import { audit } from "./audit.ts";
import { average } from "./average.ts";
import { blocks } from "./blocks.ts";
import { calibrate } from "./calibrate.ts";
import { check } from "./check.ts";
import { compare } from "./compare.ts";
import { contrast } from "./contrast.ts";
import { covariate } from "./covariate.ts";
import { data } from "./data.ts";
import { derive } from "./derive.ts";
import { describe } from "./describe.ts";
import { detectable } from "./detectable.ts";
import { draw } from "./draw.ts";
import { exclude } from "./exclude.ts";
import { expect } from "./expect.ts";
import { explore } from "./explore.ts";
import { exportStatement } from "./export.ts";
import { factor } from "./factor.ts";
import { family } from "./family.ts";
import { help } from "./help.ts";
import { items } from "./items.ts";
import { omnibus } from "./omnibus.ts";
import { open } from "./open.ts";
import { power } from "./power.ts";
import { read } from "./read.ts";
import { rehearse } from "./rehearse.ts";
import { report } from "./report.ts";
import { response } from "./response.ts";
import { seal } from "./seal.ts";
import { set } from "./set.ts";
import { show } from "./show.ts";
import { size } from "./size.ts";
import { study } from "./study.ts";
import { subjects } from "./subjects.ts";

/** The catalogue: parser, completion, hover, help, reference page and highlighting are computed from this list. */
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
  power,
  detectable,
  rehearse,
  calibrate,
  read,
  data,
  derive,
  exclude,
  average,
  show,
  check,
  describe,
  omnibus,
  compare,
  explore,
  draw,
  seal,
  open,
  amend,
  report,
  audit,
  export: exportStatement,
  set,
  help,
} as const satisfies { readonly [K in Statement["kind"]]: StatementDescription<Extract<Statement, { kind: K }>> };

export type Verb = keyof typeof statements;
/** The descriptions with the statement's type left open, for those who treat all alike. */
export const catalogue: ReadonlyMap<string, StatementDescription<Statement>> = new Map(
  Object.entries(statements).map(([verb, description]) => [
    verb,
    description as unknown as StatementDescription<Statement>,
  ]),
);
