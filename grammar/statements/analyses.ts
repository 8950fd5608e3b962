import type {
  CheckStatement,
  CompareStatement,
  DescribeStatement,
  DrawStatement,
  ExploreStatement,
  MemberNode,
  MethodWord,
  OmnibusMethod,
  OmnibusStatement,
} from "../ast.ts";
import { BuildProblem } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { clauses, either, group, list, name, number, optional, repeat, rule, sequence, words } from "../syntax.ts";

const factors = (label: string) => list(label, name("factor", "a factor", "factors"));

export const check = defineStatement<CheckStatement>({
  verb: "check",
  group: "analyse",
  help: "Compares the design found in the data with the one declared, then looks at the assumptions; each finding ends in what to do.",
  details: ["Findings that would make an analysis wrong stop omnibus, compare and explore."],
  example: "check",
  syntax: sequence(),
  build: (read) => ({ kind: "check", span: read.span }),
});

export const describe = defineStatement<DescribeStatement>({
  verb: "describe",
  group: "analyse",
  help: "Gives n, mean, spread, standard error and interval of each cell; within-subject intervals where the factor is within.",
  details: ["with quartiles adds the median and both quartiles."],
  example: "describe seconds by glove, shift",
  syntax: sequence(optional(name("response", "the response", "response")), clauses(sequence(words("by"), factors("by")), words("with quartiles", "quartiles"))),
  build: (read) => ({
    kind: "describe",
    response: read.nameOrNull("response"),
    by: read.groups("by").map((part) => part.name("factor")),
    quartiles: read.has("quartiles"),
    span: read.span,
  }),
});

const omnibusMethods: readonly OmnibusMethod[] = [
  "multilevel model",
  "variance analysis",
  "welch",
  "brown-forsythe",
  "ranks",
  "resampling",
  "multivariate tests",
];

export const omnibus = defineStatement<OmnibusStatement>({
  verb: "omnibus",
  group: "analyse",
  help: "Tests whether the factors matter at all, in the model that the design calls for. compare never needs it first.",
  details: [
    "by METHOD: multilevel model, variance analysis, welch, brown-forsythe, ranks, resampling, multivariate tests.",
    "of glove, glove with shift asks for these effects only.",
    "respecting marginality adjusts each effect only for those that do not contain it; otherwise cells weigh equally.",
    "by satterthwaite changes the degrees of freedom of the multilevel model; with 999 bootstrap studies adds a simulated p to the likelihood ratio.",
  ],
  example: "omnibus",
  syntax: sequence(
    clauses(
      sequence(
        words("of"),
        list("effects", sequence(name("factor", "a factor", "factors"), repeat(words("with"), name("factor", "a factor", "factors")))),
      ),
      sequence(words("by"), either(...omnibusMethods.map((method) => group(method, words(method))), group("satterthwaite", words("satterthwaite")), group("kenward", words("kenward-roger")))),
      words("respecting marginality", "marginality"),
      sequence(words("with"), number("bootstrap", "a number of studies"), words("bootstrap studies")),
    ),
  ),
  build: (read) => ({
    kind: "omnibus",
    method: omnibusMethods.find((method) => read.has(method)) ?? (read.has("satterthwaite") || read.has("kenward") ? "multilevel model" : null),
    effects: read.has("effects") ? read.groups("effects").map((part) => part.names("factor")) : null,
    marginality: read.has("marginality"),
    degrees: read.has("satterthwaite") ? "satterthwaite" : read.has("kenward") ? "kenward-roger" : null,
    bootstrap: read.numberOrNull("bootstrap"),
    span: read.span,
  }),
});

export const compare = defineStatement<CompareStatement>({
  verb: "compare",
  group: "analyse",
  help: "Tests one declared family, always whole, and holds its error by the method it declares.",
  details: ["beside other methods adds what every other valid method would have said, marked as a view of sensitivity."],
  example: "compare primary",
  syntax: sequence(name("family", "a family", "families"), clauses(words("beside other methods", "beside"))),
  build: (read) => ({ kind: "compare", family: read.name("family"), beside: read.has("beside"), span: read.span }),
});

export const explore = defineStatement<ExploreStatement>({
  verb: "explore",
  group: "analyse",
  help: "Looks at comparisons that were not committed to; marked exploratory wherever they appear.",
  details: ["Members and methods are those of family: explore all pairs of glove by holm."],
  example: "explore all pairs of glove by holm",
  syntax: sequence(
    list("members", rule("member", "member")),
    clauses(
      sequence(words("by"), rule("method", "short")),
      sequence(words("hold"), either(words("error", "family"), words("false discovery", "discovery")), number("rate", "an error"), words("by"), rule("method", "method")),
      words("one-sided upper", "upper"),
      words("one-sided lower", "lower"),
      sequence(words("margin"), number("margin", "a margin")),
      sequence(words("not worse by"), number("worse", "a margin")),
    ),
  ),
  build: (read) => {
    const margin = read.numberOrNull("margin");
    const worse = read.numberOrNull("worse");
    const rate = read.numberOrNull("rate");
    if (rate !== null && !(rate.value > 0 && rate.value < 1)) {
      throw new BuildProblem("number-range", `The error held is ${rate.text}; it lies above 0 and below 100%.`, "Write, for instance, hold error 5% by holm.", rate.span);
    }
    const method = read.has("method") ? read.built<MethodWord>("method") : read.has("short") ? read.built<MethodWord>("short") : null;
    return {
      kind: "explore",
      members: read.groups("members").map((part) => part.built<MemberNode>("member")),
      method,
      rate,
      holds: read.has("discovery") || method === "bh" || method === "by" ? "false discovery" : "family",
      sides: read.has("upper") ? "upper" : read.has("lower") ? "lower" : "two-sided",
      margin: margin !== null ? { type: "equivalence", value: margin } : worse !== null ? { type: "not worse", value: worse } : null,
      span: read.span,
    };
  },
});

export const draw = defineStatement<DrawStatement>({
  verb: "draw",
  group: "analyse",
  help: "Draws means, profiles, distributions, residuals, comparisons, power, passing or calibration.",
  details: [
    "means of seconds by glove, shift: means with intervals over the single values.",
    "profiles: each subject's line. distributions: every value by level. residuals: against fitted values and normal quantiles.",
    "comparisons FAMILY: intervals against zero or the margin. power of FAMILY from 8 to 60 subjects. passing: how error moves between families. calibration: what calibrate found.",
  ],
  example: "draw means of seconds by glove, shift",
  syntax: either(
    sequence(
      either(words("means", "means"), words("profiles", "profiles"), words("distributions", "distributions")),
      optional(words("of"), name("response", "the response", "response")),
      optional(words("by"), factors("by")),
    ),
    words("residuals", "residuals"),
    sequence(words("comparisons", "comparisons"), optional(words("of")), optional(name("family", "a family", "families"))),
    sequence(
      words("power", "power"),
      words("of"),
      either(words("omnibus", "omnibus"), name("family", "a family", "families")),
      optional(words("from"), number("from", "a number of subjects"), words("to"), number("to", "a number of subjects"), optional(words("subjects"))),
    ),
    words("passing", "passing"),
    sequence(words("calibration", "calibration"), optional(words("of"), name("family", "a family", "families"))),
  ),
  build: (read) => {
    const what = (["means", "profiles", "distributions", "residuals", "comparisons", "power", "passing", "calibration"] as const).find((word) => read.has(word))!;
    const from = read.numberOrNull("from");
    const to = read.numberOrNull("to");
    if (from !== null && to !== null && from.value > to.value) {
      throw new BuildProblem("number-range", `The range runs from ${from.text} down to ${to.text}.`, "Begin with the smaller number of subjects.", from.span);
    }
    return {
      kind: "draw",
      what,
      response: read.nameOrNull("response"),
      by: read.groups("by").map((part) => part.name("factor")),
      family: read.nameOrNull("family"),
      omnibus: read.has("omnibus"),
      from,
      to,
      span: read.span,
    };
  },
});
