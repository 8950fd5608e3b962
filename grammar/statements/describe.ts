import type { DescribeStatement } from "../ast.ts";
import { nameText, namesText } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { either, list, name, optional, part, type Syntax, sequence, words } from "../syntax.ts";

const quartiles = (): Syntax =>
  part("Also the median and the quartiles.", words("with median and quartiles", "quartiles"));

const byFactors = (): Syntax => sequence(words("by"), list("factors", name("factor", "a factor", "factors")));

export const describe = defineStatement<DescribeStatement>({
  verb: "describe",
  group: "analyse",
  help: "Number, mean, spread, standard error and interval of each cell.",
  details: [
    "Without names: the response by all factors. Within subjects the intervals leave out differences between subjects.",
  ],
  example: "describe seconds by glove, shift",
  syntax: optional(
    either(
      quartiles(),
      sequence(byFactors(), optional(quartiles())),
      sequence(name("response", "the response", "response"), optional(byFactors()), optional(quartiles())),
    ),
  ),
  build: (read) => ({
    kind: "describe",
    response: read.nameOrNull("response"),
    by: read.groups("factors").map((each) => each.name("factor")),
    quartiles: read.has("quartiles"),
    span: read.span,
  }),
  print: (it) => [
    [
      "describe",
      ...(it.response === null ? [] : [nameText(it.response)]),
      ...(it.by.length === 0 ? [] : [`by ${namesText(it.by)}`]),
      ...(it.quartiles ? ["with median and quartiles"] : []),
    ].join(" "),
  ],
});
