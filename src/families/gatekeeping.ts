import {
  agreed,
  assembled,
  checkProblem,
  criticalAt,
  type FamilyNote,
  limitsAtThreshold,
  noLimits,
  stepLimits,
} from "./answer.ts";
import { claimOf } from "./claim.ts";
import { correctionNames, corrections } from "./corrections.ts";
import { misfitOf } from "./hold.ts";
import { FamilyProblemError, misfit } from "./misfits.ts";
import { finalWeights, graphAdjustedP, graphThreshold, openedPasses, type PassingGraph } from "./passing-graph.ts";
import type { CorrectionName, FamilyAnswer, FamilyProblem, Misfit } from "./types.ts";

/** A family with its place after another one. */
export interface GatedFamily {
  readonly name: string;
  readonly correction: CorrectionName;
  readonly problem: FamilyProblem;
  /** `after F` (any: false) or `after any of F` (any: true). */
  readonly after: { readonly family: string; readonly any: boolean } | null;
}

/** Nodes and passes as `PassingPicture` of the results has them; `rejected` is null before there are data. */
export interface Passing {
  readonly nodes: readonly {
    readonly name: string;
    readonly family: string;
    readonly weight: number;
    readonly rejected: boolean | null;
  }[];
  /** From and to are names of nodes; with `gate` they are names of families, and the pass opens once all of `from` is rejected. */
  readonly passes: readonly {
    readonly from: string;
    readonly to: string;
    readonly share: number;
    readonly gate?: true;
  }[];
}

export interface GatedAnswer {
  readonly name: string;
  /** False when nothing of the error has reached the family, so that none of its comparisons could be rejected. */
  readonly open: boolean;
  readonly answer: FamilyAnswer;
}

type Families = readonly GatedFamily[];

/** Names of the methods whose shares can pass on. */
const passingNames = correctionNames.filter((name) => corrections[name].passing !== null);

/** What is wrong with the places of families after each other; null when nothing is. Methods and members are looked at by `misfitOf`. */
export function afterMisfit(families: Families): Misfit | null {
  const byName = new Map<string, GatedFamily>();
  for (const family of families) {
    if (byName.has(family.name)) return misfit("duplicate-families", { family: family.name });
    byName.set(family.name, family);
  }
  for (const family of families) {
    const { name, after } = family;
    if (after === null) continue;
    if (after.family === name) return misfit("after-itself", { family: name });
    if (!byName.has(after.family)) return misfit("after-unknown", { family: name, after: after.family });
    const circle = [name];
    for (let next = after.family; ; next = byName.get(next)!.after!.family) {
      if (circle.includes(next))
        return misfit("after-cyclic", { circle: [...circle.slice(circle.indexOf(next)), next] });
      circle.push(next);
      const further = byName.get(next)!.after;
      if (further === null || !byName.has(further.family)) break;
    }
    const before = byName.get(after.family)!;
    if (after.any) {
      for (const { correction } of [before, family])
        if (corrections[correction].passing === null)
          return misfit(
            "after-any-not-passing",
            { family: name, after: before.name, method: correction },
            passingNames,
          );
      if (before.problem.error !== family.problem.error)
        return misfit("after-any-error", {
          family: name,
          after: before.name,
          error: family.problem.error,
          otherError: before.problem.error,
        });
    }
  }
  return null;
}

/** Families that pass shares to one another: one graph, whose root holds the whole error at first. */
interface Component {
  readonly families: Families;
  /** Where each family's comparisons begin among the nodes. */
  readonly starts: readonly number[];
  readonly graph: PassingGraph;
}

function componentOf(root: GatedFamily, families: Families): Component {
  const members: GatedFamily[] = [root];
  for (let i = 0; i < members.length; i++)
    members.push(...families.filter((it) => it.after?.any === true && it.after.family === members[i]!.name));
  const starts: number[] = [];
  let count = 0;
  for (const { problem } of members) {
    starts.push(count);
    count += problem.names.length;
  }
  const weights = new Array<number>(count).fill(0);
  const passes = Array.from({ length: count }, () => new Array<number>(count).fill(0));
  const exits = new Array<number[] | null>(count).fill(null);
  const own = members.map(({ correction, problem }) => corrections[correction].passing!(problem));
  for (const [f, family] of members.entries()) {
    const heirs = members.flatMap((it, k) => (it.after?.any === true && it.after.family === family.name ? [k] : []));
    const exit = new Array<number>(count).fill(0);
    for (const heir of heirs)
      for (const [j, weight] of own[heir]!.weights.entries()) exit[starts[heir]! + j] = weight / heirs.length;
    for (const [i, row] of own[f]!.passes.entries()) {
      const node = starts[f]! + i;
      if (f === 0) weights[node] = own[0]!.weights[i]!;
      for (const [j, share] of row.entries()) passes[node]![starts[f]! + j] = share;
      exits[node] = heirs.length > 0 ? [...exit] : null;
    }
  }
  return { families: members, starts, graph: { weights, passes, exits } };
}

/** A family is the root of its component unless shares pass on to it. */
const isRoot = ({ after }: GatedFamily) => after === null || !after.any;

/**
 * Decides families that wait for each other.
 *
 * `after F`: tested only when every comparison of F, and of everything that F itself comes after, is rejected; then with its own full
 * error, so that over all of them together the error is held too. `after any of F`: one graph over both families, in which what a
 * comparison of F does not pass on within F passes to this family, spread by its own initial shares (equally over several such families).
 *
 * @returns one answer per family, in the order given
 * @throws FamilyProblemError when a method does not fit its members, or a family its place
 * @source bretz-2009 for the passing of error; maurer-1995 for the serial gate
 */
export function gatekeep(families: Families): readonly GatedAnswer[] {
  for (const { correction, problem } of families) {
    const unfit = misfitOf(correction, problem);
    if (unfit !== null) throw new FamilyProblemError(unfit);
    checkProblem(problem);
  }
  const unplaced = afterMisfit(families);
  if (unplaced !== null) throw new FamilyProblemError(unplaced);

  const byName = new Map(families.map((it) => [it.name, it]));
  const answers = new Map<string, GatedAnswer>();
  const decideRoot = (root: GatedFamily) => {
    const before: GatedAnswer[] = [];
    for (let next = root.after; next !== null; next = byName.get(next.family)!.after)
      before.push(answerOf(next.family));
    const open = before.every(({ answer }) => answer.rejected.every(Boolean));
    // Carried over at this family's own error, so that "adjusted p at most the error" also says that the gate is open.
    const floor = Math.max(
      0,
      ...before.map(
        ({ name, answer }) => Math.max(...answer.adjustedP) * (root.problem.error / byName.get(name)!.problem.error),
      ),
    );
    const passesOn = families.some(({ after }) => after?.any === true && after.family === root.name);
    const decided = passesOn
      ? decideComponent(componentOf(root, families))
      : [{ name: root.name, open: true, answer: corrections[root.correction].decide(root.problem) }];
    for (const one of decided) {
      const { problem } = byName.get(one.name)!;
      answers.set(one.name, gated(one, problem, open, floor, root.after?.family ?? null));
    }
  };
  const answerOf = (name: string): GatedAnswer => {
    const known = answers.get(name);
    if (known !== undefined) return known;
    let root = byName.get(name)!;
    while (!isRoot(root)) root = byName.get(root.after!.family)!;
    decideRoot(root);
    return answers.get(name)!;
  };
  return families.map(({ name }) => answerOf(name));
}

/** What a serial gate makes of an answer: nothing while it is open, no rejection and no threshold while it is closed. */
function gated(
  one: GatedAnswer,
  problem: FamilyProblem,
  open: boolean,
  floor: number,
  after: string | null,
): GatedAnswer {
  if (after === null) return one;
  const adjustedP = one.answer.adjustedP.map((value) => Math.min(1, Math.max(value, floor)));
  if (open)
    // A floor on the error itself, reached by rounding, must not close an open gate.
    return {
      ...one,
      answer: {
        ...one.answer,
        adjustedP: adjustedP.map((v, i) => (one.answer.rejected[i] ? Math.min(v, problem.error) : v)),
      },
    };
  const closed: FamilyNote = { code: "gate-closed", facts: { after } };
  return {
    name: one.name,
    open: false,
    answer: {
      ...assembled(problem, {
        p: one.answer.p,
        adjustedP,
        rejected: adjustedP.map(() => false),
        threshold: adjustedP.map(() => null),
        limits: noLimits(problem, closed),
      }),
    },
  };
}

/** Decides all families of a component by their one graph. */
function decideComponent({ families, starts, graph }: Component): readonly GatedAnswer[] {
  const { error } = families[0]!.problem;
  const p = families.flatMap(({ problem }) => problem.p);
  const decisions = agreed(p, graphAdjustedP(p, graph), graphThreshold(p, graph, error), error);
  const final = finalWeights(p, graph, error);
  const all = decisions.rejected.every(Boolean);
  return families.map(({ name, problem, after }, f) => {
    const from = starts[f]!;
    const cut = <T>(values: readonly T[]) => values.slice(from, from + problem.names.length);
    const [adjustedP, rejected, threshold] = [
      cut(decisions.adjustedP),
      cut(decisions.rejected),
      cut(decisions.threshold),
    ];
    const levels = (shares: readonly number[]) =>
      criticalAt(
        problem,
        shares.map((share) => share * error),
      );
    const limits =
      claimOf(problem).type === "two-sided"
        ? limitsAtThreshold(problem, threshold)
        : stepLimits(problem, rejected, all, levels(cut(final)), levels(problem.p.map(() => 1 / p.length)));
    const received = cut(final).some((share) => share > 0) || rejected.some(Boolean);
    return {
      name,
      open: after?.any !== true || received,
      answer: assembled(problem, { adjustedP, rejected, threshold, limits }),
    };
  });
}

/**
 * The passing of error as a picture: every comparison with its first share and where that goes; a family whose method has no shares is one
 * node. A share of 0 from a comparison marks what passes on only when its own family has nobody left to take it.
 * @param rejected  decisions per family, or null before there are data
 */
export function passing(families: Families, rejected: readonly (readonly boolean[])[] | null = null): Passing {
  const unplaced = afterMisfit(families);
  if (unplaced !== null) throw new FamilyProblemError(unplaced);
  for (const { correction, problem } of families) {
    // Before there are data only the declared shares can be looked at.
    const unfit = corrections[correction].passing === null ? null : corrections[correction].fits(problem);
    if (unfit !== null) throw new FamilyProblemError(unfit);
  }
  const uses = new Map<string, number>();
  for (const { problem } of families) for (const name of problem.names) uses.set(name, (uses.get(name) ?? 0) + 1);
  const nodeName = (family: GatedFamily, comparison: string) =>
    uses.get(comparison) === 1 && !families.some(({ name }) => name === comparison)
      ? comparison
      : `${comparison} (${family.name})`;
  const nodes: Passing["nodes"][number][] = [];
  const passes: Passing["passes"][number][] = [];
  const decided = (family: GatedFamily) => rejected?.[families.indexOf(family)] ?? null;
  for (const root of families.filter(isRoot)) {
    if (root.after !== null) passes.push({ from: root.after.family, to: root.name, share: 1, gate: true });
    if (corrections[root.correction].passing === null) {
      nodes.push({ name: root.name, family: root.name, weight: 1, rejected: decided(root)?.every(Boolean) ?? null });
      continue;
    }
    const component = componentOf(root, families);
    const names = component.families.flatMap((family) => family.problem.names.map((it) => nodeName(family, it)));
    for (const [f, family] of component.families.entries())
      for (const i of family.problem.names.keys()) {
        const node = component.starts[f]! + i;
        nodes.push({
          name: names[node]!,
          family: family.name,
          weight: component.graph.weights[node]!,
          rejected: decided(family)?.[i] ?? null,
        });
      }
    for (const [i, row] of openedPasses(component.graph).entries())
      for (const [j, share] of row.entries())
        if (share > 0 || (component.graph.exits?.[i]?.[j] ?? 0) > 0)
          passes.push({ from: names[i]!, to: names[j]!, share });
  }
  return { nodes, passes };
}
