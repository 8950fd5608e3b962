import type { OpenStatement } from "../ast.ts";
import { quoted } from "../print.ts";
import { problem } from "../problems.ts";
import { BuildProblem } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { sequence, text, words } from "../syntax.ts";

export const open = defineStatement<OpenStatement>({
  verb: "open",
  group: "record",
  help: "Loads a sealed plan, checks its digest, and holds its declarations fixed.",
  details: ['To change it afterwards: amend DECLARATION because "the reason".'],
  example: 'open plan "glove"',
  syntax: sequence(words("plan"), text("name", "a plan's name in quotes", "plans")),
  build: (read) => {
    const name = read.name("name");
    if (name.text.trim() === "") throw new BuildProblem(problem("name-empty", name.span, { what: "The plan's name" }));
    return { kind: "open", name, span: read.span };
  },
  print: (it) => [`open plan ${quoted(it.name.text)}`],
});
