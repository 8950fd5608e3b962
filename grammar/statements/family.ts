import type { FamilyStatement, MemberNode, MethodWord } from "../ast.ts";
import { marginClauses, marginOf, sidesClause, sidesOf } from "../clause-parts.ts";
import { marginText, membersText, nameText, numberText, sidesText } from "../print.ts";
import { problem } from "../problems.ts";
import { BuildProblem, type Read } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { clauses, either, list, mark, name, number, optional, part, rule, sequence, words } from "../syntax.ts";

function sharesOf(read: Read, label: string, what: string) {
  const value = read.number(label);
  if (value.value >= 0 && value.value <= 1) return value;
  throw new BuildProblem(
    problem("number-range", value.span, { what, value: value.text, allowed: "from 0 to 1", percent: null }),
  );
}

export const family = defineStatement<FamilyStatement>({
  verb: "family",
  group: "declare",
  help: "Declares comparisons that are judged together, and how their error is held.",
  details: [
    "A family is always tested whole: compare NAME.",
    "Members: contrast names; each F against L; all pairs of F; neighbours of F; each F against mean; trend of F: linear, quadratic; any of them at LEVEL or at each F.",
  ],
  example: `family secondary: gloved, shift_gap
  hold error 5% by holm
  after primary`,
  continues: true,
  syntax: sequence(
    name("name", "a name for the family"),
    mark(":"),
    list("members", rule("member", "member")),
    clauses(
      part(
        "How much error the family may make, and the correction that holds it; help METHOD tells more.",
        words("hold", "hold"),
        either(words("error", "holds"), words("false discovery", "holds")),
        number("rate", "an error rate"),
        words("by"),
        rule("method", "method"),
      ),
      sidesClause(),
      part(
        "Tested only when every comparison of the other family is rejected; with any, its rejected share of the error passes on.",
        words("after", "after"),
        optional(words("any of", "any")),
        name("family", "a family", "families"),
      ),
      ...marginClauses(),
      part(
        "The share of the error that each member starts with, for fallback and graph.",
        words("weights", "weights"),
        list("weight", sequence(name("member", "a member", "contrasts"), number("weight", "a weight"))),
      ),
      part(
        "Which share of its error a rejected member passes on, and to whom, for graph.",
        words("pass", "pass"),
        list(
          "pass_",
          sequence(
            name("from", "a member", "contrasts"),
            words("to"),
            name("to", "a member", "contrasts"),
            number("share", "a share"),
          ),
        ),
      ),
    ),
  ),
  build: (read) => ({
    kind: "family",
    name: read.name("name"),
    members: read.groups("members").map((each) => each.built<MemberNode>("member")),
    hold:
      read.word("hold") === null
        ? null
        : {
            rate: read.share("rate", "The error rate"),
            method: read.built<MethodWord>("method"),
            holds: read.word("holds") === "error" ? "family" : "false discovery",
          },
    sides: sidesOf(read),
    after: read.word("after") === null ? null : { family: read.name("family"), any: read.has("any") },
    margin: marginOf(read),
    weights:
      read.word("weights") === null
        ? null
        : read
            .groups("weight")
            .map((each) => ({ member: each.name("member"), weight: sharesOf(each, "weight", "A weight") })),
    passes:
      read.word("pass") === null
        ? null
        : read.groups("pass_").map((each) => ({
            from: each.name("from"),
            to: each.name("to"),
            share: sharesOf(each, "share", "A share"),
          })),
    span: read.span,
  }),
  print: (it) => [
    `family ${nameText(it.name)}: ${membersText(it.members)}`,
    ...(it.hold === null
      ? []
      : [
          `hold ${it.hold.holds === "family" ? "error" : "false discovery"} ${numberText(it.hold.rate)} by ${it.hold.method}`,
        ]),
    ...sidesText(it.sides),
    ...(it.after === null ? [] : [`after ${it.after.any ? "any of " : ""}${nameText(it.after.family)}`]),
    ...marginText(it.margin),
    ...(it.weights === null
      ? []
      : [`weights ${it.weights.map((each) => `${nameText(each.member)} ${numberText(each.weight)}`).join(", ")}`]),
    ...(it.passes === null
      ? []
      : [
          `pass ${it.passes.map((each) => `${nameText(each.from)} to ${nameText(each.to)} ${numberText(each.share)}`).join(", ")}`,
        ]),
  ],
});
