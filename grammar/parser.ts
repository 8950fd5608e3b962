import { EmbeddedActionsParser, type IToken, type ParserMethod, type TokenType } from "chevrotain";
import type { Name, NumberValue } from "./ast.ts";
import { type Fields, readerOf } from "./reader.ts";
import { rules } from "./rules.ts";
import type { PlaceMap } from "./span.ts";
import { statements, verbs } from "./statements/index.ts";
import type { Syntax } from "./syntax.ts";
import { AnyName, endOf, marks, NumberToken, Quoted, vocabulary, wordTokens } from "./tokens.ts";

/** A syntax with its occurrence numbers, given once when the description is read (a counter that ran while parsing would shift). */
interface Numbered {
  readonly syntax: Syntax;
  readonly index: number;
  readonly parts: readonly Numbered[];
  /** Indices of the extra tokens of a number: sign of the fraction, its denominator. */
  readonly extra: readonly [number, number, number];
}

type Counters = Map<string, number>;

function next(counters: Counters, key: string): number {
  const index = counters.get(key) ?? 0;
  counters.set(key, index + 1);
  return index;
}

function numbered(syntax: Syntax, counters: Counters): Numbered {
  const plain = (index: number, parts: readonly Numbered[] = []): Numbered => ({ syntax, index, parts, extra: [0, 0, 0] });
  switch (syntax.type) {
    case "word":
      return plain(next(counters, `word ${syntax.word}`));
    case "mark":
      return plain(next(counters, `mark ${syntax.mark}`));
    case "name":
      return syntax.numbers
        ? { syntax, index: next(counters, "name"), parts: [], extra: [next(counters, "or"), next(counters, "number"), 0] }
        : plain(next(counters, "name"));
    case "text":
      return plain(next(counters, "text"));
    case "number":
      return { syntax, index: next(counters, "number"), parts: [], extra: [next(counters, "option"), next(counters, "mark /"), next(counters, "number")] };
    case "sequence":
      return plain(0, syntax.parts.map((part) => numbered(part, counters)));
    case "optional":
      return plain(next(counters, "option"), [numbered(syntax.part, counters)]);
    case "repeat":
      return plain(next(counters, "many"), [numbered(syntax.part, counters)]);
    case "either":
      return plain(next(counters, "or"), syntax.options.map((option) => numbered(option, counters)));
    case "group":
      return plain(0, [numbered(syntax.part, counters)]);
    case "list": {
      const first = numbered(syntax.item, counters);
      const comma = next(counters, "mark ,");
      const again = numbered(syntax.item, counters);
      return { syntax, index: next(counters, "many"), parts: [first, again], extra: [comma, 0, 0] };
    }
    case "rule":
      return plain(next(counters, `rule ${syntax.rule}`));
  }
}

const unquoted = (image: string): string => image.slice(1, -1).replace(/""/g, '"');

/** The parser: one Chevrotain rule for each statement and shared rule, driven by the syntax descriptions. */
class LanguageParser extends EmbeddedActionsParser {
  places: PlaceMap = { span: () => ({ start: 0, end: 0, line: 1, column: 1, endLine: 1, endColumn: 1 }) };
  readonly entry = new Map<string, ParserMethod<[], Fields>>();
  readonly #shared = new Map<string, ParserMethod<[], unknown>>();

  constructor() {
    super(vocabulary, { maxLookahead: 3, recoveryEnabled: true, skipValidations: true, nodeLocationTracking: "none" });
    // Shared rules call each other, so all are known by name before any is read.
    for (const [name, rule] of Object.entries(rules)) {
      const tree = numbered(rule.syntax, new Map());
      this.#shared.set(
        name,
        this.RULE(`rule ${name}`, () => {
          const fields: Fields = new Map();
          const first = this.LA(1);
          this.#walk(tree, fields);
          return this.ACTION(() => rule.build(readerOf(fields, this.#spanFrom(first))));
        }),
      );
    }
    for (const verb of verbs) {
      const { syntax } = statements[verb];
      if (syntax === null) continue;
      const tree = numbered(syntax, new Map());
      this.entry.set(
        verb,
        this.RULE(`statement ${verb}`, () => {
          const fields: Fields = new Map();
          this.#walk(tree, fields);
          return fields;
        }),
      );
    }
    this.performSelfAnalysis();
  }

  #spanFrom(first: IToken) {
    const last = this.LA(0) as IToken | undefined;
    const start = Number.isNaN(first.startOffset) ? 0 : first.startOffset;
    return this.places.span(start, last === undefined || Number.isNaN(last.startOffset) ? start : Math.max(start, endOf(last)));
  }

  #remember(fields: Fields, label: string | null, value: unknown): void {
    if (label === null) return;
    const before = fields.get(label);
    if (before === undefined) fields.set(label, [value]);
    else before.push(value);
  }

  #name(token: IToken): Name {
    const quoted = token.tokenType === Quoted;
    return { text: quoted ? unquoted(token.image) : token.image, span: this.places.span(token.startOffset, endOf(token)), quoted };
  }

  #take(index: number, type: TokenType): IToken {
    return this.consume(index, type);
  }

  #number(node: Numbered): NumberValue {
    const first = this.#take(node.index, NumberToken);
    let denominator: IToken | null = null;
    this.option(node.extra[0], () => {
      this.#take(node.extra[1], marks.get("/")!);
      denominator = this.#take(node.extra[2], NumberToken);
    });
    return this.ACTION(() => {
      const valueOf = (token: IToken) => (token.image.endsWith("%") ? Number(token.image.slice(0, -1)) / 100 : Number(token.image));
      const last = denominator as IToken | null;
      const value = last === null ? valueOf(first) : valueOf(first) / valueOf(last);
      return {
        value,
        text: last === null ? first.image : `${first.image}/${last.image}`,
        span: this.places.span(first.startOffset, endOf(last ?? first)),
      };
    }) as NumberValue;
  }

  #walk(node: Numbered, fields: Fields): void {
    const { syntax } = node;
    switch (syntax.type) {
      case "word": {
        const token = this.#take(node.index, wordTokens.get(syntax.word)!);
        this.ACTION(() => this.#remember(fields, syntax.label, { text: token.image, span: this.places.span(token.startOffset, endOf(token)) }));
        return;
      }
      case "mark": {
        this.#take(node.index, marks.get(syntax.mark)!);
        // The settled sign, whichever of its forms was typed.
        this.ACTION(() => this.#remember(fields, syntax.label, { text: syntax.mark }));
        return;
      }
      case "name": {
        const token = syntax.numbers
          ? (this.or(node.extra[0], [
              { ALT: () => this.#take(node.index, AnyName) },
              { ALT: () => this.#take(node.extra[1], NumberToken) },
            ]) as IToken)
          : this.#take(node.index, AnyName);
        this.ACTION(() => this.#remember(fields, syntax.label, this.#name(token)));
        return;
      }
      case "text": {
        const token = this.#take(node.index, Quoted);
        this.ACTION(() => this.#remember(fields, syntax.label, this.#name(token)));
        return;
      }
      case "number": {
        const value = this.#number(node);
        this.ACTION(() => this.#remember(fields, syntax.label, value));
        return;
      }
      case "sequence":
        for (const part of node.parts) this.#walk(part, fields);
        return;
      case "optional":
        this.option(node.index, () => this.#walk(node.parts[0]!, fields));
        return;
      case "repeat":
        this.many(node.index, () => this.#walk(node.parts[0]!, fields));
        return;
      case "either":
        this.or(node.index, { DEF: node.parts.map((part) => ({ ALT: () => this.#walk(part, fields) })), IGNORE_AMBIGUITIES: true });
        return;
      case "group":
        this.#group(node.parts[0]!, syntax.label, fields);
        return;
      case "list":
        this.#group(node.parts[0]!, syntax.label, fields);
        this.many(node.index, () => {
          this.#take(node.extra[0], marks.get(",")!);
          this.#group(node.parts[1]!, syntax.label, fields);
        });
        return;
      case "rule": {
        const value = this.subrule(node.index, this.#shared.get(syntax.rule) ?? (this as unknown as Record<string, ParserMethod<[], unknown>>)[`rule ${syntax.rule}`]!);
        this.ACTION(() => this.#remember(fields, syntax.label, value));
        return;
      }
    }
  }

  #group(node: Numbered, label: string, fields: Fields): void {
    const inner: Fields = new Map();
    const first = this.LA(1);
    this.#walk(node, inner);
    this.ACTION(() => this.#remember(fields, label, readerOf(inner, this.#spanFrom(first))));
  }
}

export interface ParsedWords {
  readonly fields: Fields;
  readonly failed: boolean;
}

/** A parser is a value that is passed along; building one costs tens of milliseconds, so a session keeps its own. */
export interface StatementParser {
  /** Parses the tokens after a verb. */
  parse(verb: string, tokens: IToken[], places: PlaceMap): ParsedWords;
}

export function createStatementParser(): StatementParser {
  const parser = new LanguageParser();
  return {
    parse(verb, tokens, places) {
      parser.places = places;
      parser.input = tokens;
      const fields = parser.entry.get(verb)!.call(parser) ?? new Map();
      return { fields, failed: parser.errors.length > 0 };
    },
  };
}
