import type { IToken } from "chevrotain";
import { withBreaks } from "./breaks.ts";
import { cut } from "./cut.ts";
import { clauseOptions } from "./first.ts";
import type { Known } from "./known.ts";
import { repaired } from "./lexical.ts";
import { quoted, writtenName } from "./print.ts";
import { type Expected, recognise } from "./recognise.ts";
import { placeMap } from "./span.ts";
import { catalogue } from "./statements/index.ts";
import type { Suggestion, Syntax } from "./syntax.ts";
import { Break, emptyToken, languageWords, lex } from "./tokens.ts";

export type CompletionKind =
  | "statement"
  | "word"
  | "factor"
  | "level"
  | "contrast"
  | "family"
  | "column"
  | "unit"
  | "file"
  | "plan"
  | "topic";

export interface CompletionItem {
  readonly text: string;
  readonly type: CompletionKind;
  /** One line about it; empty when there is none. */
  readonly signature: string;
}

export interface Completions {
  readonly items: readonly CompletionItem[];
  /** What the chosen text replaces, in UTF-16 offsets. */
  readonly start: number;
  readonly end: number;
}

/**
 * What could be typed at a place: verbs at the margin, the words possible at this point of a statement, declared names, columns and files.
 * Works in broken and unfinished cells.
 * @param offset of the cursor, in UTF-16 units
 */
export function complete(text: string, offset: number, known: Known = {}): Completions {
  const at = Math.max(0, Math.min(offset, text.length));
  const before = text.slice(0, at);
  const lineStart = Math.max(before.lastIndexOf("\n"), before.lastIndexOf("\r")) + 1;
  const line = before.slice(lineStart).replace(/^\ufeff/, "");
  const written = writtenPart(line);
  if (written === null) return { items: [], start: at, end: at };
  const start = at - written.length;
  const end = at + (written.startsWith('"') ? (text[at] === '"' ? 1 : 0) : wordAfter(text, at));
  const items = candidates(text.slice(0, start), line.slice(0, line.length - written.length), known);
  const wanted = written.replace(/^"/, "").toLowerCase();
  const found = new Map<string, CompletionItem>();
  for (const item of items) {
    const isQuoted = item.text.startsWith('"');
    if (written.startsWith('"') && !isQuoted && item.type !== "statement" && item.type !== "word") {
      if (item.text.toLowerCase().startsWith(wanted)) found.set(item.text, { ...item, text: quoted(item.text) });
      continue;
    }
    if (written.startsWith('"') !== isQuoted && written !== "") {
      if (written.startsWith('"') || !item.text.slice(1).toLowerCase().startsWith(wanted)) continue;
    } else if (!item.text.replace(/^"/, "").toLowerCase().startsWith(wanted)) continue;
    if (!found.has(item.text)) found.set(item.text, item);
  }
  return { items: [...found.values()], start, end };
}

/** The word or open quote that ends at the cursor; null inside a comment. */
function writtenPart(line: string): string | null {
  let quote = -1;
  for (let index = 0; index < line.length; index++) {
    if (line[index] === '"') quote = quote < 0 ? index : -1;
    else if (line[index] === "#" && quote < 0) return null;
  }
  if (quote >= 0) return line.slice(quote);
  return /[\p{L}\p{N}_][\p{L}\p{M}\p{N}_]*$/u.exec(line)?.[0] ?? "";
}

const wordAfter = (text: string, at: number): number =>
  /^[\p{L}\p{M}\p{N}_]*/u.exec(text.slice(at, at + 200))![0].length;

function candidates(before: string, lineBefore: string, known: Known): readonly CompletionItem[] {
  const verbs = (): CompletionItem[] =>
    [...catalogue].map(([verb, { help }]) => ({ text: verb, type: "statement", signature: help }));
  if (lineBefore === "") return verbs();
  const chunk = cut(before).at(-1);
  if (chunk === undefined || !chunk.atMargin) return verbs();

  const places = placeMap(before);
  const { tokens } = repaired(lex(before.slice(chunk.start), chunk.start).tokens, places);
  const verb = tokens[0]?.image ?? "";
  const description = catalogue.get(verb);
  if (description === undefined || description.rows === true) return [];
  const whole = withBreaks(verb, tokens, places).slice(1);
  const beginsLine = lineBefore.trim() === "";
  const readings: readonly IToken[][] = beginsLine ? [[...whole, emptyToken(Break, before.length)], whole] : [whole];
  const options = clauseOptions(verb, tokens);
  const expected = readings.flatMap((reading) => expectedAfter(description.syntax, options, reading));
  return expected.flatMap((each) => itemsFor(each, tokens, known));
}

/** What may come next; where the statement is broken further up, its last clause is read alone. */
function expectedAfter(syntax: Syntax, options: readonly Syntax[], reading: readonly IToken[]): readonly Expected[] {
  const read = recognise(syntax, reading);
  if (read.furthest === reading.length) return read.expected;
  const last = reading.findLastIndex((token) => token.tokenType === Break);
  if (last < 0 || options.length === 0) return [];
  const tail = reading.slice(last + 1);
  const clause = recognise({ type: "either", options, what: null }, tail);
  return clause.furthest === tail.length ? clause.expected : [];
}

function itemsFor(expected: Expected, tokens: readonly IToken[], known: Known): readonly CompletionItem[] {
  const { what, help } = expected;
  switch (what.type) {
    case "phrase": {
      const rest = what.syntax.pieces.slice(what.from);
      if (rest[0]?.kind !== "word") return [];
      const text = what.from === 0 ? what.syntax.text : restText(what.syntax.text, what.from);
      return [{ text, type: "word", signature: known.methods?.[what.syntax.text] ?? help ?? "" }];
    }
    case "verb":
      return [{ text: what.verb, type: "word", signature: catalogue.get(what.verb)!.help }];
    case "name":
    case "text":
      return suggestions(what.syntax.suggest, what.type === "text", tokens, known);
    default:
      return [];
  }
}

/** The rest of a phrase, spaced and hyphenated as the phrase is. */
function restText(text: string, from: number): string {
  const pieces = [...text.matchAll(/[a-z0-9]+|[^a-z0-9\s]/g)];
  return text.slice(pieces[from]!.index);
}

function suggestions(
  suggest: Suggestion,
  asText: boolean,
  tokens: readonly IToken[],
  known: Known,
): readonly CompletionItem[] {
  const written = (text: string): string => (asText ? quoted(text) : writtenName(text, languageWords));
  const items = (names: readonly string[] | undefined, type: CompletionKind): CompletionItem[] =>
    (names ?? []).map((text) => ({ text: written(text), type, signature: known.declarations?.[text] ?? "" }));
  switch (suggest) {
    case "factors":
      return items(known.factors, "factor");
    case "levels":
      return items(levelsFor(tokens, known), "level");
    case "contrasts":
      return items(known.contrasts, "contrast");
    case "families":
      return items(known.families, "family");
    case "columns":
      return items([...new Set([...(known.columns ?? []), ...(known.covariates ?? [])])], "column");
    case "units":
      return items(known.units, "unit");
    case "response":
      return items(known.response === undefined ? known.columns : [known.response], "column");
    case "files":
      return (known.files ?? []).map((text) => ({ text: quoted(text), type: "file", signature: "" }));
    case "plans":
      return (known.plans ?? []).map((text) => ({ text: quoted(text), type: "plan", signature: "" }));
    case "topics":
      return [...catalogue.keys(), ...Object.keys(known.methods ?? {}), ...(known.topics ?? [])].map((text) => ({
        text,
        type: "topic",
        signature: catalogue.get(text)?.help ?? known.methods?.[text] ?? "",
      }));
    case "none":
      return [];
  }
}

/** The levels of the factor that the statement named last; of all factors where it names none, or after `at`. */
function levelsFor(tokens: readonly IToken[], known: Known): readonly string[] {
  const levels = known.levels ?? {};
  const named = tokens
    .map((token) => token.image.replace(/^"|"$/g, ""))
    .findLast((each) => Object.hasOwn(levels, each));
  const all = [...new Set(Object.values(levels).flat())];
  if (named === undefined || tokens.at(-1)?.image === "at") return all;
  return levels[named]!;
}
