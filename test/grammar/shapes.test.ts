import { expect, it } from "vitest";
import type { ConditionNode, ExpressionNode } from "../../grammar/index.ts";
import type { Condition, Expression } from "../../src/data/types.ts";
import { only } from "./places.ts";

it("arithmetic and conditions are what the data room takes, with places beside", () => {
  // The compiler checks these; a node that stops fitting does not build.
  const takesExpression = (node: ExpressionNode): Expression => node;
  const takesCondition = (node: ConditionNode): Condition => node;
  const derive = only("derive speed = 60 / seconds");
  const exclude = only('exclude where trial = 1 because "practice"');
  expect(derive.kind === "derive" && takesExpression(derive.expression).type).toBe("arithmetic");
  expect(exclude.kind === "exclude" && takesCondition(exclude.condition).type).toBe("compare");
});
