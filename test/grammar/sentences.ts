import { ruleSyntax } from "../../grammar/rules.ts";
import { catalogue } from "../../grammar/statements/index.ts";
import type { Syntax } from "../../grammar/syntax.ts";

/** Random statements made from the descriptions themselves, so that every path of every syntax comes up. */

export type Random = (below: number) => number;

/** Mulberry32: enough for choosing paths, and the same everywhere. */
export function randomFrom(seed: number): Random {
  let state = seed >>> 0;
  return (below) => {
    state = (state + 0x6d2b79f5) >>> 0;
    let mixed = Math.imul(state ^ (state >>> 15), state | 1);
    mixed ^= mixed + Math.imul(mixed ^ (mixed >>> 7), mixed | 61);
    return ((mixed ^ (mixed >>> 14)) >>> 0) % below;
  };
}

const names = [
  "glove",
  "bare",
  "shift",
  "Größe",
  "η_2",
  "日本",
  '"dark roast"',
  '"3x"',
  '"say ""no"""',
  "x1",
  "_",
  "night",
  "étage",
];
const texts = ['"a"', '"assembly.csv"', '"say ""no"""', '"ü, b: c # d"', '"two words"'];
const shares = ["5%", "0.1", "1/3", "90%", "12.5%"];
const wholes = ["24", "7", "1000", "60", "3"];
const decimals = ["41", "0.6", "2.5", "1e-1", ".25"];

function numberFor(what: string, random: Random): string {
  const pick = (list: readonly string[]) => list[random(list.length)]!;
  if (/rate|power|share of the (subjects|cells)|percentage|a share/.test(what)) return pick(shares);
  if (/number of|seed|digits/.test(what)) return pick(wholes);
  if (/correlation/.test(what)) return pick(["0.5", "-0.25", "0"]);
  if (/position|a mean/.test(what)) return `${random(3) === 0 ? "-" : ""}${pick(decimals)}`;
  return pick(["0.5", "1/4", "0.25"]);
}

export function sentence(syntax: Syntax, random: Random, depth = 0): string {
  const inner = (part: Syntax): string => sentence(part, random, depth + 1);
  const pick = <T>(list: readonly T[]): T => list[random(list.length)]!;
  const times = (least: number): number => least + (depth > 24 ? 0 : random(3));
  switch (syntax.type) {
    case "phrase":
      return syntax.text;
    case "name":
      return syntax.digits && random(6) === 0 ? pick(["0", "10", "2.5"]) : pick(names);
    case "text":
      return pick(texts);
    case "number":
      return syntax.plain ? pick(decimals) : numberFor(syntax.what, random);
    case "sequence":
      return syntax.parts
        .map(inner)
        .filter((each) => each !== "")
        .join(" ");
    case "optional":
      return depth < 24 && random(2) === 0 ? inner(syntax.part) : "";
    case "repeat":
      return Array.from({ length: times(syntax.atLeastOne ? 1 : 0) }, () => inner(syntax.part)).join(" ");
    case "either":
      return inner(depth > 24 ? syntax.options.at(-1)! : pick(syntax.options));
    case "list":
      return Array.from({ length: times(1) }, () => inner(syntax.item)).join(", ");
    case "group":
    case "part":
      return inner(syntax.part);
    case "clauses": {
      const chosen = syntax.options.filter(() => random(3) === 0);
      return chosen.map((option) => `\n  ${inner(option)}`).join("");
    }
    case "statement":
      return `${syntax.verb} ${inner(catalogue.get(syntax.verb)!.syntax)}`;
    case "break":
      return random(2) === 0 ? "\n  " : "";
    case "rule": {
      // Conditions and values share their rules; which of the two is wanted decides here.
      if (syntax.rule === "expression" || syntax.label === "inner") {
        return syntax.rule === "contrastExpression" ? inner(ruleSyntax(syntax.rule)) : inner(ruleSyntax("sum"));
      }
      if (syntax.rule === "comparison") {
        const [left, more] = (ruleSyntax("comparison") as Extract<Syntax, { type: "sequence" }>).parts;
        return `${inner(left!)} ${inner((more as Extract<Syntax, { type: "optional" }>).part)}`;
      }
      return inner(ruleSyntax(syntax.rule));
    }
  }
}

export const verbsWithSyntax = [...catalogue].filter(([, { rows }]) => rows !== true).map(([verb]) => verb);

export function statementText(verb: string, random: Random): string {
  return `${verb} ${sentence(catalogue.get(verb)!.syntax, random)}`.replace(/ +\n/g, "\n").trimEnd();
}
