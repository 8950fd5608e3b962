import type { AssumeStatement } from "../ast.ts";
import { defineStatement } from "../statement.ts";
import { choice, part, words } from "../syntax.ts";

export const assume = defineStatement<AssumeStatement>({
  verb: "assume",
  group: "declare",
  help: "Says what the analysis may take for granted about spread and dependence.",
  details: ["Equal variances stand by default; within subjects nothing is assumed, each contrast has its own error."],
  example: "assume unequal variances",
  syntax: choice(
    "an assumption",
    part("All cells have the same spread; their error is pooled.", words("equal variances", "what")),
    part(
      "Each cell has its own spread: Welch's test and Welch-Satterthwaite errors.",
      words("unequal variances", "what"),
    ),
    part(
      "Differences between any two levels within a subject have the same spread; their error is pooled.",
      words("sphericity", "what"),
    ),
    part("Any two values of a subject have the same correlation.", words("compound symmetry", "what")),
    part("Every pair of cells within a subject has its own covariance.", words("unstructured", "what")),
  ),
  build: (read) => ({ kind: "assume", what: read.word<AssumeStatement["what"]>("what")!, span: read.span }),
  print: (it) => [`assume ${it.what}`],
});
