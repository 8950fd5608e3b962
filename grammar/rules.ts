import type {
  Allocation,
  AtPart,
  ConditionNode,
  ContrastNode,
  ExpressionNode,
  Goal,
  LevelPlace,
  MemberNode,
  MethodWord,
  Name,
} from "./ast.ts";
import { problem } from "./problems.ts";
import { BuildProblem, type Read } from "./reader.ts";
import { joinSpans } from "./span.ts";
import {
  choice,
  either,
  group,
  level,
  list,
  mark,
  name,
  number,
  optional,
  part,
  plainNumber,
  repeat,
  rule,
  type Syntax,
  sequence,
  text,
  words,
} from "./syntax.ts";

/** Parts that several statements share, some of them recursive; each builds its piece of the statement. */
export interface Rule {
  readonly syntax: Syntax;
  readonly build: (read: Read) => unknown;
}

export const methodWords: readonly MethodWord[] = [
  "none",
  "bonferroni",
  "sidak",
  "holm",
  "hochberg",
  "hommel",
  "shaffer",
  "tukey",
  "games-howell",
  "dunnett",
  "scheffe",
  "single-step",
  "step-down",
  "resampling",
  "fixed sequence",
  "fallback",
  "graph",
  "bh",
  "by",
  "dunn",
  "conover",
  "nemenyi",
];

export const trendDegrees = ["linear", "quadratic", "cubic", "quartic", "quintic"] as const;
export const calculations = ["log", "log10", "root", "abs", "exp", "round"] as const;

type Value = ExpressionNode | ConditionNode;
const conditionTypes = new Set<string>(["compare", "among", "between", "is missing", "and", "or", "not"]);
const isCondition = (value: Value): value is ConditionNode => conditionTypes.has(value.type);

function asExpression(value: Value): ExpressionNode {
  if (!isCondition(value)) return value;
  throw new BuildProblem(problem("value-expected", value.span));
}

function asCondition(value: Value): ConditionNode {
  if (isCondition(value)) return value;
  throw new BuildProblem(problem("condition-expected", value.span));
}

/** A quoted operand to the right of a comparison is a text; everywhere else quotes hold a column's name. */
function asOperand(value: Value): ExpressionNode {
  const found = asExpression(value);
  return found.type === "name" && quotedOperands.has(found)
    ? { type: "string", value: found.name, span: found.span }
    : found;
}
/** Marks made while one statement is built; a weak set, so nothing stays behind. */
const quotedOperands = new WeakSet<ExpressionNode>();

function foldContrast(read: Read): ContrastNode {
  let node = read.built<ContrastNode>("first");
  for (const step of read.groups("steps")) {
    const operator = step.word<"+" | "-" | "*" | "/">("operator")!;
    node = { type: "arithmetic", operator, left: node, right: step.built<ContrastNode>("operand") };
  }
  return node;
}

function foldExpression(read: Read): Value {
  let node = read.built<Value>("first");
  for (const step of read.groups("steps")) {
    const operator = step.word<"+" | "-" | "*" | "/" | "^">("operator")!;
    const left = asExpression(node);
    const right = asExpression(step.built<Value>("operand"));
    node = { type: "arithmetic", operator, left, right, span: joinSpans(left.span, right.span) };
  }
  return node;
}

function foldConditions(read: Read, type: "and" | "or"): Value {
  let node = read.built<Value>("first");
  for (const step of read.groups("steps")) {
    const left = asCondition(node);
    const right = asCondition(step.built<Value>("operand"));
    node = { type, left, right, span: joinSpans(left.span, right.span) };
  }
  return node;
}

const factor = (label = "factor") => name(label, "a factor", "factors");
const placeAt = () => group("at", level("level"), optional(words("of"), factor()));
const placeOf = (read: Read): LevelPlace => ({ level: read.name("level"), factor: read.nameOrNull("factor") });
const operators = (...texts: string[]) => either(...texts.map((each) => mark(each, "operator")));

export const rules = {
  contrastExpression: {
    syntax: sequence(rule("contrastSum", "sum"), repeat(words("at"), placeAt())),
    build: (read): ContrastNode => {
      const operand = read.built<ContrastNode>("sum");
      const at = read.groups("at").map(placeOf);
      return at.length === 0 ? operand : { type: "at", operand, at };
    },
  },
  contrastSum: {
    syntax: sequence(
      rule("contrastProduct", "first"),
      repeat(group("steps", operators("+", "-"), rule("contrastProduct", "operand"))),
    ),
    build: foldContrast,
  },
  contrastProduct: {
    syntax: sequence(
      rule("contrastUnary", "first"),
      repeat(group("steps", operators("*", "/"), rule("contrastUnary", "operand"))),
    ),
    build: foldContrast,
  },
  contrastUnary: {
    syntax: either(sequence(mark("-", "minus"), rule("contrastUnary", "operand")), rule("contrastPrimary", "primary")),
    build: (read): ContrastNode =>
      read.has("minus")
        ? { type: "negate", operand: read.built<ContrastNode>("operand") }
        : read.built<ContrastNode>("primary"),
  },
  contrastPrimary: {
    syntax: either(
      part(
        "The mean of several levels, each weighing the same.",
        words("mean", "mean"),
        mark("("),
        list("of", rule("contrastExpression", "part")),
        mark(")"),
      ),
      sequence(mark("("), rule("contrastExpression", "inner"), mark(")")),
      plainNumber("number"),
      sequence(name("level", "a level", "levels"), optional(words("of"), factor())),
    ),
    build: (read): ContrastNode => {
      if (read.has("mean")) {
        return { type: "mean", of: read.groups("of").map((each) => each.built<ContrastNode>("part")) };
      }
      if (read.has("inner")) return read.built<ContrastNode>("inner");
      if (read.has("number")) return { type: "number", number: read.number("number") };
      return { type: "level", ...placeOf(read) };
    },
  },
  member: {
    syntax: sequence(
      either(
        part(
          "Each level of the factor against one level, or against the mean of all levels.",
          words("each", "each"),
          factor(),
          words("against"),
          either(words("mean", "mean"), level("level")),
        ),
        part("Every two levels of the factor.", words("all pairs of", "pairs"), factor()),
        part("Each level against the one before it.", words("neighbours of", "neighbours"), factor()),
        part(
          "Polynomial trends over the positions of the levels.",
          words("trend of", "trend"),
          factor(),
          mark(":"),
          list(
            "degrees",
            choice("a degree, linear to quintic", ...trendDegrees.map((degree) => words(degree, "degree"))),
          ),
        ),
        name("contrast", "a contrast", "contrasts"),
      ),
      repeat(
        words("at"),
        group(
          "at",
          either(
            sequence(words("each", "each"), factor("factor")),
            sequence(level("level"), optional(words("of"), factor())),
          ),
        ),
      ),
    ),
    build: (read): MemberNode => {
      const at = read
        .groups("at")
        .map((each): AtPart => (each.has("each") ? { each: each.name("factor") } : placeOf(each)));
      const { span } = read;
      if (read.has("each")) {
        return read.has("mean")
          ? { type: "each against mean", factor: read.name("factor"), at, span }
          : { type: "each against level", factor: read.name("factor"), level: read.name("level"), at, span };
      }
      if (read.has("pairs")) return { type: "all pairs", factor: read.name("factor"), at, span };
      if (read.has("neighbours")) return { type: "neighbours", factor: read.name("factor"), at, span };
      if (read.has("trend")) {
        const degrees = read
          .groups("degrees")
          .map((each) => trendDegrees.indexOf(each.word<(typeof trendDegrees)[number]>("degree")!) + 1);
        return { type: "trend", factor: read.name("factor"), degrees, at, span };
      }
      return { type: "contrast", name: read.name("contrast"), at, span };
    },
  },
  method: {
    syntax: choice("a correction", ...methodWords.map((method) => words(method, "method"))),
    build: (read): MethodWord => read.word<MethodWord>("method")!,
  },
  aim: {
    syntax: either(words("omnibus", "omnibus"), name("family", "a family", "families")),
    build: (read): { family: Name | null } => ({ family: read.nameOrNull("family") }),
  },
  goal: {
    syntax: sequence(
      words("on"),
      either(words("every", "goal"), words("any", "goal"), words("each", "goal")),
      words("comparison"),
    ),
    build: (read): Goal => read.word<Goal>("goal")!,
  },
  allocation: {
    syntax: sequence(
      words("allocation"),
      optional(factor()),
      number("shares", "a share of the subjects"),
      repeat(mark(":"), number("shares", "a share of the subjects")),
    ),
    build: (read): Allocation => {
      const shares = read.numbers("shares");
      for (const share of shares) {
        if (share.value > 0) continue;
        throw new BuildProblem(
          problem("number-range", share.span, {
            what: "A share of the subjects",
            value: share.text,
            allowed: "more than 0",
            percent: null,
          }),
        );
      }
      return { factor: read.nameOrNull("factor"), shares };
    },
  },
  condition: {
    syntax: rule("disjunction", "value"),
    build: (read): ConditionNode => asCondition(read.built<Value>("value")),
  },
  expression: {
    syntax: rule("disjunction", "value"),
    build: (read): ExpressionNode => asExpression(read.built<Value>("value")),
  },
  disjunction: {
    syntax: sequence(rule("conjunction", "first"), repeat(group("steps", words("or"), rule("conjunction", "operand")))),
    build: (read) => foldConditions(read, "or"),
  },
  conjunction: {
    syntax: sequence(rule("negation", "first"), repeat(group("steps", words("and"), rule("negation", "operand")))),
    build: (read) => foldConditions(read, "and"),
  },
  negation: {
    syntax: either(sequence(words("not", "not"), rule("negation", "operand")), rule("comparison", "comparison")),
    build: (read): Value =>
      read.has("not")
        ? { type: "not", operand: asCondition(read.built<Value>("operand")), span: read.span }
        : read.built<Value>("comparison"),
  },
  comparison: {
    syntax: sequence(
      rule("sum", "left"),
      optional(
        either(
          sequence(operators("=", "!=", "<=", "<", ">=", ">"), rule("sum", "right")),
          sequence(
            either(words("among", "among"), words("not among", "notAmong")),
            list("values", rule("sum", "value")),
          ),
          sequence(words("between", "between"), rule("sum", "low"), words("and"), rule("sum", "high")),
          words("is missing", "missing"),
          words("is not missing", "notMissing"),
        ),
      ),
    ),
    build: (read): Value => {
      const first = read.built<Value>("left");
      const { span } = read;
      const operator = read.word<"=" | "!=" | "<" | "<=" | ">" | ">=">("operator");
      if (operator !== null) {
        const right = asOperand(read.built<Value>("right"));
        return { type: "compare", operator, left: asExpression(first), right, span };
      }
      if (read.has("values")) {
        const values = read.groups("values").map((each) => asOperand(each.built<Value>("value")));
        return { type: "among", left: asExpression(first), values, negated: read.has("notAmong"), span };
      }
      if (read.has("between")) {
        const low = asOperand(read.built<Value>("low"));
        const high = asOperand(read.built<Value>("high"));
        return { type: "between", left: asExpression(first), low, high, span };
      }
      if (read.has("missing") || read.has("notMissing")) {
        return { type: "is missing", left: asExpression(first), negated: read.has("notMissing"), span };
      }
      return first;
    },
  },
  sum: {
    syntax: sequence(rule("product", "first"), repeat(group("steps", operators("+", "-"), rule("product", "operand")))),
    build: foldExpression,
  },
  product: {
    syntax: sequence(rule("unary", "first"), repeat(group("steps", operators("*", "/"), rule("unary", "operand")))),
    build: foldExpression,
  },
  unary: {
    syntax: either(sequence(mark("-", "minus"), rule("unary", "operand")), rule("power", "operand")),
    build: (read): Value =>
      read.has("minus")
        ? { type: "negate", operand: asExpression(read.built<Value>("operand")), span: read.span }
        : read.built<Value>("operand"),
  },
  power: {
    syntax: sequence(
      rule("primary", "first"),
      optional(group("steps", mark("^", "operator"), rule("unary", "operand"))),
    ),
    build: foldExpression,
  },
  primary: {
    syntax: either(
      sequence(mark("("), rule("disjunction", "inner"), mark(")")),
      part(
        "A calculation on what follows: log (natural), log10, root (square root), abs, exp, round.",
        either(...calculations.map((each) => words(each, "calculation"))),
        words("of"),
        rule("unary", "operand"),
      ),
      part(
        "One value where the condition holds, another where it does not.",
        words("if", "if"),
        rule("condition", "condition"),
        words("then"),
        rule("sum", "then"),
        words("else"),
        rule("sum", "otherwise"),
      ),
      part("No value.", words("missing", "missing")),
      plainNumber("number"),
      text("quoted", "a name or text in quotes", "columns"),
      name("name", "a column or level", "columns"),
    ),
    build: (read): Value => {
      const { span } = read;
      if (read.has("inner")) return read.built<Value>("inner");
      if (read.has("if")) {
        return {
          type: "choice",
          condition: read.built<ConditionNode>("condition"),
          // biome-ignore lint/suspicious/noThenProperty: the data room names it so, and it is never awaited
          then: asExpression(read.built<Value>("then")),
          otherwise: asExpression(read.built<Value>("otherwise")),
          span,
        };
      }
      const calculation = read.word<(typeof calculations)[number]>("calculation");
      if (calculation !== null) {
        return { type: "function", function: calculation, operand: asExpression(read.built<Value>("operand")), span };
      }
      if (read.has("missing")) return { type: "missing", span };
      if (read.has("number")) {
        const { value, text: written } = read.number("number");
        return { type: "number", value, text: written, span };
      }
      if (read.has("quoted")) {
        const quoted: ExpressionNode = { type: "name", name: read.name("quoted").text, span };
        quotedOperands.add(quoted);
        return quoted;
      }
      return { type: "name", name: read.name("name").text, span };
    },
  },
} as const satisfies Readonly<Record<string, Rule>>;

export type RuleName = keyof typeof rules;
export const ruleNamed = (ruleName: string): Rule => rules[ruleName as RuleName];
export const ruleSyntax = (ruleName: string): Syntax => ruleNamed(ruleName).syntax;
