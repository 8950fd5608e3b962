import type { DetectableStatement, PowerStatement, SizeStatement } from "../ast.ts";
import { allocationText, clauseText } from "../print.ts";

/** The clauses that `size`, `power` and `detectable` share. */
export const planningText = (it: SizeStatement | PowerStatement | DetectableStatement): readonly string[] => [
  ...allocationText(it.allocation),
  ...clauseText("cost", it.cost, " per subject"),
  ...clauseText("with", it.studies, " studies"),
  ...clauseText("seed", it.seed),
];
