import type { AmendStatement, Declaration, DropPart } from "../ast.ts";
import { nameText, quoted } from "../print.ts";
import { problem } from "../problems.ts";
import { BuildProblem } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import {
  choice,
  either,
  group,
  lineBreak,
  name,
  part,
  type Syntax,
  sequence,
  statement,
  text,
  words,
} from "../syntax.ts";
import { assume } from "./assume.ts";
import { blocks } from "./blocks.ts";
import { contrast } from "./contrast.ts";
import { covariate } from "./covariate.ts";
import { expect } from "./expect.ts";
import { factor } from "./factor.ts";
import { family } from "./family.ts";
import { items } from "./items.ts";
import { response } from "./response.ts";
import { study } from "./study.ts";
import { subjects } from "./subjects.ts";

/** The statements that a plan is made of. */
export const declarations = {
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
} as const;

/** The lines of a declaration, whichever it is. */
function declarationLines(it: Declaration): readonly string[] {
  const { print } = declarations[it.kind] as { print: (statement: Declaration) => readonly string[] };
  return print(it);
}

const drop: Syntax = part(
  "Takes a declaration out of the plan.",
  group(
    "drop",
    words("drop"),
    either(words("contrast", "what"), words("family", "what"), words("factor", "what"), words("covariate", "what")),
    name("name", "a name", "contrasts"),
  ),
);

export const amend = defineStatement<AmendStatement>({
  verb: "amend",
  group: "record",
  help: "Changes a declaration of a sealed plan, with the reason; the original is kept beside it.",
  details: ["Comparisons that it touches are marked everywhere, and exploratory if results had been seen."],
  example: `amend family primary: each glove against bare
  hold error 5% by holm
  because "single-step was not available at the second site"`,
  continues: true,
  syntax: sequence(
    choice("a declaration or drop", drop, ...Object.keys(declarations).map((verb) => statement(verb, "declaration"))),
    lineBreak,
    part("The reason, which is required.", words("because"), text("reason", "a reason in quotes")),
  ),
  build: (read) => {
    const reason = read.name("reason");
    if (reason.text.trim() === "") throw new BuildProblem(problem("reason-empty", reason.span, { verb: "amend" }));
    const dropped = read.group("drop");
    const change: Declaration | DropPart =
      dropped === null
        ? read.built<Declaration>("declaration")
        : {
            kind: "drop",
            what: dropped.word<DropPart["what"]>("what")!,
            name: dropped.name("name"),
            span: dropped.span,
          };
    return { kind: "amend", change, reason, span: read.span };
  },
  print: (it) => {
    const reason = `because ${quoted(it.reason.text)}`;
    if (it.change.kind === "drop") return [`amend drop ${it.change.what} ${nameText(it.change.name)} ${reason}`];
    const lines = declarationLines(it.change);
    return [`amend ${lines[0]}`, ...lines.slice(1), reason];
  },
});
