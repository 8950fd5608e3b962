import { displayWidth } from "./display-width.ts";
import { escapeHtml, plainText } from "./markup.ts";

/** What is shown of a mistake: its words and its place in the cell. */
export interface ShownProblem {
  readonly line: number;
  readonly column: number;
  readonly endLine: number;
  readonly endColumn: number;
  readonly message: string;
  readonly advice: string;
}

/** The line with a marker under the place; columns count code points, the marker counts what a terminal shows. */
export function problemText(problem: ShownProblem, source: string): string {
  const line = source.split(/\r?\n/)[problem.line - 1] ?? "";
  const points = [...line];
  const start = Math.min(problem.column - 1, points.length);
  const end = problem.endLine === problem.line ? Math.max(start + 1, problem.endColumn - 1) : points.length;
  // A tab is shown as one blank, so that the marker stands where the place is on every terminal.
  const visible = (from: number, to?: number) => plainText(points.slice(from, to).join("").replace(/\t/g, " "));
  const marked = Math.max(1, displayWidth(visible(start, end)));
  return [
    `Line ${problem.line}: ${plainText(problem.message)}`,
    `  ${visible(0)}`,
    `  ${" ".repeat(displayWidth(visible(0, start)))}${"^".repeat(marked)}`,
    `  ${plainText(problem.advice)}`,
  ].join("\n");
}

export function presentProblems(
  problems: readonly ShownProblem[],
  source: string,
): { readonly text: string; readonly html: string } {
  const text = problems.map((problem) => problemText(problem, source)).join("\n\n");
  return {
    text,
    html: `<pre style="margin:0.4em 0;background:none;color:inherit;overflow-x:auto" tabindex="0">${escapeHtml(text)}</pre>`,
  };
}
