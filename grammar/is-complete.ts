import { parseChunk } from "./cell.ts";
import { cut, linesOf } from "./cut.ts";
import { placeMap } from "./span.ts";
import { catalogue } from "./statements/index.ts";

export interface Completeness {
  readonly status: "complete" | "incomplete" | "invalid";
  /** What the next line should begin with when more is to come. */
  readonly indent: string;
}

const waiting: Completeness = { status: "incomplete", indent: "  " };
const finished: Completeness = { status: "complete", indent: "" };
const wrong: Completeness = { status: "invalid", indent: "" };

/** Mistakes that more lines can still put right. */
const curable = new Set(["unfinished", "reason-expected", "data-empty"]);

/**
 * Whether a console should run the text, ask for another line, or show its mistakes. A blank line ends a statement that could go on.
 */
export function isComplete(text: string): Completeness {
  const places = placeMap(text);
  const chunks = cut(text);
  const last = chunks.at(-1);
  if (last === undefined) return finished;
  for (const chunk of chunks.slice(0, -1)) if (parseChunk(text, chunk, places).problems.length > 0) return wrong;
  const { verb, problems } = parseChunk(text, last, places);
  const lines = linesOf(text);
  const ended = lines.at(-1)!.kind === "blank" && lines.length > 1;
  if (problems.length > 0) {
    const open = problems.every(({ code }) => curable.has(code));
    return open && !ended ? waiting : wrong;
  }
  if (ended || verb === null) return finished;
  const indented = lines.some((line) => line.kind === "indented" && line.start > last.start);
  return indented || catalogue.get(verb)!.continues === true ? waiting : finished;
}
