import { parseChunk } from "./cell.ts";
import { cut } from "./cut.ts";
import type { Known } from "./known.ts";
import { clauseForms, printedForm } from "./printed-form.ts";
import { ruleSyntax } from "./rules.ts";
import { placeMap, type Span } from "./span.ts";
import { catalogue } from "./statements/index.ts";
import type { Suggestion } from "./syntax.ts";
import { endOf } from "./tokens.ts";

export interface Hover {
  readonly title: string;
  readonly lines: readonly string[];
  readonly example: string | null;
  readonly span: Span;
}

const kinds: Readonly<Record<Suggestion, string>> = {
  factors: "factor",
  levels: "level",
  contrasts: "contrast",
  families: "family",
  columns: "column",
  units: "unit",
  response: "response",
  files: "file",
  plans: "plan",
  topics: "topic",
  none: "name",
};

/** The statement's form, its clauses included, one to a line. */
export function formsOf(verb: string): readonly string[] {
  const { syntax, rows } = catalogue.get(verb)!;
  if (rows === true) return [verb, "  COLUMN COLUMN ...", "  VALUE VALUE ..."];
  return [
    `${verb} ${printedForm(syntax, ruleSyntax)}`.trim(),
    ...clauseForms(syntax, ruleSyntax).map(({ form }) => `  ${form}`),
  ];
}

/**
 * What the catalogue or the declarations know about the word at a place; null where there is nothing to say.
 * @param offset in UTF-16 units
 */
export function hover(text: string, offset: number, known: Known = {}): Hover | null {
  const places = placeMap(text);
  const chunk = cut(text).find(({ start, end }) => start <= offset && offset <= end);
  if (chunk === undefined || !chunk.atMargin) return null;
  const { verb, taken } = parseChunk(text, chunk, places);
  if (verb === null) return null;
  if (offset <= chunk.start + verb.length) {
    const { help, details, example } = catalogue.get(verb)!;
    const span = places.span(chunk.start, chunk.start + verb.length);
    return { title: verb, lines: [help, ...formsOf(verb), ...details], example, span };
  }
  const found = taken.find(({ token }) => token.startOffset <= offset && offset < endOf(token));
  const touched = found ?? taken.find(({ token }) => endOf(token) === offset);
  if (touched === undefined) return null;
  const { token, syntax, help } = touched;
  const span = places.span(token.startOffset, endOf(token));
  switch (syntax.type) {
    case "phrase": {
      const about = known.methods?.[syntax.text] ?? help;
      return { title: syntax.text, lines: about === null ? [catalogue.get(verb)!.help] : [about], example: null, span };
    }
    case "name": {
      const name = token.image.startsWith('"') ? token.image.slice(1, -1).replaceAll('""', '"') : token.image;
      const declared = known.declarations?.[name];
      const owner = Object.entries(known.levels ?? {}).find(([, levels]) => levels.includes(name))?.[0];
      const lines = [
        ...(declared === undefined ? [] : [declared]),
        ...(syntax.suggest === "levels" && owner !== undefined ? [`level of ${owner}`] : []),
        ...(syntax.suggest === "topics" && known.methods?.[name] !== undefined ? [known.methods[name]!] : []),
      ];
      return lines.length === 0 ? null : { title: `${kinds[syntax.suggest]} ${name}`, lines, example: null, span };
    }
    default:
      return help === null ? null : { title: syntax.type, lines: [help], example: null, span };
  }
}
