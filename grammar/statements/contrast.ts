import type { ContrastNode, ContrastStatement } from "../ast.ts";
import { contrastText, nameText } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { either, level, list, mark, name, number, part, rule, sequence, words } from "../syntax.ts";

export const contrast = defineStatement<ContrastStatement>({
  verb: "contrast",
  group: "declare",
  help: "Names a comparison of means: arithmetic over levels, or weights.",
  details: [
    "A level stands for the mean of its cells, each weighing the same; at fixes a level of another factor.",
    "Weights must sum to zero.",
    "Levels of digits are quoted here, since a bare number is a number.",
  ],
  example: `contrast shift_gap: (leather - bare at night) - (leather - bare at day)`,
  syntax: sequence(
    name("name", "a name for the contrast"),
    mark(":"),
    either(
      part(
        "A weight for each level; the others weigh nothing.",
        words("weights", "weights"),
        list("weight", sequence(level("level"), number("weight", "a weight"))),
      ),
      rule("contrastExpression", "expression"),
    ),
  ),
  build: (read) => ({
    kind: "contrast",
    name: read.name("name"),
    expression: read.has("weights")
      ? {
          type: "weights",
          weights: read.groups("weight").map((each) => ({ level: each.name("level"), weight: each.number("weight") })),
        }
      : read.built<ContrastNode>("expression"),
    span: read.span,
  }),
  print: (it) => [`contrast ${nameText(it.name)}: ${contrastText(it.expression)}`],
});
