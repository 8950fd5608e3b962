import { hostForDocument } from "./node-host.ts";
import { readArguments, UsageError, withUsage } from "./arguments.ts";
import { type Document, DocumentError, readDocument } from "./document.ts";
import { runDocument, terminalWatch } from "./run.ts";
import { presentProblems } from "../present/index.ts";
import { runCell } from "../session/index.ts";
import { relative, dirname, resolve } from "node:path";

/** `meanwise report FILE --to OUT`: runs the document, then writes its report. */
export async function reportCommand(words: readonly string[]): Promise<number> {
  return withUsage(async () => {
    const given = readArguments(words, { "--to": "value" });
    const to = given.value("--to");
    if (given.files.length !== 1 || to === null)
      throw new UsageError("report needs a file and where to write: meanwise report study.ipynb --to report.docx");
    if (!/\.(html?|md|docx)$/i.test(to))
      throw new UsageError(`a report is written as .html, .md or .docx, not as "${to}".`);
    let document: Document;
    try {
      document = readDocument(given.files[0]!);
    } catch (error) {
      if (error instanceof DocumentError) throw new UsageError(error.message);
      throw error;
    }
    const { watch } = terminalWatch();
    const host = hostForDocument(document.path, { watch });
    let failed = false;
    const run = await runDocument(document, host, undefined, (problems, cell) => {
      failed = true;
      process.stderr.write(`Cell ${cell.number}\n${presentProblems(problems, cell.text).text}\n\n`);
    });
    const path = relative(dirname(resolve(document.path)), resolve(to)) || to;
    const source = `report to "${path.replace(/"/g, '""')}"`;
    const done = await runCell(run.session, source, { cell: document.cells.length + 1, host });
    if (done.problems.length > 0) {
      process.stderr.write(`${presentProblems(done.problems, source).text}\n`);
      return 1;
    }
    process.stdout.write(`${resolve(to)}\n`);
    return failed ? 1 : 0;
  });
}
