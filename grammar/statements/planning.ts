import type { Aim, CalibrateStatement, DetectableStatement, Goal, NumberValue, PowerStatement, RehearseStatement, SizeStatement } from "../ast.ts";
import { BuildProblem, type Read } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { clauses, list, number, optional, rule, sequence, words } from "../syntax.ts";

const subjectList = sequence(words("with"), list("subjects", number("count", "a number of subjects")), optional(words("subjects")));

function counts(read: Read): readonly NumberValue[] {
  return read.groups("subjects").map((part) => whole(part.number("count"), "The number of subjects", 2));
}

function whole(value: NumberValue, what: string, least: number): NumberValue {
  if (Number.isInteger(value.value) && value.value >= least && !value.text.includes("%")) return value;
  throw new BuildProblem("number-range", `${what} is ${value.text}; it is a whole number, ${least} or more.`, "Give a whole number.", value.span);
}

function power(read: Read): NumberValue {
  const value = read.number("power");
  if (value.value > 0 && value.value < 1) return value;
  throw new BuildProblem("number-range", `The power asked for is ${value.text}; it lies above 0 and below 100%.`, "Write, for instance, 90%.", value.span);
}

export const size = defineStatement<SizeStatement>({
  verb: "size",
  group: "plan",
  help: "Finds how many subjects the declared comparisons, or the omnibus test, need for the power asked for.",
  details: ["on every comparison: all are found together. on any comparison: at least one. on each comparison: each for itself.", "Subjects are counted in all; the result gives them per group too."],
  example: "size primary for 90% power on every comparison",
  syntax: sequence(rule("aim", "aim"), words("for"), number("power", "a power"), words("power"), optional(rule("goal", "goal"))),
  build: (read) => ({ kind: "size", aim: read.built<Aim>("aim"), power: power(read), goal: read.has("goal") ? read.built<Goal>("goal") : "every", span: read.span }),
});

export const powerOf = defineStatement<PowerStatement>({
  verb: "power",
  group: "plan",
  help: "Gives the power of a family, or of the omnibus test, at given numbers of subjects.",
  details: ["power of primary with 20, 40, 60 subjects"],
  example: "power of primary with 20, 40, 60 subjects",
  syntax: sequence(words("of"), rule("aim", "aim"), subjectList),
  build: (read) => ({ kind: "power", aim: read.built<Aim>("aim"), subjects: counts(read), span: read.span }),
});

export const detectable = defineStatement<DetectableStatement>({
  verb: "detectable",
  group: "plan",
  help: "Finds the smallest differences, in the proportions expected, that a given number of subjects can detect.",
  details: ["detectable primary with 40 subjects for 80% power on every comparison"],
  example: "detectable primary with 40 subjects for 80% power",
  syntax: sequence(rule("aim", "aim"), subjectList, words("for"), number("power", "a power"), words("power"), optional(rule("goal", "goal"))),
  build: (read) => ({
    kind: "detectable",
    aim: read.built<Aim>("aim"),
    subjects: counts(read),
    power: power(read),
    goal: read.has("goal") ? read.built<Goal>("goal") : "every",
    span: read.span,
  }),
});

export const rehearse = defineStatement<RehearseStatement>({
  verb: "rehearse",
  group: "plan",
  help: "Simulates data from what is expected and holds them as if they had been read, marked as a rehearsal everywhere.",
  details: ["Reading real data drops the rehearsal. A seed makes it the same each time."],
  example: "rehearse with 24 subjects, seed 7",
  syntax: sequence(words("with"), number("subjects", "a number of subjects"), optional(words("subjects")), clauses(sequence(words("seed"), number("seed", "a seed")))),
  build: (read) => {
    const seed = read.numberOrNull("seed");
    return { kind: "rehearse", subjects: whole(read.number("subjects"), "The number of subjects", 2), seed: seed === null ? null : whole(seed, "The seed", 0), span: read.span };
  },
});

export const calibrate = defineStatement<CalibrateStatement>({
  verb: "calibrate",
  group: "plan",
  help: "Simulates many studies with this design and tells the error, power and coverage that the declared procedure really has.",
  details: ["With data held, their group sizes, spreads and shape are used beside the plan's expectations."],
  example: "calibrate primary with 20000 studies",
  syntax: sequence(
    rule("aim", "aim"),
    clauses(
      sequence(words("with"), number("studies", "a number of studies"), words("studies")),
      sequence(words("with"), number("subjects", "a number of subjects"), words("subjects")),
      sequence(words("seed"), number("seed", "a seed")),
    ),
  ),
  build: (read) => {
    const studies = read.numberOrNull("studies");
    const seed = read.numberOrNull("seed");
    const subjects = read.numberOrNull("subjects");
    return {
      kind: "calibrate",
      aim: read.built<Aim>("aim"),
      studies: studies === null ? null : whole(studies, "The number of studies", 1),
      seed: seed === null ? null : whole(seed, "The seed", 0),
      subjects: subjects === null ? null : whole(subjects, "The number of subjects", 2),
      span: read.span,
    };
  },
});
