import type { Block } from "../blocks.ts";
import type { ReportDocument } from "./document.ts";

export interface Numbering {
  /** Number of a table or a figure, each kind counted from 1 in the order of the report. */
  readonly of: (block: Block) => number;
}

export function numberingOf(document: ReportDocument): Numbering {
  const numbers = new Map<Block, number>();
  let tables = 0;
  let figures = 0;
  for (const block of document.sections.flatMap((section) => section.blocks)) {
    if (block.type === "table") numbers.set(block, ++tables);
    if (block.type === "picture") numbers.set(block, ++figures);
  }
  return { of: (block) => numbers.get(block)! };
}
