import type { Allocation, MarginClause, NumberValue } from "./ast.ts";
import { problem } from "./problems.ts";
import { BuildProblem, type Read } from "./reader.ts";
import { either, number, part, rule, type Syntax, words } from "./syntax.ts";

/** Clauses that several statements have, with what they build. */

export const sidesClause = (): Syntax =>
  part(
    "The claim is that every estimate is above zero (upper) or below zero (lower); the interval's other end is open.",
    words("one-sided"),
    either(words("upper", "oneSided"), words("lower", "oneSided")),
  );
export const sidesOf = (read: Read): "two-sided" | "upper" | "lower" =>
  read.word<"upper" | "lower">("oneSided") ?? "two-sided";

export const marginClauses = (): Syntax[] => [
  part(
    "The claims are of equivalence: every difference is smaller than the margin, by two one-sided tests.",
    words("margin"),
    number("margin", "a margin"),
  ),
  part(
    "The claims are of not being worse by this much or more; the response says which direction is better.",
    words("not worse by"),
    number("notWorseBy", "a margin"),
  ),
];
export function marginOf(read: Read): MarginClause | null {
  const equivalence = read.numberOrNull("margin");
  const notWorse = read.numberOrNull("notWorseBy");
  if (equivalence !== null && notWorse !== null) {
    throw new BuildProblem(problem("said-twice", notWorse.span, { what: "margin" }));
  }
  const value = equivalence ?? notWorse;
  if (value === null) return null;
  if (value.value <= 0) {
    throw new BuildProblem(
      problem("number-range", value.span, {
        what: "A margin",
        value: value.text,
        allowed: "more than 0",
        percent: null,
      }),
    );
  }
  return { type: equivalence !== null ? "equivalence" : "not worse", value };
}

export const allocationClause = (): Syntax =>
  part(
    "How the subjects are shared out over the levels of a between factor, in proportion.",
    rule("allocation", "allocation"),
  );
export const costClause = (): Syntax =>
  part("What one more subject costs, in any currency.", words("cost"), number("cost", "a cost"), words("per subject"));
export const seedClause = (): Syntax =>
  part("The seed of the random numbers, so that anyone can repeat them.", words("seed"), number("seed", "a seed"));
export const studiesClause = (): Syntax =>
  part("How many studies are simulated.", words("with"), number("studies", "a number of studies"), words("studies"));
export const besideClause = (): Syntax =>
  part(
    "Beside the declared correction, what the other valid ones would have said; marked as a sensitivity view.",
    words("beside other methods", "beside"),
  );

/** Seeds are 32 bits wide. */
const largestSeed = 4_294_967_295;
export const seedOf = (read: Read): NumberValue | null => read.wholeOrNull("seed", "The seed", 0, largestSeed);
export const studiesOf = (read: Read): NumberValue | null => read.wholeOrNull("studies", "The number of studies");
export const allocationOf = (read: Read): Allocation | null => read.builtOrNull<Allocation>("allocation");
export function costOf(read: Read): NumberValue | null {
  const cost = read.numberOrNull("cost");
  if (cost === null || cost.value >= 0) return cost;
  throw new BuildProblem(
    problem("number-range", cost.span, { what: "The cost", value: cost.text, allowed: "0 or more", percent: null }),
  );
}

export const planningClauses = (): Syntax[] => [allocationClause(), costClause(), studiesClause(), seedClause()];
export const planningOf = (read: Read) => ({
  allocation: allocationOf(read),
  cost: costOf(read),
  studies: studiesOf(read),
  seed: seedOf(read),
});
