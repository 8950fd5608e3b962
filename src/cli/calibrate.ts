import { readFileSync, writeFileSync } from "node:fs";
import { mergeCalibrations, PlanningError } from "../planning/index.ts";
import { presentProblems, presentText } from "../present/index.ts";
import type { CalibrationResult } from "../results/index.ts";
import { runCell } from "../session/index.ts";
import { readArguments, UsageError, withUsage } from "./arguments.ts";
import { type Document, DocumentError, readDocument } from "./document.ts";
import { hostForDocument } from "./node-host.ts";
import { plainValue, runDocument, terminalWatch } from "./run.ts";

function readShard(path: string): CalibrationResult {
  let value: unknown;
  try {
    value = JSON.parse(readFileSync(path, "utf8"));
  } catch {
    throw new UsageError(`"${path}" could not be read as a shard.`);
  }
  const shard = value as Partial<CalibrationResult> | null;
  if (shard?.kind !== "calibration" || !Array.isArray(shard.scenarios))
    throw new UsageError(`"${path}" is not a shard: calibrate writes one with --out.`);
  return value as CalibrationResult;
}

function shown(result: CalibrationResult, out: string | null): number {
  if (out !== null) writeFileSync(out, `${JSON.stringify(result, plainValue, 1)}\n`);
  process.stdout.write(`${presentText(result)}\n`);
  return 0;
}

function wholeNumber(given: string | null, name: string): string | null {
  if (given !== null && !/^[1-9][0-9]*$/.test(given)) throw new UsageError(`"${name}" takes a whole number above 0.`);
  return given;
}

/** `meanwise calibrate FILE FAMILY ...` runs the document and then one calibration, whole or a shard; `--merge FILE ...` joins shards. */
export async function calibrateCommand(words: readonly string[]): Promise<number> {
  return withUsage(async () => {
    const given = readArguments(words, {
      "--studies": "value",
      "--shard": "value",
      "--seed": "value",
      "--out": "value",
      "--merge": "flag",
    });
    if (given.has("--merge")) {
      if (given.files.length === 0) throw new UsageError("--merge needs the files of the shards.");
      try {
        return shown(mergeCalibrations(given.files.map(readShard)), given.value("--out"));
      } catch (error) {
        if (error instanceof PlanningError) throw new UsageError(error.message);
        throw error;
      }
    }
    const [path, family] = given.files;
    if (path === undefined || family === undefined || given.files.length > 2)
      throw new UsageError("calibrate needs a file and a family: meanwise calibrate study.mwise primary");
    const studies = wholeNumber(given.value("--studies"), "--studies") ?? "20000";
    const seed = wholeNumber(given.value("--seed"), "--seed");
    const shard = given.value("--shard");
    const parts = shard === null ? null : /^([1-9][0-9]*)\/([1-9][0-9]*)$/.exec(shard);
    if (shard !== null && parts === null) throw new UsageError('"--shard" takes I/N, such as 2/8.');
    if (parts !== null && seed === null) throw new UsageError("shards of one calibration need the same --seed.");
    let document: Document;
    try {
      document = readDocument(path);
    } catch (error) {
      if (error instanceof DocumentError) throw new UsageError(error.message);
      throw error;
    }
    const { watch, clear } = terminalWatch();
    const host = hostForDocument(document.path, { watch });
    let failed = false;
    const run = await runDocument(document, host, undefined, (problems, cell) => {
      failed = true;
      process.stderr.write(`${presentProblems(problems, cell.text).text}\n`);
    });
    if (failed) return 1;
    const source = `calibrate "${family.replace(/"/g, '""')}" with ${studies} studies${seed === null ? "" : `\n  seed ${seed}`}${parts === null ? "" : `\n  shard ${parts[1]} of ${parts[2]}`}`;
    const done = await runCell(run.session, source, { cell: document.cells.length + 1, host });
    clear();
    const result = done.outcomes.at(-1)?.result;
    if (result?.kind !== "calibration") {
      process.stderr.write(`${presentProblems(done.problems, source).text}\n`);
      return done.problems.some(({ code }) => code === "interrupted") ? 130 : 1;
    }
    return shown(result, given.value("--out"));
  });
}
