import { readFileSync, writeFileSync } from "node:fs";
import { formatCell, parseCell } from "../../grammar/index.ts";
import { presentProblems } from "../present/index.ts";
import { readArguments, UsageError, withUsage } from "./arguments.ts";

/** `meanwise format FILE [--check]`: scripts in their settled form, comments kept. */
export async function formatCommand(words: readonly string[]): Promise<number> {
  return withUsage(async () => {
    const given = readArguments(words, { "--check": "flag" });
    if (given.files.length !== 1) throw new UsageError("format takes one script: meanwise format study.mwise");
    const path = given.files[0]!;
    let text: string;
    try {
      text = readFileSync(path, "utf8");
    } catch {
      throw new UsageError(`"${path}" could not be read.`);
    }
    const { problems } = parseCell(text);
    if (problems.length > 0) {
      const shown = problems.map((problem) => ({ ...problem.span, message: problem.message, advice: problem.advice }));
      process.stderr.write(`${presentProblems(shown, text).text}\n`);
      return 1;
    }
    const settled = formatCell(text);
    if (given.has("--check")) {
      if (settled === text) return 0;
      process.stdout.write(`${path} is not in its settled form.\n`);
      return 1;
    }
    if (settled !== text) writeFileSync(path, settled);
    return 0;
  });
}
