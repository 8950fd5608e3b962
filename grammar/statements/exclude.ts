import type { ConditionNode, ExcludeStatement } from "../ast.ts";
import { conditionText, quoted } from "../print.ts";
import { problem } from "../problems.ts";
import { BuildProblem } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { part, rule, sequence, text, words } from "../syntax.ts";

export const exclude = defineStatement<ExcludeStatement>({
  verb: "exclude",
  group: "data",
  help: "Leaves rows out, with the reason, which the report lists.",
  details: [
    "Counted by cell, and marked if it came after results were seen.",
    "To the right of a comparison a quoted text is a value; to the left quotes hold a column's name.",
    "Conditions: = != < <= > >=, among a, b, between x and y, is missing, and, or, not.",
  ],
  example: 'exclude where trial = 1 because "practice trial, excluded in the plan"',
  syntax: sequence(
    words("where"),
    rule("condition", "condition"),
    part("The reason, which is required.", words("because"), text("reason", "a reason in quotes")),
  ),
  build: (read) => {
    const reason = read.name("reason");
    if (reason.text.trim() === "") throw new BuildProblem(problem("reason-empty", reason.span, { verb: "exclude" }));
    return { kind: "exclude", condition: read.built<ConditionNode>("condition"), reason, span: read.span };
  },
  print: (it) => [`exclude where ${conditionText(it.condition)} because ${quoted(it.reason.text)}`],
});
