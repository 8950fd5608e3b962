import type {
  AtPart,
  ConditionNode,
  ContrastNode,
  ExpressionNode,
  LevelPlace,
  MemberNode,
  MethodWord,
  Name,
} from "./ast.ts";
import { BuildProblem, type Read } from "./reader.ts";
import {
  either,
  group,
  level,
  list,
  mark,
  name,
  number,
  optional,
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

const trendDegrees = ["linear", "quadratic", "cubic", "quartic", "quintic"] as const;

function leftFold(read: Read, first: string, rest: string): ContrastNode {
  let node = read.built<ContrastNode>(first);
  for (const step of read.groups(rest)) {
    const operator = step.word("operator") as "+" | "-" | "*" | "/";
    node = { type: "arithmetic", operator, left: node, right: step.built<ContrastNode>("operand") };
  }
  return node;
}

type Value = ExpressionNode | ConditionNode;
const conditionTypes = new Set(["compare", "among", "between", "is missing", "and", "or", "not"]);
const isCondition = (value: Value): value is ConditionNode => conditionTypes.has(value.type);

export function asExpression(value: Value, read: Read): ExpressionNode {
  if (!isCondition(value)) return value;
  throw new BuildProblem(
    "value-expected",
    "A value is needed here, and this is a condition.",
    "Write arithmetic, or: if CONDITION then A else B.",
    read.span,
  );
}

export function asCondition(value: Value, read: Read): ConditionNode {
  if (isCondition(value)) return value;
  throw new BuildProblem(
    "condition-expected",
    "A condition is needed here, and this is a value.",
    "Compare it: trial = 1, seconds > 90, operator among 3, 7.",
    read.span,
  );
}

function foldExpression(read: Read): Value {
  const steps = read.groups("steps");
  let node = read.built<Value>("first");
  for (const step of steps) {
    const operator = step.word("operator") as "+" | "-" | "*" | "/" | "^";
    node = {
      type: "arithmetic",
      operator,
      left: asExpression(node, read),
      right: asExpression(step.built<Value>("operand"), step),
    };
  }
  return node;
}

function foldConditions(read: Read, type: "and" | "or"): Value {
  let node = read.built<Value>("first");
  for (const step of read.groups("steps")) {
    node = { type, left: asCondition(node, read), right: asCondition(step.built<Value>("operand"), step) };
  }
  return node;
}

export const rules: Readonly<Record<string, Rule>> = {
  contrastExpression: {
    syntax: sequence(
      rule("contrastSum", "sum"),
      repeat(words("at"), group("at", level("level"), optional(words("of"), name("factor", "a factor", "factors")))),
    ),
    build: (read): ContrastNode => {
      const operand = read.built<ContrastNode>("sum");
      const at: LevelPlace[] = read
        .groups("at")
        .map((part) => ({ level: part.name("level"), factor: part.nameOrNull("factor") }));
      return at.length === 0 ? operand : { type: "at", operand, at };
    },
  },
  contrastSum: {
    syntax: sequence(
      rule("contrastProduct", "first"),
      repeat(group("rest", either(mark("+", "operator"), mark("-", "operator")), rule("contrastProduct", "operand"))),
    ),
    build: (read) => leftFold(read, "first", "rest"),
  },
  contrastProduct: {
    syntax: sequence(
      rule("contrastUnary", "first"),
      repeat(group("rest", either(mark("*", "operator"), mark("/", "operator")), rule("contrastUnary", "operand"))),
    ),
    build: (read) => leftFold(read, "first", "rest"),
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
      sequence(words("mean", "mean"), mark("("), list("of", rule("contrastExpression", "part")), mark(")")),
      sequence(mark("("), rule("contrastExpression", "inner"), mark(")")),
      number("number"),
      sequence(name("level", "a level", "levels"), optional(words("of"), name("factor", "a factor", "factors"))),
    ),
    build: (read): ContrastNode => {
      if (read.has("mean"))
        return { type: "mean", of: read.groups("of").map((part) => part.built<ContrastNode>("part")) };
      if (read.has("inner")) return read.built<ContrastNode>("inner");
      if (read.has("number")) return { type: "number", number: read.number("number") };
      return { type: "level", level: read.name("level"), factor: read.nameOrNull("factor") };
    },
  },
  member: {
    syntax: sequence(
      either(
        sequence(
          words("each", "each"),
          name("factor", "a factor", "factors"),
          words("against"),
          either(words("mean", "mean"), level("level")),
        ),
        sequence(words("all pairs of", "pairs"), name("factor", "a factor", "factors")),
        sequence(words("neighbours of", "neighbours"), name("factor", "a factor", "factors")),
        sequence(
          words("trend of", "trend"),
          name("factor", "a factor", "factors"),
          mark(":"),
          list("degrees", either(...trendDegrees.map((degree) => words(degree, "degree")))),
        ),
        name("contrast", "a contrast", "contrasts"),
      ),
      repeat(
        words("at"),
        group(
          "at",
          either(
            sequence(words("each"), name("each", "a factor", "factors")),
            sequence(level("level"), optional(words("of"), name("factor", "a factor", "factors"))),
          ),
        ),
      ),
    ),
    build: (read): MemberNode => {
      const at: AtPart[] = read
        .groups("at")
        .map((part) =>
          part.has("each")
            ? { each: part.name("each") }
            : { level: part.name("level"), factor: part.nameOrNull("factor") },
        );
      if (read.has("each")) {
        const factor = read.name("factor");
        return read.has("mean")
          ? { type: "each against mean", factor, at }
          : { type: "each against level", factor, level: read.name("level"), at };
      }
      if (read.has("pairs")) return { type: "all pairs", factor: read.name("factor"), at };
      if (read.has("neighbours")) return { type: "neighbours", factor: read.name("factor"), at };
      if (read.has("trend")) {
        const degrees = read.groups("degrees").map((part) => trendDegrees.indexOf(part.word("degree") as "linear") + 1);
        return { type: "trend", factor: read.name("factor"), degrees, at };
      }
      return { type: "contrast", name: read.name("contrast"), at };
    },
  },
  method: {
    syntax: either(...methodWords.map((method) => group(method, words(method)))),
    build: (read): MethodWord => methodWords.find((method) => read.has(method))!,
  },
  aim: {
    syntax: either(words("omnibus", "omnibus"), name("family", "a family", "families")),
    build: (read): { family: Name | null } => ({ family: read.nameOrNull("family") }),
  },
  goal: {
    syntax: sequence(
      words("on"),
      either(words("every", "every"), words("any", "any"), words("each", "each")),
      words("comparison"),
    ),
    build: (read) => (read.has("any") ? "any" : read.has("each") ? "each" : "every"),
  },
  condition: {
    syntax: rule("or", "value"),
    build: (read) => asCondition(read.built<Value>("value"), read),
  },
  expression: {
    syntax: rule("or", "value"),
    build: (read) => asExpression(read.built<Value>("value"), read),
  },
  or: {
    syntax: sequence(rule("and", "first"), repeat(group("steps", words("or"), rule("and", "operand")))),
    build: (read) => foldConditions(read, "or"),
  },
  and: {
    syntax: sequence(rule("not", "first"), repeat(group("steps", words("and"), rule("not", "operand")))),
    build: (read) => foldConditions(read, "and"),
  },
  not: {
    syntax: either(sequence(words("not", "not"), rule("not", "operand")), rule("comparison", "comparison")),
    build: (read): Value =>
      read.has("not")
        ? { type: "not", operand: asCondition(read.built<Value>("operand"), read) }
        : read.built<Value>("comparison"),
  },
  comparison: {
    syntax: sequence(
      rule("sum", "left"),
      optional(
        either(
          sequence(
            either(
              mark("=", "operator"),
              mark("!=", "operator"),
              mark("<=", "operator"),
              mark("<", "operator"),
              mark(">=", "operator"),
              mark(">", "operator"),
            ),
            rule("sum", "right"),
          ),
          sequence(words("among", "among"), list("values", rule("sum", "value"))),
          sequence(words("not among", "not among"), list("values", rule("sum", "value"))),
          sequence(words("between", "between"), rule("sum", "low"), words("and"), rule("sum", "high")),
          words("is missing", "missing"),
          words("is not missing", "not missing"),
        ),
      ),
    ),
    build: (read): Value => {
      const left = read.built<Value>("left");
      const value = (label: string) => asExpression(read.built<Value>(label), read);
      const operator = read.word("operator");
      if (operator !== null)
        return { type: "compare", operator: operator as "=", left: asExpression(left, read), right: value("right") };
      if (read.has("values")) {
        const values = read.groups("values").map((part) => asExpression(part.built<Value>("value"), part));
        return { type: "among", left: asExpression(left, read), values, negated: read.has("not among") };
      }
      if (read.has("between"))
        return { type: "between", left: asExpression(left, read), low: value("low"), high: value("high") };
      if (read.has("missing") || read.has("not missing"))
        return { type: "is missing", left: asExpression(left, read), negated: read.has("not missing") };
      return left;
    },
  },
  sum: {
    syntax: sequence(
      rule("product", "first"),
      repeat(group("steps", either(mark("+", "operator"), mark("-", "operator")), rule("product", "operand"))),
    ),
    build: foldExpression,
  },
  product: {
    syntax: sequence(
      rule("unary", "first"),
      repeat(group("steps", either(mark("*", "operator"), mark("/", "operator")), rule("unary", "operand"))),
    ),
    build: foldExpression,
  },
  unary: {
    syntax: either(sequence(mark("-", "minus"), rule("unary", "operand")), rule("raised", "operand")),
    build: (read): Value =>
      read.has("minus")
        ? { type: "negate", operand: asExpression(read.built<Value>("operand"), read) }
        : read.built<Value>("operand"),
  },
  raised: {
    syntax: sequence(
      rule("primary", "first"),
      optional(group("steps", mark("^", "operator"), rule("unary", "operand"))),
    ),
    build: foldExpression,
  },
  primary: {
    syntax: either(
      sequence(mark("("), rule("or", "inner"), mark(")")),
      sequence(
        either(...["log", "log10", "root", "abs", "exp", "round"].map((name_) => words(name_, "function"))),
        words("of"),
        rule("unary", "operand"),
      ),
      sequence(
        words("if", "if"),
        rule("condition", "condition"),
        words("then"),
        rule("expression", "then"),
        words("else"),
        rule("expression", "otherwise"),
      ),
      number("number"),
      text("quoted", "a text in quotes"),
      name("name", "a column or level", "columns"),
    ),
    build: (read): Value => {
      if (read.has("inner")) return read.built<Value>("inner");
      if (read.has("if")) {
        return {
          type: "choice",
          condition: read.built<ConditionNode>("condition"),
          then: read.built<ExpressionNode>("then"),
          otherwise: read.built<ExpressionNode>("otherwise"),
        };
      }
      const calculation = read.word("function");
      if (calculation !== null)
        return {
          type: "function",
          function: calculation as "log",
          operand: asExpression(read.built<Value>("operand"), read),
        };
      if (read.has("number")) {
        const found = read.number("number");
        return { type: "number", value: found.value, text: found.text, span: found.span };
      }
      if (read.has("quoted")) {
        // A quoted word may be a column with blanks in its name or a level; the data decide, as for a bare word.
        const found = read.name("quoted");
        return { type: "name", name: found.text, span: found.span };
      }
      const found = read.name("name");
      return { type: "name", name: found.text, span: found.span };
    },
  },
};
