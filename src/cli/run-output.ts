import { presentProblems, presentResult } from "../present/index.ts";
import { embedRecord } from "../record/index.ts";
import { presentOptions } from "../session/index.ts";
import type { CellRun, DocumentRun } from "./run.ts";
import { packageVersion, plainValue } from "./run.ts";
import type { NotebookCell } from "./document.ts";

const escaped = (text: string): string =>
  text.replace(/[&<>"]/g, (sign) => ({ "&": "&amp;", "<": "&lt;", ">": "&gt;", '"': "&quot;" })[sign]!);
const lines = (text: string): string[] =>
  text.split("\n").map((line, index, all) => (index < all.length - 1 ? `${line}\n` : line));

/** Everything that the statements show, as one page. */
export async function pageOf(run: DocumentRun): Promise<string> {
  const options = presentOptions(run.session.study);
  const parts: string[] = [];
  for (const { cell, outcomes, problems } of run.cells) {
    for (const outcome of outcomes) {
      if (outcome.result === null || outcome.result.kind === "message") continue;
      const bundle = await presentResult(outcome.result, options, null);
      parts.push(
        `<section><pre>${escaped(outcome.text)}</pre>${bundle["text/html"] ?? bundle["image/svg+xml"] ?? `<pre>${escaped(bundle["text/plain"])}</pre>`}</section>`,
      );
    }
    if (problems.length > 0) parts.push(presentProblems(problems, cell.text).html);
  }
  const title = escaped(run.session.study.title ?? run.host.documentName ?? "Meanwise");
  return `<!doctype html>\n<html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width, initial-scale=1"><title>${title}</title><style>:root{color-scheme:light dark}body{font:16px/1.5 system-ui,sans-serif;margin:0 auto;max-width:64rem;padding:1.5rem}svg{max-width:100%;height:auto}section>pre{border-left:3px solid currentColor;padding-left:.8em;overflow-x:auto}</style></head><body><main><h1>${title}</h1>\n${parts.join("\n")}\n</main></body></html>\n`;
}

async function outputsOf(run: DocumentRun, cell: CellRun, count: number): Promise<unknown[]> {
  const options = presentOptions(run.session.study);
  const shown = cell.outcomes.filter((outcome) => outcome.result !== null && outcome.result.kind !== "message");
  const outputs: unknown[] = [];
  for (const [index, outcome] of shown.entries()) {
    const bundle = await presentResult(outcome.result!, options, run.host);
    const data = Object.fromEntries(
      Object.entries(bundle).map(([type, content]) => [
        type,
        typeof content === "string" && !type.endsWith("png") ? lines(content) : content,
      ]),
    );
    const last = index === shown.length - 1 && cell.problems.length === 0;
    outputs.push(
      last
        ? { output_type: "execute_result", execution_count: count, data, metadata: {} }
        : { output_type: "display_data", data, metadata: {} },
    );
  }
  if (cell.problems.length > 0) {
    const [first] = cell.problems;
    outputs.push({
      output_type: "error",
      ename: first!.code,
      evalue: first!.message,
      traceback: presentProblems(cell.problems, cell.cell.text).text.split("\n"),
    });
  }
  return outputs;
}

/** The document as a notebook (format 4.5) with its outputs, and the record in its metadata, so that the file alone can be audited. */
export async function notebookOf(run: DocumentRun): Promise<string> {
  const { document } = run;
  const source: NotebookCell[] = document.notebook?.cells ?? [
    { cell_type: "code", source: lines(document.cells[0]!.text), id: "cell-1", metadata: {} },
  ];
  const cells: NotebookCell[] = [];
  for (const [position, cell] of source.entries()) {
    const ran = run.cells.find((entry) => entry.cell.position === position);
    const base = { ...cell, id: cell.id ?? `cell-${position + 1}`, metadata: cell.metadata ?? {} };
    if (cell.cell_type !== "code") cells.push(base);
    else if (ran === undefined) cells.push({ ...base, outputs: [], execution_count: null });
    else cells.push({ ...base, outputs: await outputsOf(run, ran, ran.cell.number), execution_count: ran.cell.number });
  }
  const results = run.cells.flatMap(({ cell, outcomes }) =>
    outcomes.flatMap((outcome) =>
      outcome.result === null || outcome.result.kind === "message"
        ? []
        : [{ cell: cell.number, statement: outcome.text, result: outcome.result }],
    ),
  );
  const notebook = {
    cells,
    metadata: {
      ...(document.notebook?.metadata ?? {}),
      kernelspec: { display_name: "Meanwise", language: "meanwise", name: "meanwise" },
      language_info: {
        name: "meanwise",
        file_extension: ".mwise",
        mimetype: "text/x-meanwise",
        pygments_lexer: "text",
      },
      meanwise: {
        version: packageVersion(),
        record: embedRecord(run.session.study.ledger, run.session.study.plan),
        results,
      },
    },
    nbformat: 4,
    nbformat_minor: 5,
  };
  return `${JSON.stringify(notebook, plainValue, 1)}\n`;
}
