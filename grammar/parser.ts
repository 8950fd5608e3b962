import { EmbeddedActionsParser, EOF, type IToken, type ParserMethod, type TokenType } from "chevrotain";
import type { Name } from "./ast.ts";
import { mayBegin, mayBeginClause, tokenOf } from "./first.ts";
import { couldBegin, gatesDecide } from "./look-ahead.ts";
import { type Field, type Fields, type Read, readerOf } from "./reader.ts";
import { ruleNamed, rules } from "./rules.ts";
import { type PlaceMap, placeMap, type Span } from "./span.ts";
import { catalogue } from "./statements/index.ts";
import type { Syntax } from "./syntax.ts";
import { AnyName, Break, Comma, endOf, isName, marks, NumberToken, Quoted, vocabulary, wordTokens } from "./tokens.ts";

/** Which piece of syntax took a token, with the line of help of the part around it; for hover and highlighting. */
export interface Taken {
  readonly token: IToken;
  readonly syntax: Syntax;
  readonly help: string | null;
}

type Step = () => void;

/** Counts the occurrences of each kind of step in one rule, once, when the description is read. */
class Occurrences {
  readonly #counts = new Map<unknown, number>();
  next(key: unknown): number {
    const index = this.#counts.get(key) ?? 0;
    this.#counts.set(key, index + 1);
    return index;
  }
}

export const unquoted = (image: string): string => image.slice(1, -1).replaceAll('""', '"');

/** One Chevrotain rule for each statement, each shared rule and each set of clauses, all made from the descriptions. */
class LanguageParser extends EmbeddedActionsParser {
  places: PlaceMap = placeMap("");
  taken: Taken[] = [];
  #fields = new Map<string, Field[]>();
  readonly #rules = new Map<string, ParserMethod<[], Read>>();
  #clauseCount = 0;

  constructor() {
    super(vocabulary, { lookaheadStrategy: gatesDecide, recoveryEnabled: true, skipValidations: true });
    for (const [name, rule] of Object.entries(rules)) this.#define(`rule ${name}`, null, rule.syntax);
    for (const [verb, { syntax }] of catalogue) this.#define(`statement ${verb}`, wordTokens.get(verb)!, syntax);
    this.performSelfAnalysis();
  }

  /** The parts that stand in the tokens, or null where they are not a whole statement. */
  parseStatement(verb: string, tokens: IToken[], places: PlaceMap): Read | null {
    this.places = places;
    this.taken = [];
    this.#fields = new Map();
    this.input = tokens;
    const read = this.#rules.get(`statement ${verb}`)!.call(this) as Read | undefined;
    return this.errors.length === 0 && read !== undefined ? read : null;
  }

  #define(name: string, verb: TokenType | null, syntax: Syntax): void {
    const step = this.#compile(syntax, new Occurrences(), null);
    // The verb has an occurrence number that no other word of the statement can have.
    const whole =
      verb === null
        ? step
        : () => {
            this.consume(200, verb);
            step();
          };
    const placeholder = readerOf(new Map(), placeMap("").span(0, 0));
    this.#rules.set(
      name,
      this.RULE(name, () => this.#framed(whole), { recoveryValueFunc: () => placeholder }),
    );
  }

  /** Runs a step whose parts are remembered apart. */
  #framed(step: Step): Read {
    const outer = this.#fields;
    const inner = new Map<string, Field[]>();
    this.#fields = inner;
    const first = this.LA(1);
    try {
      step();
    } finally {
      this.#fields = outer;
    }
    return readerOf(inner as Fields, this.#spanFrom(first));
  }

  #spanFrom(first: IToken): Span {
    const last = this.LA(0) as IToken | undefined;
    const start = first.startOffset || 0;
    return this.places.span(start, last === undefined ? start : Math.max(start, endOf(last) || 0));
  }

  #span(token: IToken): Span {
    return this.places.span(token.startOffset, endOf(token));
  }

  #remember(label: string, field: Field): void {
    const before = this.#fields.get(label);
    if (before === undefined) this.#fields.set(label, [field]);
    else before.push(field);
  }

  #name(token: IToken): Name {
    const quoted = token.tokenType === Quoted;
    return { text: quoted ? unquoted(token.image) : token.image, span: this.#span(token), quoted };
  }

  /** @param rest what follows in the same sequence, which a decision to go on may look at */
  #compile(syntax: Syntax, count: Occurrences, help: string | null, rest: readonly Syntax[] = []): Step {
    const look = (offset: number): IToken => this.LA(offset);
    const gate = (...parts: readonly Syntax[]): (() => boolean) => {
      const ahead: Syntax = parts.length === 1 ? parts[0]! : { type: "sequence", parts };
      return () => couldBegin(ahead, look);
    };
    const take = (index: number, type: TokenType): IToken => {
      const token = this.consume(index, type);
      this.ACTION(() => this.taken.push({ token, syntax, help }));
      return token;
    };
    const inner = (part: Syntax): Step => this.#compile(part, count, help);
    switch (syntax.type) {
      case "phrase": {
        const pieces = syntax.pieces.map((piece) => ({ type: tokenOf(piece), index: count.next(tokenOf(piece)) }));
        const { label, text } = syntax;
        return () => {
          const first = this.LA(1);
          for (const { type, index } of pieces) take(index, type);
          if (label !== null) {
            this.ACTION(() => this.#remember(label, { kind: "word", value: text, span: this.#spanFrom(first) }));
          }
        };
      }
      case "name": {
        const { label } = syntax;
        const index = count.next(AnyName);
        const keep = (token: IToken) =>
          this.ACTION(() => this.#remember(label, { kind: "name", value: this.#name(token) }));
        if (!syntax.digits) return () => keep(take(index, AnyName));
        const or = count.next("or");
        const digits = count.next(NumberToken);
        const alternatives = [
          { GATE: () => isName(this.LA(1)), ALT: () => take(index, AnyName) },
          { ALT: () => take(digits, NumberToken) },
        ];
        return () => keep(this.or(or, alternatives) as IToken);
      }
      case "text": {
        const { label } = syntax;
        const index = count.next(Quoted);
        return () => {
          const token = take(index, Quoted);
          this.ACTION(() => this.#remember(label, { kind: "name", value: this.#name(token) }));
        };
      }
      case "number":
        return this.#number(syntax.label, syntax.plain, count, take);
      case "sequence": {
        const steps = syntax.parts.map((part, index) =>
          this.#compile(part, count, help, [...syntax.parts.slice(index + 1), ...rest]),
        );
        return () => {
          for (const step of steps) step();
        };
      }
      case "optional": {
        const index = count.next("option");
        const follows = gate(syntax.part, ...rest);
        // An optional name must not take the word that begins the reason at the end of `amend`.
        const more = { GATE: () => !this.#reasonNext() && follows(), DEF: inner(syntax.part) };
        return () => {
          this.option(index, more);
        };
      }
      case "repeat": {
        const index = count.next(syntax.atLeastOne ? "atLeastOne" : "many");
        const again: Syntax = { type: "repeat", part: syntax.part, atLeastOne: false };
        const more = { GATE: gate(syntax.part, again, ...rest), DEF: inner(syntax.part) };
        return syntax.atLeastOne ? () => this.atLeastOne(index, more) : () => this.many(index, more);
      }
      case "either": {
        const index = count.next("or");
        const alternatives = this.#alternatives(
          syntax.options,
          (option) => this.#compile(option, count, help, rest),
          rest,
        );
        return () => {
          this.or(index, { DEF: alternatives, IGNORE_AMBIGUITIES: true });
        };
      }
      case "part":
        return this.#compile(syntax.part, count, syntax.help, rest);
      case "group": {
        const step = inner(syntax.part);
        return () => this.#group(syntax.label, step);
      }
      case "list": {
        const first = inner(syntax.item);
        const comma = count.next(Comma);
        const next = inner(syntax.item);
        const index = count.next("many");
        const { label, item } = syntax;
        // A comma may also stand before a clause, or before the next item of an outer list.
        const more = {
          GATE: () => this.LA(1).tokenType === Comma && mayBegin(item, this.LA(2)),
          DEF: () => {
            take(comma, Comma);
            this.#group(label, next);
          },
        };
        return () => {
          this.#group(label, first);
          this.many(index, more);
        };
      }
      case "clauses":
        return this.#clauses(syntax.options, count, help);
      case "rule": {
        const index = count.next(`rule ${syntax.rule}`);
        const { label } = syntax;
        const { build } = ruleNamed(syntax.rule);
        return () => {
          const read = this.subrule(index, this.#rules.get(`rule ${syntax.rule}`)!);
          this.ACTION(() => this.#remember(label, { kind: "rule", build, read }));
        };
      }
      case "statement": {
        const index = count.next(`statement ${syntax.verb}`);
        const { label, verb } = syntax;
        return () => {
          const read = this.subrule(index, this.#rules.get(`statement ${verb}`)!);
          this.ACTION(() => this.#remember(label, { kind: "rule", build: catalogue.get(verb)!.build, read }));
        };
      }
      case "break": {
        const index = count.next("option");
        const line = count.next(Break);
        return () => {
          this.option(index, { GATE: () => this.LA(1).tokenType === Break, DEF: () => this.consume(line, Break) });
        };
      }
    }
  }

  #reasonNext(): boolean {
    return (
      this.LA(1).tokenType === wordTokens.get("because") &&
      this.LA(2).tokenType === Quoted &&
      this.LA(3).tokenType === EOF
    );
  }

  /** The first alternative that fits is taken; when none does, the last one, which then says what is missing. */
  #alternatives(options: readonly Syntax[], compile: (option: Syntax) => Step, rest: readonly Syntax[]) {
    const look = (offset: number): IToken => this.LA(offset);
    return options.map((option, index) => {
      const ahead: Syntax = { type: "sequence", parts: [option, ...rest] };
      const ALT = compile(option);
      return index === options.length - 1 ? { ALT } : { GATE: () => couldBegin(ahead, look), ALT };
    });
  }

  #group(label: string, step: Step): void {
    const read = this.#framed(step);
    this.ACTION(() => this.#remember(label, { kind: "group", value: read }));
  }

  /** Each set of clauses is a rule of its own, so that after a mistake parsing goes on at the next clause. */
  #clauses(options: readonly Syntax[], count: Occurrences, help: string | null): Step {
    const own = new Occurrences();
    const alternatives = this.#alternatives(options, (option) => this.#compile(option, own, help), []);
    const clause = this.RULE(`clause ${this.#clauseCount++}`, () => {
      this.or(0, { DEF: alternatives, IGNORE_AMBIGUITIES: true });
    });
    const index = count.next("many");
    const or = count.next("or");
    const line = count.next(Break);
    const comma = count.next(Comma);
    const separators = [
      { GATE: () => this.LA(1).tokenType === Break, ALT: () => this.consume(line, Break) },
      { ALT: () => this.consume(comma, Comma) },
    ];
    const more = {
      GATE: () => {
        const { tokenType } = this.LA(1);
        return (tokenType === Break || tokenType === Comma) && mayBeginClause(options, this.LA(2));
      },
      DEF: () => {
        this.or(or, separators);
        this.subrule(200, clause);
      },
    };
    return () => this.many(index, more);
  }

  #number(label: string, plain: boolean, count: Occurrences, take: (index: number, type: TokenType) => IToken): Step {
    const first = count.next(NumberToken);
    const minusMark = marks.get("-")!;
    const slashMark = marks.get("/")!;
    const [signed, minus] = plain ? [0, 0] : [count.next("option"), count.next(minusMark)];
    const [divided, slash, second] = plain
      ? [0, 0, 0]
      : [count.next("option"), count.next(slashMark), count.next(NumberToken)];
    const amountOf = (token: IToken): number =>
      token.image.endsWith("%") ? Number(token.image.slice(0, -1)) / 100 : Number(token.image);
    return () => {
      const start = this.LA(1);
      let negative = false;
      let lower: IToken | null = null;
      if (!plain) {
        this.option(signed, {
          GATE: () => this.LA(1).tokenType === minusMark,
          DEF: () => {
            take(minus, minusMark);
            negative = true;
          },
        });
      }
      const upper = take(first, NumberToken);
      if (!plain) {
        this.option(divided, {
          GATE: () => this.LA(1).tokenType === slashMark,
          DEF: () => {
            take(slash, slashMark);
            lower = take(second, NumberToken);
          },
        });
      }
      this.ACTION(() => {
        const below = lower as IToken | null;
        const size = below === null ? amountOf(upper) : amountOf(upper) / amountOf(below);
        const text = `${negative ? "-" : ""}${upper.image}${below === null ? "" : `/${below.image}`}`;
        this.#remember(label, {
          kind: "number",
          value: { value: negative ? 0 - size : size, text, span: this.#spanFrom(start) },
        });
      });
    };
  }
}

export interface ParsedStatement {
  /** The remembered parts, or null where the tokens are not a whole statement. */
  readonly read: Read | null;
  readonly taken: readonly Taken[];
  /** Offsets at which the parser found something wrong, in order; it recovers at the next clause. */
  readonly wrong: readonly IToken[];
}

let built: LanguageParser | null = null;

/**
 * Parses the tokens of one statement, its verb first. The parser is a machine without memory of what it parsed; it is made once,
 * when it is first needed, since making it costs tens of milliseconds.
 */
export function parseTokens(verb: string, tokens: readonly IToken[], places: PlaceMap): ParsedStatement {
  built ??= new LanguageParser();
  const read = built.parseStatement(verb, [...tokens], places);
  return { read, taken: built.taken, wrong: built.errors.map((error) => error.token) };
}
