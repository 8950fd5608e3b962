import type { SealStatement } from "../ast.ts";
import { quoted } from "../print.ts";
import { problem } from "../problems.ts";
import { BuildProblem } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { sequence, text, words } from "../syntax.ts";

export const seal = defineStatement<SealStatement>({
  verb: "seal",
  group: "record",
  help: "Fixes the plan: writes it with its digest and time, to be deposited wherever plans are registered.",
  details: ["Comparisons of a plan that was sealed before data were read are planned; all others are not."],
  example: 'seal plan as "glove"',
  syntax: sequence(words("plan as"), text("name", "a name in quotes")),
  build: (read) => {
    const name = read.name("name");
    if (name.text.trim() === "") throw new BuildProblem(problem("name-empty", name.span, { what: "The plan's name" }));
    return { kind: "seal", name, span: read.span };
  },
  print: (it) => [`seal plan as ${quoted(it.name.text)}`],
});
