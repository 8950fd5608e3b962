import type { CheckStatement } from "../ast.ts";
import { defineStatement } from "../statement.ts";
import { sequence } from "../syntax.ts";

export const check = defineStatement<CheckStatement>({
  verb: "check",
  group: "analyse",
  help: "Compares the design found with the design declared, and looks at the assumptions.",
  details: ["Each finding says what to do about it; what makes an analysis wrong stops omnibus, compare and explore."],
  example: "check",
  syntax: sequence(),
  build: (read) => ({ kind: "check", span: read.span }),
  print: () => ["check"],
});
