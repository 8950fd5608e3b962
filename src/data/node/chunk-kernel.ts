import { exactDecimal } from "../decimal.ts";
import { exactPowers, parsed, parseSmall, plainNumber } from "../numbers.ts";
import { DataProblem } from "../problem.ts";
import { strayHint } from "../columns.ts";
import { addTotals, type CellTotals, ExactSums } from "./exact-sums.ts";
import { LabelTable, type PackedLabels } from "./label-table.ts";
import { lowestKept, type Sample, SampleKeeper } from "./row-sample.ts";
import { type SubjectParts, SubjectSums } from "./subject-sums.ts";

/** What every worker must know before it reads its parts of the file. */
export interface KernelPlan {
  readonly separator: number;
  /** Byte of the decimal sign. */
  readonly point: number;
  readonly header: readonly string[];
  readonly response: string;
  readonly factors: readonly { readonly name: string; readonly levels: readonly string[] }[];
  readonly subject: string | null;
  readonly missing: readonly string[];
  /** Whole number taken off every value. */
  readonly center: number;
  /** Decimal places to begin with, and the most that are kept; digits beyond those are rounded. */
  readonly places: number;
  readonly mostPlaces: number;
  readonly sample: { readonly size: number; readonly seed: number };
}

/** What a part of the file came to. Sums are integers of 10^-places. */
export interface ChunkAnswer {
  readonly lines: number;
  readonly rows: number;
  readonly entered: number;
  readonly parts: readonly { readonly places: number; readonly totals: CellTotals }[];
  readonly rounded: boolean;
  /** Rows left out by each exclusion. */
  readonly excluded: readonly number[];
  readonly missingResponse: number;
  readonly missingColumn: readonly number[];
  /** Lines count from the part's own first. */
  readonly undeclared: readonly {
    readonly factor: number;
    readonly level: string;
    readonly rows: number;
    readonly firstLine: number;
  }[];
  readonly sample: Sample;
  /** Where in the file the first record began and the last one ended. */
  readonly begin: number;
  readonly end: number;
  readonly problem: { readonly code: string; readonly facts: Readonly<Record<string, string | number | null>> } | null;
}

export interface SubjectAnswer extends SubjectParts {
  readonly labels: PackedLabels;
  readonly places: number;
}

const nothing = { digits: 0n, places: 0 };
const newline = 10;
const carriageReturn = 13;
const blank = 32;
const quote = 34;
const skip = -1;

/** A level as its place among those declared: by text first, by value second; -1 undeclared, -2 missing. */
export function levelPlace(text: string, levels: readonly string[], missing: ReadonlySet<string>): number {
  if (text === "" || missing.has(text)) return -2;
  const exact = levels.indexOf(text);
  if (exact >= 0) return exact;
  const value = Number(text);
  if (Number.isNaN(value)) return -1;
  return levels.findIndex((level) => level.trim() !== "" && Number(level) === value);
}

/** Reads parts of a delimited file into sums by cell. One for each worker; parts may come in any order. */
export class ChunkKernel {
  readonly #plan: KernelPlan;
  readonly #roles: Int8Array;
  readonly #missing: ReadonlySet<string>;
  readonly #numericMissing: boolean;
  readonly #cells: number;
  /** Per factor: texts seen and the level of each. */
  readonly #tables: LabelTable[];
  readonly #levels: Int32Array[];
  readonly #subjects = new LabelTable();
  readonly #subjectSums: SubjectSums | null;
  #subjectPlaces: number;
  #places: number;
  #scale: number;
  #sums: ExactSums;
  #parts: { places: number; totals: CellTotals }[] = [];
  #rounded = false;
  readonly #scratch = { units: new Float64Array(1), places: new Int8Array(1) };
  /** Integer of the value just read; `#big` when it is larger than a double keeps. */
  #units = 0;
  #big: bigint | null = null;

  constructor(plan: KernelPlan) {
    this.#plan = plan;
    this.#roles = Int8Array.from(plan.header, (name) => {
      if (name === plan.response) return 0;
      const factor = plan.factors.findIndex((entry) => entry.name === name);
      if (factor >= 0) return factor + 1;
      return name === plan.subject ? plan.factors.length + 1 : skip;
    });
    this.#missing = new Set(plan.missing);
    this.#numericMissing = plan.missing.some((text) => !Number.isNaN(Number(text)));
    this.#cells = plan.factors.reduce((product, factor) => product * factor.levels.length, 1);
    this.#tables = plan.factors.map(() => new LabelTable());
    this.#levels = plan.factors.map(() => new Int32Array(64));
    this.#subjectSums = plan.subject === null ? null : new SubjectSums(this.#cells);
    this.#places = plan.places;
    this.#subjectPlaces = plan.places;
    this.#scale = exactPowers[plan.places]!;
    this.#sums = new ExactSums(this.#cells);
  }

  /** Sums by subject over all parts that this kernel has read. */
  subjects(): SubjectAnswer | null {
    if (this.#subjectSums === null) return null;
    const parts = this.#subjectSums.parts(this.#subjects.count);
    return { labels: this.#subjects.packed(), ...parts, places: this.#subjectPlaces };
  }

  /**
   * Reads the records that begin in `from <= position < to`.
   * @param bytes a line end must stand at `limit`, which is where the data end
   * @param offset of `bytes[0]` in the file; it makes the random drawing of rows the same for any cut into parts
   */
  read(bytes: Uint8Array, from: number, to: number, limit: number, offset: number): ChunkAnswer {
    this.#sums = new ExactSums(this.#cells);
    this.#parts = [];
    this.#rounded = false;
    const { separator, factors, center, sample } = this.#plan;
    const roles = this.#roles;
    const columns = roles.length;
    const tables = this.#tables;
    const factorCount = factors.length;
    const sizes = factors.map((factor) => factor.levels.length);
    const keeper = new SampleKeeper(sample.size, sample.seed);
    const missingColumn = new Array<number>(factorCount + 1).fill(0);
    const undeclared = new Map<number, { rows: number; firstLine: number }>();
    const found = new Int32Array(factorCount + 1);
    let shift = center * this.#scale;
    let scaleOfShift = this.#scale;
    let lines = 0;
    let rows = 0;
    let entered = 0;
    let missingResponse = 0;
    let position = from;
    let problem: ChunkAnswer["problem"] = null;
    try {
      while (position < to) {
        const first = bytes[position]!;
        if (first === newline || first === carriageReturn || first === blank) {
          let next = position;
          while (bytes[next] === blank || bytes[next] === carriageReturn) next++;
          if (bytes[next] === newline) {
            lines++;
            position = next + 1;
            continue;
          }
        }
        const begin = position;
        const line = lines;
        let hasResponse = false;
        let column = 0;
        for (; ; column++) {
          const role = column < columns ? roles[column]! : skip;
          let code = bytes[position]!;
          let start = position;
          let end = -1;
          if (code !== quote && code !== blank) {
            if (role === skip) {
              while (code !== separator && code !== newline) code = bytes[++position]!;
              end = start;
            } else if (role === 0) {
              position = this.#plainResponse(bytes, position);
              code = bytes[position]!;
              if (position > start && (code === separator || code === newline)) {
                hasResponse = true;
                end = start;
              } else position = start;
            } else {
              let hash = 0x811c9dc5 | 0;
              while (code !== separator && code > carriageReturn) {
                hash = Math.imul(hash ^ code, 0x01000193);
                code = bytes[++position]!;
              }
              if (code === carriageReturn && bytes[position + 1] === newline) code = newline;
              const last = bytes[position - 1]!;
              if ((code === separator || code === newline) && last !== blank && last !== 0xa0) {
                end = position;
                if (bytes[position] === carriageReturn) position++;
                if (role <= factorCount) {
                  found[role - 1] =
                    end === start ? -2 : this.#levelOf(role - 1, tables[role - 1]!.find(bytes, start, end, hash));
                } else found[factorCount] = end === start ? -2 : this.#subjectOf(bytes, start, end, hash);
              } else position = start;
            }
          }
          if (end < 0) {
            // Quotes, blanks at the ends, bad values: the long way, with the value cut out first.
            const cut = cutValue(bytes, position, separator, limit, lines);
            ({ start, end } = cut);
            position = cut.next;
            lines += cut.lines;
            if (role === 0) hasResponse = this.#longResponse(cut.bytes, start, end, line);
            else if (role > 0) {
              const hash = LabelTable.hash(cut.bytes, start, end);
              if (role <= factorCount)
                found[role - 1] =
                  end === start ? -2 : this.#levelOf(role - 1, tables[role - 1]!.find(cut.bytes, start, end, hash));
              else found[factorCount] = end === start ? -2 : this.#subjectOf(cut.bytes, start, end, hash);
            }
          }
          if (position >= limit || bytes[position] === newline) break;
          position++;
        }
        if (column + 1 !== columns)
          throw new DataProblem("ragged-row", { row: line, found: column + 1, expected: columns });
        lines++;
        position++;
        rows++;
        let cell = 0;
        let complete = true;
        for (let factor = 0; factor < factorCount; factor++) {
          const level = found[factor]!;
          if (level >= 0) cell = cell * sizes[factor]! + level;
          else {
            complete = false;
            if (level !== -2) {
              const key = (-level - 3) * factorCount + factor;
              const had = undeclared.get(key);
              if (had === undefined) undeclared.set(key, { rows: 1, firstLine: line });
              else had.rows++;
            } else if (hasResponse) missingColumn[factor]!++;
          }
        }
        if (!hasResponse) {
          missingResponse++;
          continue;
        }
        if (this.#subjectSums !== null && found[factorCount] === -2) {
          complete = false;
          missingColumn[factorCount]!++;
        }
        if (!complete) continue;
        entered++;
        if (scaleOfShift !== this.#scale) {
          scaleOfShift = this.#scale;
          shift = center * scaleOfShift;
        }
        const value = this.#units - shift;
        const plain = this.#big === null && shift < 9007199254740992 && shift > -9007199254740992;
        if (plain && value < 4503599627370496 && value > -4503599627370496) {
          this.#sums.add(cell, value);
          if (this.#subjectSums !== null) this.#subjectSums.add(found[factorCount]!, cell, value, offset + begin);
          keeper.offer(offset + begin, cell, value / scaleOfShift);
        } else {
          const exact = (this.#big ?? BigInt(this.#units)) - BigInt(center) * 10n ** BigInt(this.#places);
          this.#sums.addBig(cell, exact);
          if (this.#subjectSums !== null)
            this.#subjectSums.add(found[factorCount]!, cell, Number(exact), offset + begin);
          keeper.offer(offset + begin, cell, Number(exact) / scaleOfShift);
        }
      }
    } catch (error) {
      if (!(error instanceof DataProblem)) throw error;
      problem = { code: error.code, facts: error.facts };
    }
    return {
      lines,
      rows,
      entered,
      parts: [...this.#parts, { places: this.#places, totals: this.#sums.totals() }],
      rounded: this.#rounded,
      excluded: [],
      missingResponse,
      missingColumn,
      undeclared: [...undeclared].map(([key, entry]) => {
        const factor = key % factorCount;
        return { factor, level: tables[factor]!.text((key - factor) / factorCount), ...entry };
      }),
      sample: lowestKept(keeper),
      begin: offset + from,
      end: offset + position,
      problem,
    };
  }

  /** Level of a text that was seen before, or now; an undeclared one is -3 - its label, so that it can be named. */
  #levelOf(factor: number, label: number): number {
    let levels = this.#levels[factor]!;
    // Places are kept one up, so that 0 says "not looked up yet".
    if (label >= levels.length) {
      levels = new Int32Array(Math.max(label + 1, levels.length * 2));
      levels.set(this.#levels[factor]!);
      this.#levels[factor] = levels;
    }
    let place = levels[label]!;
    if (place === 0) {
      const level = levelPlace(this.#tables[factor]!.text(label), this.#plan.factors[factor]!.levels, this.#missing);
      place = level >= 0 ? level + 1 : level === -2 ? -2 : -3 - label;
      levels[label] = place;
    }
    return place > 0 ? place - 1 : place;
  }

  #subjectOf(bytes: Uint8Array, start: number, end: number, hash: number): number {
    if (this.#missing.size > 0 && end - start < 12 && this.#missing.has(textAt(bytes, start, end))) return -2;
    return this.#subjects.find(bytes, start, end, hash);
  }

  /**
   * A plain decimal, digits and point only, as an integer of the places in force.
   * @returns the position behind it; the position itself where something else stands there
   */
  #plainResponse(bytes: Uint8Array, start: number): number {
    if (this.#numericMissing) return start;
    const { point } = this.#plan;
    let position = start;
    let code = bytes[position]!;
    const negative = code === 45;
    if (negative) code = bytes[++position]!;
    let units = 0;
    let digit = code - 48;
    if (digit < 0 || digit > 9) return start;
    while (digit >= 0 && digit <= 9) {
      units = units * 10 + digit;
      digit = bytes[++position]! - 48;
    }
    let places = 0;
    if (digit + 48 === point) {
      const behind = position + 1;
      digit = bytes[++position]! - 48;
      const most = behind + this.#places;
      while (digit >= 0 && digit <= 9) {
        if (position >= most) return start;
        units = units * 10 + digit;
        digit = bytes[++position]! - 48;
      }
      places = position - behind;
    }
    units *= exactPowers[this.#places - places]!;
    if (units > 9007199254740992) return start;
    this.#units = negative ? -units : units;
    this.#big = null;
    return bytes[position] === carriageReturn && bytes[position + 1] === newline ? position + 1 : position;
  }

  /** @returns false where the value is missing */
  #longResponse(bytes: Uint8Array, start: number, end: number, line: number): boolean {
    if (start >= end) return false;
    if (this.#missing.size > 0 && this.#missing.has(textAt(bytes, start, end))) return false;
    const kind = parseSmall(bytes, start, end, this.#plan.point, this.#scratch, 0);
    if (kind === parsed.small && this.#take(this.#scratch.units[0]!, this.#scratch.places[0]!)) return true;
    const text = textAt(bytes, start, end);
    if (kind === parsed.notNumber) {
      throw new DataProblem("stray-text", {
        row: line,
        column: this.#plan.response,
        value: text,
        hint: strayHint(text, this.#plan.response),
      });
    }
    const plain = plainNumber(text, this.#plan.point === 44 ? "," : ".");
    const nearest = Number(plain);
    if (!Number.isFinite(nearest))
      throw new DataProblem("number-too-large", { row: line, column: this.#plan.response, value: text });
    // More than 38 digits: as the double nearest to it, and a trace of nothing as nothing.
    const decimal = exactDecimal(plain) ?? exactDecimal(String(nearest)) ?? (Math.abs(nearest) < 1 ? nothing : null);
    if (decimal === null || decimal === nothing) this.#rounded = true;
    if (decimal === null) {
      this.#big = BigInt(nearest) * 10n ** BigInt(this.#places);
      return true;
    }
    this.#needPlaces(decimal.places);
    const beyond = decimal.places - this.#places;
    if (beyond <= 0) this.#big = decimal.digits * 10n ** BigInt(-beyond);
    else {
      const unit = 10n ** BigInt(beyond);
      const rounded = (decimal.digits * 2n + (decimal.digits < 0n ? -unit : unit)) / (2n * unit);
      if (rounded * unit !== decimal.digits) this.#rounded = true;
      this.#big = rounded;
    }
    if (this.#big < 9007199254740992n && this.#big > -9007199254740992n) {
      this.#units = Number(this.#big);
      this.#big = null;
    }
    return true;
  }

  /** Takes a decimal of few digits at the places in force; false where it needs the exact way. */
  #take(units: number, places: number): boolean {
    this.#needPlaces(places);
    if (places > this.#places) return false;
    const scaled = units * exactPowers[this.#places - places]!;
    if (Math.abs(scaled) > 9007199254740992) return false;
    this.#units = scaled;
    this.#big = null;
    return true;
  }

  /** More places than before: what was summed is put aside as it is, and the sums begin anew. */
  #needPlaces(places: number): void {
    const next = Math.min(places, this.#plan.mostPlaces);
    if (next <= this.#places) return;
    this.#parts.push({ places: this.#places, totals: this.#sums.totals() });
    this.#sums = new ExactSums(this.#cells);
    this.#subjectSums?.rescale(exactPowers[next - this.#places]!);
    this.#places = next;
    this.#subjectPlaces = next;
    this.#scale = exactPowers[next]!;
  }
}

const decoder = new TextDecoder("utf-8");
const textAt = (bytes: Uint8Array, start: number, end: number) => decoder.decode(bytes.subarray(start, end));

interface Cut {
  readonly bytes: Uint8Array;
  readonly start: number;
  readonly end: number;
  readonly next: number;
  readonly lines: number;
}

/** Cuts out the value that begins at a position, without quotes and blank ends. */
function cutValue(bytes: Uint8Array, position: number, separator: number, limit: number, line: number): Cut {
  let start = position;
  while (bytes[start] === blank && separator !== blank) start++;
  if (bytes[start] !== quote) {
    start = position;
    let next = position;
    while (bytes[next] !== separator && bytes[next] !== newline) next++;
    return { bytes, ...trimmed(bytes, start, next), next, lines: 0 };
  }
  let lines = 0;
  let doubled = false;
  let next = start + 1;
  for (; ; next++) {
    if (next >= limit) throw new DataProblem("open-quote", { row: line });
    if (bytes[next] === newline) lines++;
    if (bytes[next] !== quote) continue;
    if (bytes[next + 1] === quote) {
      doubled = true;
      next++;
    } else break;
  }
  const inside = doubled
    ? new TextEncoder().encode(textAt(bytes, start + 1, next).replaceAll('""', '"'))
    : bytes.subarray(start + 1, next);
  next++;
  while (bytes[next] === blank || bytes[next] === carriageReturn) next++;
  if (bytes[next] !== separator && bytes[next] !== newline)
    throw new DataProblem("text-after-quote", { row: line + lines });
  return { bytes: inside, ...trimmed(inside, 0, inside.length), next, lines };
}

function trimmed(bytes: Uint8Array, from: number, to: number): { readonly start: number; readonly end: number } {
  let start = from;
  let end = to;
  while (start < end) {
    const code = bytes[start]!;
    if (code === blank || code === 9 || code === carriageReturn) start++;
    else if (code === 0xc2 && bytes[start + 1] === 0xa0) start += 2;
    else break;
  }
  while (end > start) {
    const code = bytes[end - 1]!;
    if (code === blank || code === 9 || code === carriageReturn) end--;
    else if (code === 0xa0 && end - start >= 2 && bytes[end - 2] === 0xc2) end -= 2;
    else break;
  }
  return { start, end };
}

/** All parts on one scale. */
export function totalsAt(parts: ChunkAnswer["parts"], places: number): CellTotals {
  return parts
    .map((part) => {
      const scale = 10n ** BigInt(places - part.places);
      return {
        n: part.totals.n,
        sum: part.totals.sum.map((value) => value * scale),
        square: part.totals.square.map((value) => value * scale * scale),
      };
    })
    .reduce<CellTotals | null>((sum, part) => (sum === null ? part : addTotals(sum, part)), null)!;
}
