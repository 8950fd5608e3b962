import type {
  AssumeStatement,
  BlocksStatement,
  ContrastNode,
  ContrastStatement,
  CovariateStatement,
  ExpectedLevels,
  ExpectStatement,
  FactorStatement,
  FamilyStatement,
  ItemsStatement,
  MemberNode,
  MethodWord,
  NumberValue,
  ResponseStatement,
  StudyStatement,
  SubjectsStatement,
} from "../ast.ts";
import { BuildProblem, type Read } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { clauses, either, group, level, list, mark, name, number, optional, repeat, rule, sequence, text, words } from "../syntax.ts";

export const study = defineStatement<StudyStatement>({
  verb: "study",
  group: "declare",
  help: "Names the study; the report carries the title, and the caution where one is given.",
  details: ["The caution says in a sentence what the findings must not be taken for."],
  example: 'study "Glove type and assembly time"\n  caution "Findings inform glove choice; they do not replace the site\'s hand-protection rules."',
  syntax: sequence(text("title", "a title in quotes"), clauses(sequence(words("caution"), text("caution", "a sentence in quotes")))),
  build: (read) => ({ kind: "study", title: read.name("title"), caution: read.nameOrNull("caution"), span: read.span }),
});

export const response = defineStatement<ResponseStatement>({
  verb: "response",
  group: "declare",
  help: "Names the column that is measured, with its label, unit and which direction is better.",
  details: [
    "on log scale analyses the logarithm and gives results back as ratios of (geometric) means.",
    "lower is better or higher is better puts a direction into sentences, and tells not worse by which way is worse.",
  ],
  example: 'response seconds "assembly time" in "s", lower is better',
  syntax: sequence(
    name("name", "a column", "columns"),
    optional(text("label", "a label in quotes")),
    clauses(
      sequence(words("in"), text("unit", "a unit in quotes")),
      words("lower is better", "lower"),
      words("higher is better", "higher"),
      words("on log scale", "log"),
    ),
  ),
  build: (read) => ({
    kind: "response",
    name: read.name("name"),
    label: read.nameOrNull("label"),
    unit: read.nameOrNull("unit"),
    better: direction(read),
    scale: read.has("log") ? "log" : "linear",
    span: read.span,
  }),
});

function direction(read: Read): "lower" | "higher" | null {
  if (read.has("lower") && read.has("higher")) {
    throw new BuildProblem("said-twice", "Lower and higher cannot both be better.", "Keep one of them.", read.span);
  }
  return read.has("lower") ? "lower" : read.has("higher") ? "higher" : null;
}

export const subjects = defineStatement<SubjectsStatement>({
  verb: "subjects",
  group: "declare",
  help: "Names the column that says which participant, animal or plot a row belongs to: the unit that is sampled.",
  details: ["nested in names the larger units around it, innermost first: litters, herds, teams.", "slopes lets the effect of a within covariate differ between subjects."],
  example: "subjects operator",
  syntax: sequence(
    name("name", "a column", "columns"),
    repeat(words("nested in"), name("nested", "a larger unit", "columns")),
    clauses(sequence(words("slopes"), list("slopes", name("slope", "a covariate", "columns")))),
  ),
  build: (read) => ({
    kind: "subjects",
    name: read.name("name"),
    nestedIn: read.names("nested"),
    slopes: read.groups("slopes").map((part) => part.name("slope")),
    span: read.span,
  }),
});

export const items = defineStatement<ItemsStatement>({
  verb: "items",
  group: "declare",
  help: "Names a second sampling unit that is crossed with the subjects, such as the passages or pictures they were shown.",
  details: ["Conclusions then reach beyond the items used, as they reach beyond the subjects."],
  example: "items passage",
  syntax: name("name", "a column", "columns"),
  build: (read) => ({ kind: "items", name: read.name("name"), span: read.span }),
});

export const blocks = defineStatement<BlocksStatement>({
  verb: "blocks",
  group: "declare",
  help: "Names a blocking unit, such as the field or day within which conditions were assigned.",
  details: ["Differences between blocks are taken out of the error."],
  example: "blocks bench",
  syntax: name("name", "a column", "columns"),
  build: (read) => ({ kind: "blocks", name: read.name("name"), span: read.span }),
});

export const factor = defineStatement<FactorStatement>({
  verb: "factor",
  group: "declare",
  help: "Declares a factor, the unit within or between which it varies, and its levels in order.",
  details: [
    "at gives each level a numeric position, for trends.",
    "ordered says that the order of the levels means something; reference names the level that others are set against.",
    "measured marks an attribute that nobody assigned, such as sex.",
  ],
  example: "factor glove within operator: bare, nitrile, knit, leather",
  syntax: sequence(
    name("name", "a factor", "columns"),
    either(words("within", "within"), words("between", "between")),
    name("unit", "a sampling unit", "units"),
    optional(words("between"), name("betweenUnit", "a second sampling unit", "units")),
    mark(":"),
    list("levels", level("level")),
    clauses(
      words("ordered", "ordered"),
      words("measured", "measured"),
      sequence(words("reference"), level("reference")),
      sequence(words("at"), list("positions", sequence(optional(mark("-", "minus")), number("position", "a position")))),
    ),
  ),
  build: (read) => ({
    kind: "factor",
    name: read.name("name"),
    varies: read.has("within") ? "within" : "between",
    unit: read.name("unit"),
    betweenUnit: read.nameOrNull("betweenUnit"),
    levels: read.groups("levels").map((part) => part.name("level")),
    ordered: read.has("ordered"),
    measured: read.has("measured"),
    reference: read.nameOrNull("reference"),
    positions: read.has("positions") ? read.groups("positions").map((part) => signed(part, "position")) : null,
    span: read.span,
  }),
});

function signed(read: Read, label: string): NumberValue {
  const found = read.number(label);
  return read.has("minus") ? { ...found, value: -found.value, text: `-${found.text}` } : found;
}

export const covariate = defineStatement<CovariateStatement>({
  verb: "covariate",
  group: "declare",
  help: "Declares a numeric column that is adjusted for, centred on its mean.",
  details: ["within or between says whether it changes within a subject.", "uncentred keeps its own zero."],
  example: "covariate age between operators",
  syntax: sequence(
    name("name", "a column", "columns"),
    optional(either(words("within", "within"), words("between", "between")), optional(name("unit", "a sampling unit", "units"))),
    clauses(words("centred", "centred"), words("uncentred", "uncentred")),
  ),
  build: (read) => ({
    kind: "covariate",
    name: read.name("name"),
    varies: read.has("within") ? "within" : "between",
    unit: read.nameOrNull("unit"),
    centred: !read.has("uncentred"),
    span: read.span,
  }),
});

export const contrast = defineStatement<ContrastStatement>({
  verb: "contrast",
  group: "declare",
  help: "Names a comparison: arithmetic over means of levels, or weights that sum to zero.",
  details: [
    "A level stands for the mean of its cells, each weighing the same; at holds levels of other factors fixed.",
    "mean(a, b) averages; (a - b at x) - (a - b at y) asks whether a difference differs.",
  ],
  example: "contrast gloved: mean(nitrile, knit, leather) - bare",
  syntax: sequence(
    name("name", "a name for it"),
    mark(":"),
    either(
      sequence(words("weights", "weights"), list("entries", sequence(level("level"), optional(mark("-", "minus")), number("weight", "a weight")))),
      rule("contrastExpression", "expression"),
    ),
  ),
  build: (read) => ({
    kind: "contrast",
    name: read.name("name"),
    expression: read.has("weights")
      ? { type: "weights", weights: read.groups("entries").map((part) => ({ level: part.name("level"), weight: signed(part, "weight") })) }
      : read.built<ContrastNode>("expression"),
    span: read.span,
  }),
});

export const family = defineStatement<FamilyStatement>({
  verb: "family",
  group: "declare",
  help: "Declares comparisons that stand or fall together, the error held over them and the method that holds it.",
  details: [
    "Members: contrasts by name; each F against L; each F against mean; all pairs of F; neighbours of F; trend of F: linear, quadratic; any of them at a level or at each G.",
    "hold error 5% by METHOD holds the chance of even one false alarm; hold false discovery 5% by bh holds the expected share of false ones among those found.",
    "one-sided upper claims that the estimate is above zero, one-sided lower below. margin 2 claims that it lies within 2 of zero; not worse by 2 that it is not worse by as much.",
    "after FAMILY: tested only when every comparison of that family is rejected; after any of FAMILY passes on the error of the part that is.",
    "weights and pass belong to fallback and graph.",
  ],
  example: "family primary: each glove against bare\n  hold error 5% by single-step",
  syntax: sequence(
    name("name", "a name for it"),
    mark(":"),
    list("members", rule("member", "member")),
    clauses(
      sequence(
        words("hold"),
        either(words("error", "family"), words("false discovery", "discovery")),
        number("rate", "an error"),
        words("by"),
        rule("method", "method"),
      ),
      words("one-sided upper", "upper"),
      words("one-sided lower", "lower"),
      words("two-sided", "two"),
      sequence(words("after any of", "any"), name("afterAny", "a family", "families")),
      sequence(words("after"), name("after", "a family", "families")),
      sequence(words("margin"), number("margin", "a margin")),
      sequence(words("not worse by"), number("worse", "a margin")),
      sequence(words("weights"), list("weights", sequence(name("member", "a member", "contrasts"), number("weight", "a weight")))),
      sequence(words("pass"), list("passes", sequence(name("from", "a member", "contrasts"), words("to"), name("to", "a member", "contrasts"), number("share", "a share")))),
    ),
  ),
  build: (read) => {
    const margin = read.numberOrNull("margin");
    const worse = read.numberOrNull("worse");
    const afterAny = read.nameOrNull("afterAny");
    const after = read.nameOrNull("after");
    const rate = read.numberOrNull("rate");
    if (rate !== null && !(rate.value > 0 && rate.value < 1)) {
      throw new BuildProblem("number-range", `The error held is ${rate.text}; it lies above 0 and below 100%.`, "Write, for instance, hold error 5% by holm.", rate.span);
    }
    for (const size of [margin, worse]) {
      if (size !== null && !(size.value > 0)) {
        throw new BuildProblem("number-range", `The margin is ${size.text}; it must be above zero.`, "Give the largest difference that does not matter, in the response's unit.", size.span);
      }
    }
    return {
      kind: "family",
      name: read.name("name"),
      members: read.groups("members").map((part) => part.built<MemberNode>("member")),
      hold: rate === null ? null : { rate, method: read.built<MethodWord>("method"), holds: read.has("discovery") ? "false discovery" : "family" },
      sides: read.has("upper") ? "upper" : read.has("lower") ? "lower" : "two-sided",
      after: afterAny !== null ? { family: afterAny, any: true } : after !== null ? { family: after, any: false } : null,
      margin: margin !== null ? { type: "equivalence", value: margin } : worse !== null ? { type: "not worse", value: worse } : null,
      weights: read.has("weights") ? read.groups("weights").map((part) => ({ member: part.name("member"), weight: part.number("weight") })) : null,
      passes: read.has("passes")
        ? read.groups("passes").map((part) => ({ from: part.name("from"), to: part.name("to"), share: part.number("share") }))
        : null,
      span: read.span,
    };
  },
});

const assumptions = ["equal variances", "unequal variances", "sphericity", "compound symmetry", "unstructured"] as const;

export const assume = defineStatement<AssumeStatement>({
  verb: "assume",
  group: "declare",
  help: "States what may be assumed about spreads and correlations.",
  details: [
    "equal variances (the default) or unequal variances, between subjects.",
    "sphericity pools the error of comparisons within subjects; compound symmetry and unstructured shape the multilevel model.",
  ],
  example: "assume unequal variances",
  syntax: either(...assumptions.map((what) => group(what, words(what)))),
  build: (read) => ({ kind: "assume", what: assumptions.find((what) => read.has(what))!, span: read.span }),
});

const expectedLevels = (label: string) =>
  group(
    label,
    name("factor", "a factor", "factors"),
    repeat(words("by"), name("factor", "a factor", "factors")),
    list("values", sequence(level("level"), repeat(level("level")), optional(mark("-", "minus")), number("value", "a mean"))),
  );

function readExpected(read: Read): ExpectedLevels {
  return {
    factors: read.names("factor"),
    values: read.groups("values").map((part) => ({ levels: part.names("level"), value: signed(part, "value") })),
  };
}

export const expect = defineStatement<ExpectStatement>({
  verb: "expect",
  group: "declare",
  help: "Says what means, spread and correlation are assumed, for planning.",
  details: [
    "Means by level of a factor, or by cell: glove by shift bare day 41, bare night 43 ... Effects of several factors add up around their common mean.",
    "spread is the standard deviation among subjects in a cell; correlation is between two measurements of one subject (one number, or all pairs row by row).",
    "dropout 10% loses that share of subjects; missing 5% loses single cells; skewed or heavy-tailed shapes the values; allocation gives shares per group; cost 12 per subject prices the study.",
  ],
  example: "expect seconds\n  glove bare 41, nitrile 43, knit 46, leather 52\n  spread 9, correlation 0.6",
  syntax: sequence(
    name("response", "the response", "response"),
    clauses(
      group("spreadBy", words("spread by"), name("factor", "a factor", "factors"), list("values", sequence(level("level"), number("value", "a spread")))),
      sequence(words("spread"), number("spread", "a spread")),
      sequence(words("correlation"), group("correlations", sign("value"), repeat(sign("value")))),
      sequence(words("dropout"), number("dropout", "a share")),
      sequence(words("missing"), number("missing", "a share")),
      words("skewed", "skewed"),
      words("heavy tailed", "heavy"),
      sequence(
        words("allocation"),
        group("allocation", optional(name("factor", "a factor", "factors")), number("share", "a share"), repeat(mark(":"), number("share", "a share"))),
      ),
      sequence(words("cost"), number("cost", "a cost"), words("per subject")),
      expectedLevels("means"),
    ),
  ),
  form: "RESPONSE, then clauses: FACTOR [by FACTOR ...] LEVEL MEAN, ... | spread NUMBER | spread by FACTOR LEVEL NUMBER, ... | correlation NUMBER ... | dropout SHARE | missing SHARE | skewed | heavy tailed | allocation [FACTOR] 2:1:1 | cost NUMBER per subject",
  build: (read) => {
    const common = read.numberOrNull("spread");
    const spreadBy = read.group("spreadBy");
    const correlations = read.group("correlations");
    const allocation = read.group("allocation");
    for (const label of ["dropout", "missing"]) {
      const share = read.numberOrNull(label);
      if (share !== null && !(share.value >= 0 && share.value < 1)) {
        throw new BuildProblem("number-range", `${label} is ${share.text}; it lies from 0% to below 100%.`, `Write, for instance, ${label} 10%.`, share.span);
      }
    }
    for (const spread of [common, ...(spreadBy?.groups("values").map((part) => part.number("value")) ?? [])]) {
      if (spread !== null && !(spread.value > 0)) {
        throw new BuildProblem("number-range", `The spread is ${spread.text}; it must be above zero.`, "Give the standard deviation, in the response's unit.", spread.span);
      }
    }
    return {
      kind: "expect",
      response: read.name("response"),
      means: read.groups("means").map(readExpected),
      spread:
        common === null && spreadBy === null
          ? null
          : {
              common,
              byLevel:
                spreadBy === null
                  ? null
                  : { factors: [spreadBy.name("factor")], values: spreadBy.groups("values").map((part) => ({ levels: part.names("level"), value: part.number("value") })) },
            },
      correlation: correlations === null ? null : signedAll(correlations),
      dropout: read.numberOrNull("dropout"),
      missing: read.numberOrNull("missing"),
      shape: read.has("skewed") ? "skewed" : read.has("heavy") ? "heavy" : null,
      allocation: allocation === null ? null : { factor: allocation.nameOrNull("factor"), shares: allocation.numbers("share") },
      cost: read.numberOrNull("cost"),
      span: read.span,
    };
  },
});

function sign(label: string) {
  return group("signed", optional(mark("-", "minus")), number(label, "a correlation"));
}

function signedAll(read: Read): readonly NumberValue[] {
  return read.groups("signed").map((part) => signed(part, "value"));
}
