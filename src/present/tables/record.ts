import type { HelpResult, LedgerResult, MessageResult, PlanResult } from "../../results/index.ts";
import { type Block, noteBlocks, paragraph, tableOf } from "../blocks.ts";
import { noteTexts } from "../notes.ts";
import { counted } from "../numbers.ts";
import { factsTable } from "./facts.ts";

export function planBlocks(result: PlanResult): Block[] {
  const sealed = result.digest === null ? "" : `sealed ${result.sealedAt}, SHA-256 ${result.digest}`;
  const first = {
    seal: `Plan "${result.name}" ${sealed}, in ${result.path}. Deposit the file or the digest where your lab registers plans.`,
    open: `Opened plan "${result.name}", ${sealed}. Its declarations are fixed.`,
    amend: `Amended plan "${result.name}"; the original stays beside the change.`,
    show: result.digest === null ? "Declared so far; not sealed." : `Plan "${result.name}", ${sealed}.`,
  }[result.action];
  const blocks: Block[] = [paragraph(first)];
  if (result.action !== "seal") blocks.push({ type: "statements", lines: result.statements });
  if (result.amendments.length > 0) {
    blocks.push({
      type: "list",
      items: result.amendments.map(
        (entry) =>
          `${entry.at}${entry.afterResults ? ", after results were seen" : ""}: ${entry.statement.replace(/\s+/g, " ")} (because: ${entry.reason})`,
      ),
    });
  }
  return [...blocks, ...noteBlocks(result.notes)];
}

export function ledgerBlocks(result: LedgerResult): Block[] {
  const blocks: Block[] = [];
  if (result.action === "audit") {
    blocks.push(
      paragraph(
        result.whole
          ? `The record is whole: ${counted(result.entries.length, "entry", "entries")}, each following the one before.`
          : "The record is not whole.",
      ),
    );
  }
  if (result.head !== null) blocks.push(paragraph(`Head digest, to publish: ${result.head}`));
  if (result.problems.length > 0)
    blocks.push({ type: "list", items: result.problems.map((problem) => `${problem.message} ${problem.advice}`) });
  if (result.entries.length > 0) {
    blocks.push({
      type: "table",
      table: tableOf("Ledger", result.entries, [
        { label: "entry", value: (row) => row.index, header: true, align: "right" },
        { label: "at", value: (row) => row.at },
        { label: "what", value: (row) => row.event },
        {
          label: "of",
          value: (row) => row.summary,
          text: (row) => (row.summary.length > 60 ? `${row.summary.slice(0, 59)}\u2026` : row.summary),
        },
        { label: "digest", value: (row) => row.digest, text: (row) => row.digest.slice(0, 12) },
      ]),
    });
  }
  return [...blocks, ...noteBlocks(result.notes)];
}

export function helpBlocks(result: HelpResult): Block[] {
  return result.sections.flatMap((section): Block[] => [
    ...(section.heading === null ? [] : [{ type: "heading" as const, level: 1 as const, text: section.heading }]),
    ...section.lines.map((line) => paragraph(line)),
    ...(section.example === null ? [] : [{ type: "statements" as const, lines: [section.example] }]),
    ...(section.table === null ? [] : [{ type: "table" as const, table: factsTable(section.table) }]),
  ]);
}

export function messageBlocks(result: MessageResult): Block[] {
  const { what, name, value } = result.facts;
  const named =
    name === null || name === undefined ? String(what ?? "") : `${what === undefined ? "" : `${what} `}${name}`;
  const texts: Readonly<Record<string, string>> = {
    declared: `Declared ${named}.`,
    unchanged: `${named} stands as declared.`,
    replaced: `${named} declared anew; the earlier declaration is replaced.`,
    set: `Set ${name} to ${value}.`,
  };
  return [
    paragraph(texts[result.code] ?? noteTexts([{ code: result.code, facts: result.facts }]).join(" ")),
    ...noteBlocks(result.notes),
  ];
}
