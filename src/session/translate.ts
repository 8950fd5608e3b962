import type { AtPart, ContrastNode, LevelPlace, MemberNode, Name } from "../../grammar/index.ts";
import { sameUnit } from "../../grammar/index.ts";
import type { ContrastExpression, LevelReference, Member, MemberAt } from "../design/index.ts";
import type { Study } from "./study.ts";

/** From statements to the design's own shapes: places stay behind, words stay as they are. */

const place = (part: LevelPlace): LevelReference => ({ level: part.level.text, factor: part.factor?.text ?? null });

export function contrastExpression(node: ContrastNode): ContrastExpression {
  switch (node.type) {
    case "level":
      return { type: "level", level: node.level.text, factor: node.factor?.text ?? null };
    case "mean":
      return { type: "mean", of: node.of.map(contrastExpression) };
    case "number":
      return { type: "number", value: node.number.value };
    case "negate":
      return { type: "negate", operand: contrastExpression(node.operand) };
    case "arithmetic":
      return {
        type: "arithmetic",
        operator: node.operator,
        left: contrastExpression(node.left),
        right: contrastExpression(node.right),
      };
    case "at":
      return { type: "at", operand: contrastExpression(node.operand), at: node.at.map(place) };
    case "weights":
      return {
        type: "weights",
        weights: node.weights.map(({ level, weight }) => ({ level: level.text, factor: null, weight: weight.value })),
      };
  }
}

function atPart(part: AtPart): MemberAt {
  return "each" in part ? { each: part.each.text } : place(part);
}

export function member(node: MemberNode): Member {
  const at = node.at.map(atPart);
  switch (node.type) {
    case "contrast":
      return { type: "contrast", name: node.name.text, at };
    case "each against level":
      return { type: "each against level", factor: node.factor.text, level: node.level.text, at };
    case "trend":
      return { type: "trend", factor: node.factor.text, degrees: node.degrees, at };
    default:
      return { type: node.type, factor: node.factor.text, at };
  }
}

/** The declared unit that a written one means ("between operators" for `operator`), or the word as written. */
export function declaredUnit(study: Study, written: Name): string {
  const names = study.units.flatMap((unit) => [unit.name, ...unit.nestedIn]);
  return (
    names.find((name) => name === written.text) ?? names.find((name) => sameUnit(written.text, name)) ?? written.text
  );
}
