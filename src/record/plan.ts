import { canonicalJson, digestOfValue } from "./digest.ts";

/** A family as the plan commits to it: its name and the digest of everything that decides what it tests and how. */
export interface PlannedFamily {
  readonly name: string;
  readonly digest: string;
  readonly comparisons: readonly string[];
}

/** What is sealed: the declarations in statements of the language, in order, and what they come to. */
export interface PlanContent {
  readonly format: "meanwise plan";
  readonly formatVersion: 1;
  readonly meanwise: string;
  readonly name: string;
  readonly statements: readonly string[];
  readonly families: readonly PlannedFamily[];
}

export interface SealedPlan {
  readonly plan: PlanContent;
  /** SHA-256 of the canonical JSON of `plan` and `sealedAt`. */
  readonly digest: string;
  /** ISO 8601, UTC. */
  readonly sealedAt: string;
}

/** A plan file that cannot be trusted, or is not one. */
export class PlanError extends Error {
  readonly code: string;
  readonly advice: string;
  constructor(code: string, message: string, advice: string) {
    super(message);
    this.name = "PlanError";
    this.code = code;
    this.advice = advice;
  }
}

/** File name of a plan: `glove` gives `glove.plan.json`. Names with folders keep them. */
export function planPath(name: string): string {
  return name.endsWith(".plan.json") ? name : `${name}.plan.json`;
}

/** Seals the content: digest over content and time together, so that neither can be changed alone. */
export function sealPlan(plan: PlanContent, at: number): SealedPlan {
  const sealedAt = new Date(at).toISOString();
  return { plan, sealedAt, digest: digestOfValue({ plan, sealedAt }) };
}

/** The file: canonical JSON (RFC 8785), one line. */
export function planText(sealed: SealedPlan): string {
  return `${canonicalJson(sealed)}\n`;
}

/** Whether two plans commit to the same, whenever and by whichever version they were sealed. */
export function sameCommitment(left: PlanContent, right: PlanContent): boolean {
  const core = ({ name, statements, families }: PlanContent) => canonicalJson({ name, statements, families });
  return core(left) === core(right);
}

/**
 * Reads a plan file and checks its digest.
 * @throws PlanError "not-a-plan", "plan-changed" (the digest does not fit), "plan-newer"
 */
export function readPlan(text: string, path: string): SealedPlan {
  const notPlan = (why: string) =>
    new PlanError(
      "not-a-plan",
      `"${path}" is not a sealed plan: ${why}.`,
      'A plan is written by: seal plan as "NAME".',
    );
  let value: unknown;
  try {
    value = JSON.parse(text);
  } catch {
    throw notPlan("it is not complete JSON");
  }
  if (typeof value !== "object" || value === null) throw notPlan("it holds no plan");
  const { plan, digest, sealedAt } = value as Partial<SealedPlan>;
  if (typeof plan !== "object" || plan === null || typeof digest !== "string" || typeof sealedAt !== "string") {
    throw notPlan("it lacks its plan, its digest or its time");
  }
  if (plan.format !== "meanwise plan" || !Array.isArray(plan.statements) || !Array.isArray(plan.families)) {
    throw notPlan("its content has another form");
  }
  if (plan.formatVersion !== 1) {
    throw new PlanError("plan-newer", `"${path}" was sealed by a newer Meanwise.`, "Update Meanwise to open it.");
  }
  if (digestOfValue({ plan, sealedAt }) !== digest) {
    throw new PlanError(
      "plan-changed",
      `"${path}" was changed after it was sealed: its content does not fit its digest.`,
      'Use the file as it was sealed, for instance from where the plan was deposited. To change a plan: open it, then amend ... because "...".',
    );
  }
  return { plan, digest, sealedAt };
}
