import { cpSync, mkdtempSync, readdirSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { basename, dirname, join, resolve } from "node:path";
import { noteText } from "../present/index.ts";
import { auditLedger, canonicalJson, isEmbeddedRecord, PlanError, readPlan, type SealedPlan } from "../record/index.ts";
import { ledgerPathOf } from "../session/index.ts";
import { readArguments, UsageError, withUsage } from "./arguments.ts";
import { type Document, DocumentError, readDocument } from "./document.ts";
import { hostForDocument } from "./node-host.ts";
import { packageVersion, plainValue, runDocument } from "./run.ts";

interface Recorded {
  readonly version: string | null;
  readonly results: readonly { readonly cell: number; readonly statement: string; readonly result: unknown }[];
}

function readText(path: string): string {
  try {
    return readFileSync(path, "utf8");
  } catch (error) {
    throw new UsageError(`"${path}" could not be read (${(error as NodeJS.ErrnoException).code ?? "unknown reason"}).`);
  }
}

function openNotebook(path: string): Document {
  try {
    return readDocument(path);
  } catch (error) {
    if (error instanceof DocumentError) throw new UsageError(error.message);
    throw error;
  }
}

/** The plan that a ledger's folder keeps under the name that the ledger gives, or null. */
function planBeside(ledgerText: string, folder: string, problems: string[]): SealedPlan | null {
  const name = /"plan":"((?:[^"\\]|\\.)*)"/.exec(ledgerText)?.[1];
  if (name === undefined) return null;
  const path = join(folder, `${JSON.parse(`"${name}"`) as string}.plan.json`);
  try {
    return readPlan(readFileSync(path, "utf8"), path);
  } catch (error) {
    if (error instanceof PlanError) problems.push(`${error.message} ${error.advice}`);
    return null;
  }
}

/** Prints what an audit found. @returns exit code: 0 whole, 1 broken or incomplete */
function auditFile(path: string, publishedHead: string | null): number {
  const text = readText(path);
  const said: string[] = [];
  let ledgerText = text;
  let plan: SealedPlan | null = null;
  let claimedHead: string | null = null;
  if (/\.ipynb$/i.test(path)) {
    const { notebook } = openNotebook(path);
    const kept = (notebook!.metadata.meanwise as { record?: unknown } | undefined)?.record;
    if (!isEmbeddedRecord(kept)) {
      const beside = join(dirname(path), ledgerPathOf(basename(path)));
      try {
        ledgerText = readFileSync(beside, "utf8");
      } catch {
        process.stdout.write(
          "The notebook carries no record, and no ledger lies beside it.\nRun it with: meanwise run FILE --notebook OUT, which embeds the record.\n",
        );
        return 1;
      }
      plan = planBeside(ledgerText, dirname(path), said);
    } else {
      ledgerText = kept.ledger.map((line) => `${line}\n`).join("");
      plan = kept.plan;
      claimedHead = kept.head;
    }
  } else plan = planBeside(ledgerText, dirname(path), said);
  const found = auditLedger(ledgerText, { plan, publishedHead, claimedHead });
  const whole = found.whole && said.length === 0;
  process.stdout.write(
    `${whole ? "The record is whole" : "The record is not whole"}: ${found.ledger.entries.length} ${found.ledger.entries.length === 1 ? "entry" : "entries"}.\n`,
  );
  if (found.head !== null) process.stdout.write(`Head digest: ${found.head}\n`);
  for (const line of said) process.stdout.write(`- ${line}\n`);
  for (const problem of found.problems)
    process.stdout.write(
      `- ${problem.entry === null ? "" : `Entry ${problem.entry}: `}${problem.message} ${problem.advice}\n`,
    );
  for (const deviation of found.deviations)
    process.stdout.write(
      `- ${noteText({ code: deviation.code, facts: deviation.facts })}${deviation.incomplete ? " The record is incomplete without it." : ""}\n`,
    );
  return whole ? 0 : 1;
}

/** First place where two values differ, or null. Numbers may differ by a share of `tolerance`. */
function difference(left: unknown, right: unknown, tolerance: number, path = ""): string | null {
  if (typeof left === "number" && typeof right === "number") {
    return left === right || Math.abs(left - right) <= tolerance * Math.max(Math.abs(left), Math.abs(right))
      ? null
      : `${path}: recorded ${left}, now ${right}`;
  }
  if (typeof left !== typeof right || left === null || right === null || typeof left !== "object") {
    return left === right ? null : `${path}: recorded ${JSON.stringify(left)}, now ${JSON.stringify(right)}`;
  }
  const keys = new Set([...Object.keys(left), ...Object.keys(right as object)]);
  for (const key of keys) {
    const found = difference(
      (left as Record<string, unknown>)[key],
      (right as Record<string, unknown>)[key],
      tolerance,
      path === "" ? key : `${path}.${key}`,
    );
    if (found !== null) return found;
  }
  return null;
}

/** What is not a number of the study: times, places on the disk, digests that hold a time, and states that depend on an older ledger. */
const comparable = new Set([
  "omnibus",
  "comparisons",
  "describe",
  "check",
  "picture",
  "power",
  "size",
  "detectable",
  "calibration",
  "data",
]);

async function verifyFile(path: string): Promise<number> {
  const document = openNotebook(path);
  const recorded = document.notebook?.metadata.meanwise as Partial<Recorded> | undefined;
  if (recorded === undefined || !Array.isArray(recorded.results)) {
    process.stdout.write(
      "The notebook carries no recorded results.\nRun it with: meanwise run FILE --notebook OUT, which records them.\n",
    );
    return 1;
  }
  const folder = mkdtempSync(join(tmpdir(), "meanwise-verify-"));
  try {
    // A clean session: the data and the plan, without the ledger.
    for (const file of readdirSync(dirname(resolve(path)), { withFileTypes: true })) {
      if (file.isFile() && !/\.ledger\.jsonl$/.test(file.name))
        cpSync(join(dirname(resolve(path)), file.name), join(folder, file.name));
    }
    const copy = { ...document, path: join(folder, basename(path)) };
    const run = await runDocument(copy, hostForDocument(copy.path));
    const now = run.cells.flatMap(({ cell, outcomes }) =>
      outcomes.flatMap((outcome) =>
        outcome.result === null
          ? []
          : [
              {
                cell: cell.number,
                statement: outcome.text,
                result: JSON.parse(JSON.stringify(outcome.result, plainValue)) as { kind: string },
              },
            ],
      ),
    );
    const same = recorded.version === packageVersion();
    const kept = recorded.results.filter((entry) => comparable.has((entry.result as { kind?: string })?.kind ?? ""));
    const again = now.filter((entry) => comparable.has(entry.result.kind));
    for (const [index, entry] of kept.entries()) {
      const twin = again[index];
      if (twin === undefined || twin.statement !== entry.statement) {
        process.stdout.write(
          `Cell ${entry.cell} differs: "${entry.statement.split("\n")[0]}" ${twin === undefined ? "gave no result this time" : `is now "${twin.statement.split("\n")[0]}"`}.\n`,
        );
        for (const problem of run.cells.flatMap((cell) => cell.problems).slice(0, 1))
          process.stdout.write(`${problem.message} ${problem.advice}\n`);
        return 1;
      }
      const found = difference(entry.result, twin.result, same ? 0 : 1e-9);
      if (found === null) continue;
      process.stdout.write(`Cell ${entry.cell} differs in "${entry.statement.split("\n")[0]}": ${found}\n`);
      return 1;
    }
    if (again.length > kept.length) {
      process.stdout.write(
        `Cell ${again[kept.length]!.cell} gives a result that the record does not have: "${again[kept.length]!.statement.split("\n")[0]}".\n`,
      );
      return 1;
    }
    process.stdout.write(
      `Every number of ${kept.length} ${kept.length === 1 ? "result" : "results"} came out ${same ? "the same, to the last bit" : "the same to 1e-9 (recorded by another version)"}.\n`,
    );
    return 0;
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

/** `meanwise audit FILE [--head DIGEST]` and `meanwise verify FILE`. */
export async function recordCommand(command: "audit" | "verify", words: readonly string[]): Promise<number> {
  return withUsage(async () => {
    const given = readArguments(words, command === "audit" ? { "--head": "value" } : {});
    if (given.files.length !== 1) throw new UsageError(`${command} takes one file.`);
    if (command === "audit") return auditFile(given.files[0]!, given.value("--head"));
    if (!/\.ipynb$/i.test(given.files[0]!))
      throw new UsageError("verify takes a notebook (.ipynb) that was run with --notebook.");
    return verifyFile(given.files[0]!);
  });
}

export { canonicalJson };
