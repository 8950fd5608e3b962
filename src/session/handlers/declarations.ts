import type { Declaration, NumberValue } from "../../../grammar/index.ts";
import {
  declareContrast,
  declareCovariate,
  declareFactor,
  declareFamily,
  declareResponse,
  declareUnit,
  refuseIfSealed,
  withDeclaration,
} from "../declare.ts";
import type { Context, Handler, Outcome } from "../handler.ts";
import { taken } from "../handler.ts";
import { SessionProblem } from "../problem.ts";
import type { DeclaredStatement, FamilyDeclaration, Study } from "../study.ts";
import { contrastExpression, declaredUnit, member } from "../translate.ts";

/** Under which key a declaration stands: a second one with the same key replaces the first. */
export function keyOf(statement: Declaration): string {
  switch (statement.kind) {
    case "factor":
    case "covariate":
    case "contrast":
    case "family":
    case "items":
    case "blocks":
      return `${statement.kind} ${statement.name.text}`;
    case "assume":
      return statement.what.endsWith("variances") ? "assume variances" : "assume covariance";
    default:
      return statement.kind;
  }
}

const plain = (value: NumberValue): number => value.value;

function familyOf(statement: Extract<Declaration, { kind: "family" }>): FamilyDeclaration {
  if (statement.hold === null) {
    throw new SessionProblem(
      "no-method",
      `The family "${statement.name.text}" does not say how its error is held.`,
      "Add a line: hold error 5% by holm",
      statement.name.text,
    );
  }
  const { method, holds, rate } = statement.hold;
  const rateMethods = ["bh", "by"];
  if (holds === "family" && rateMethods.includes(method)) {
    throw new SessionProblem(
      "not-family-error",
      `${method} does not hold the family's error: it holds the expected share of false ones among those found.`,
      `Write: hold false discovery ${rate.text} by ${method}. To hold the family's error, use holm or single-step.`,
    );
  }
  if (holds === "false discovery" && !rateMethods.includes(method)) {
    throw new SessionProblem(
      "not-false-discovery",
      `${method} is not a method for false discovery.`,
      `Write: hold false discovery ${rate.text} by bh, or hold error ${rate.text} by ${method}.`,
    );
  }
  return {
    name: statement.name.text,
    members: statement.members.map(member),
    correction: method,
    holds,
    error: rate.value,
    sides: statement.sides,
    margin: statement.margin === null ? null : { type: statement.margin.type, value: statement.margin.value.value },
    after: statement.after === null ? null : { family: statement.after.family.text, any: statement.after.any },
    weights: statement.weights?.map(({ member: of, weight }) => ({ name: of.text, weight: weight.value })) ?? null,
    passes:
      statement.passes?.map(({ from, to, share }) => ({ from: from.text, to: to.text, share: share.value })) ?? null,
  };
}

/** The study with a declaration taken in, without its place in the plan. */
export function applyDeclaration(statement: Declaration, study: Study): Study {
  switch (statement.kind) {
    case "study":
      return { ...study, title: statement.title.text, caution: statement.caution?.text ?? null };
    case "response":
      return declareResponse(study, {
        name: statement.name.text,
        label: statement.label?.text ?? null,
        unit: statement.unit?.text ?? null,
        better: statement.better,
        scale: statement.scale,
      });
    case "subjects":
    case "items":
    case "blocks":
      return declareUnit(study, {
        name: statement.name.text,
        role: statement.kind,
        nestedIn: statement.nestedIn.map((name) => name.text),
        slopes: statement.slopes.map((name) => name.text),
      });
    case "factor":
      return declareFactor(study, {
        name: statement.name.text,
        levels: statement.levels.map((level) => level.text),
        varies: statement.varies,
        unit: declaredUnit(study, statement.unit),
        betweenUnit: statement.betweenUnit === null ? null : declaredUnit(study, statement.betweenUnit),
        ordered: statement.ordered,
        positions: statement.positions?.map(plain) ?? null,
        reference: statement.reference?.text ?? null,
        measured: statement.measured,
      });
    case "covariate":
      return declareCovariate(study, {
        name: statement.name.text,
        varies: statement.varies ?? "between",
        centred: statement.centred,
      });
    case "contrast":
      return declareContrast(study, statement.name.text, contrastExpression(statement.expression));
    case "family":
      return declareFamily(study, familyOf(statement));
    case "assume":
      return {
        ...study,
        assumptions:
          statement.what === "equal variances"
            ? { ...study.assumptions, variances: "equal" }
            : statement.what === "unequal variances"
              ? { ...study.assumptions, variances: "unequal" }
              : { ...study.assumptions, covariance: statement.what },
      };
    case "expect":
      if (study.response !== null && statement.response.text !== study.response.name) {
        throw new SessionProblem(
          "unknown-response",
          `"${statement.response.text}" is not the declared response.`,
          `Write: expect ${study.response.name}`,
          statement.response.text,
        );
      }
      return { ...study, expectation: statement };
  }
}

function declare(statement: Declaration, study: Study, context: Context): Outcome {
  const declared: DeclaredStatement = { key: keyOf(statement), text: context.text };
  refuseIfSealed(study, declared);
  const before = study.declarations.find((other) => other.key === declared.key);
  const next = applyDeclaration(statement, study);
  return {
    study: { ...next, declarations: withDeclaration(study, declared) },
    result: taken(before === undefined ? "declared" : before.text === declared.text ? "unchanged" : "replaced", {
      what: statement.kind,
      name: "name" in statement ? statement.name.text : statement.kind === "study" ? statement.title.text : null,
    }),
  };
}

type DeclarationKind = Declaration["kind"];

export const declarationHandlers: { readonly [K in DeclarationKind]: Handler<K> } = {
  study: declare,
  response: declare,
  subjects: declare,
  items: declare,
  blocks: declare,
  factor: declare,
  covariate: declare,
  contrast: declare,
  family: declare,
  assume: declare,
  expect: declare,
};
