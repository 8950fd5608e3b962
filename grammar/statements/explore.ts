import type { ExploreStatement, MemberNode, MethodWord } from "../ast.ts";
import { besideClause, marginClauses, marginOf, sidesClause, sidesOf } from "../clause-parts.ts";
import { marginText, membersText, numberText, sidesText } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { clauses, either, list, number, optional, part, rule, sequence, words } from "../syntax.ts";

export const explore = defineStatement<ExploreStatement>({
  verb: "explore",
  group: "analyse",
  help: "Makes comparisons that no family declares; they are marked exploratory wherever they appear.",
  details: ["Without by METHOD each comparison is judged alone."],
  example: "explore all pairs of glove by holm",
  syntax: sequence(
    list("members", rule("member", "member")),
    optional(words("by"), rule("method", "method")),
    clauses(
      part(
        "How much error there may be in all; 5% unless told otherwise.",
        words("hold", "hold"),
        either(words("error", "holds"), words("false discovery", "holds")),
        number("rate", "an error rate"),
      ),
      sidesClause(),
      ...marginClauses(),
      besideClause(),
    ),
  ),
  build: (read) => {
    const method = read.builtOrNull<MethodWord>("method");
    const discovery = read.word("hold") !== null ? read.word("holds") !== "error" : method === "bh" || method === "by";
    return {
      kind: "explore",
      members: read.groups("members").map((each) => each.built<MemberNode>("member")),
      method,
      rate: read.shareOrNull("rate", "The error rate"),
      holds: discovery ? "false discovery" : "family",
      sides: sidesOf(read),
      margin: marginOf(read),
      beside: read.word("beside") !== null,
      span: read.span,
    };
  },
  print: (it) => [
    `explore ${membersText(it.members)}${it.method === null ? "" : ` by ${it.method}`}`,
    ...(it.rate === null ? [] : [`hold ${it.holds === "family" ? "error" : "false discovery"} ${numberText(it.rate)}`]),
    ...sidesText(it.sides),
    ...marginText(it.margin),
    ...(it.beside ? ["beside other methods"] : []),
  ],
});
