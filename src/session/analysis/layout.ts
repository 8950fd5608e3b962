import { type DesignDeclaration, type FoundDesign, findDesign, type Layout, layoutData } from "../../design/index.ts";
import { digestOfValue } from "../../record/index.ts";
import type { ResponseFacts } from "../../results/index.ts";
import { SessionProblem } from "../problem.ts";
import { designOf, type HeldData, type Study } from "../study.ts";

export interface Prepared {
  readonly design: DesignDeclaration;
  readonly held: HeldData;
  readonly layout: Layout;
  readonly found: FoundDesign;
}

export function responseFacts(design: Pick<DesignDeclaration, "response">): ResponseFacts {
  const { name, label, unit, better, scale } = design.response;
  return { name, label, unit, better, scale };
}

export function needDesign(study: Study): DesignDeclaration {
  const design = designOf(study);
  if (design === null) {
    throw new SessionProblem(
      "no-response",
      "No response is declared.",
      'Declare what is measured: response seconds "assembly time" in "s"',
    );
  }
  return design;
}

export function needData(study: Study): HeldData {
  if (study.data === null) {
    throw new SessionProblem(
      "no-data",
      "No data are held.",
      'Read them first: read "file.csv". To try the analysis on simulated data: rehearse with 24 subjects',
    );
  }
  return study.data;
}

/**
 * The held data laid out by the declared design.
 * @throws SessionProblem when nothing is declared or held; DesignError and DataProblem as laying out does
 */
export function prepare(study: Study): Prepared {
  const design = needDesign(study);
  const held = needData(study);
  if (design.factors.length === 0) {
    throw new SessionProblem(
      "no-factor",
      "No factor is declared: there is nothing to compare.",
      "Declare one: factor glove within operator: bare, nitrile, knit",
    );
  }
  const key = digestOfValue({ design, state: held.stateDigest });
  if (held.laidOut?.key === key) return { design, held, layout: held.laidOut.layout, found: held.laidOut.found };
  const layout = layoutData(held.table, design);
  const found = findDesign(layout, design);
  return { design, held, layout, found };
}

/** The study with the layout kept, so that the next statement need not lay out again. */
export function remembering(study: Study, prepared: Prepared): Study {
  if (study.data === null) return study;
  const key = digestOfValue({ design: prepared.design, state: prepared.held.stateDigest });
  return { ...study, data: { ...study.data, laidOut: { key, layout: prepared.layout, found: prepared.found } } };
}

/**
 * Refuses an analysis that the data would make wrong.
 * @param trialsMayRepeat true for the multilevel model, which takes repeated trials as what they are
 */
export function refuseWrongDesign(prepared: Prepared, trialsMayRepeat = false): void {
  const stopping = prepared.found.problems.filter(
    (problem) => problem.severity === "error" && !(trialsMayRepeat && problem.code === "duplicate-rows"),
  );
  if (stopping.length === 0) return;
  const [first] = stopping;
  const more = stopping.length - 1;
  throw new SessionProblem(
    first!.code,
    `${first!.message}${more > 0 ? ` (and ${more} more ${more === 1 ? "finding" : "findings"}: see check)` : ""}`,
    first!.advice,
  );
}
