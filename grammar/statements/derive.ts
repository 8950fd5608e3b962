import type { DeriveStatement, ExpressionNode } from "../ast.ts";
import { expressionText, nameText } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { mark, name, rule, sequence } from "../syntax.ts";

export const derive = defineStatement<DeriveStatement>({
  verb: "derive",
  group: "data",
  help: "Makes a new column by arithmetic on others.",
  details: [
    "Signs: + - * / ^ and parentheses. Calculations: log of x, log10 of x, root of x, abs of x, exp of x, round of x.",
    "Choices: if CONDITION then VALUE else VALUE. No value: missing.",
    "Conditions: = != < <= > >=, among a, b, between x and y, is missing, and, or, not.",
  ],
  example: "derive speed = 60 / seconds",
  syntax: sequence(name("name", "a name for the column"), mark("="), rule("expression", "expression")),
  build: (read) => ({
    kind: "derive",
    name: read.name("name"),
    expression: read.built<ExpressionNode>("expression"),
    span: read.span,
  }),
  print: (it) => [`derive ${nameText(it.name)} = ${expressionText(it.expression)}`],
});
