import type { AverageStatement } from "../ast.ts";
import { nameText, namesText } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { either, list, name, optional, sequence, words } from "../syntax.ts";

export const average = defineStatement<AverageStatement>({
  verb: "average",
  group: "data",
  help: "Takes repeated trials together: one value for each subject and cell.",
  details: ["By mean unless told otherwise; by median where single trials run far out."],
  example: "average seconds over trial",
  syntax: sequence(
    name("response", "the response", "response"),
    words("over"),
    list("over", name("column", "a column", "columns")),
    optional(words("by"), either(words("mean", "by"), words("median", "by"))),
  ),
  build: (read) => ({
    kind: "average",
    response: read.name("response"),
    over: read.groups("over").map((each) => each.name("column")),
    by: read.word<"mean" | "median">("by") ?? "mean",
    span: read.span,
  }),
  print: (it) => [
    `average ${nameText(it.response)} over ${namesText(it.over)}${it.by === "median" ? " by median" : ""}`,
  ],
});
