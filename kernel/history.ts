/** Inputs of this session, as the history request asks for them. */
export interface HistoryEntry {
  readonly session: number;
  readonly line: number;
  readonly input: string;
  readonly output: string | null;
}

export interface HistoryRequest {
  readonly type: string;
  readonly output: boolean;
  readonly session: number;
  readonly start: number;
  readonly stop: number | null;
  readonly n: number | null;
  readonly pattern: string;
  readonly unique: boolean;
}

/** Whether a text matches a shell-like pattern: `*` any run, `?` any one character, `[...]` one of a set. */
export function matchesGlob(text: string, pattern: string): boolean {
  let source = "";
  for (let index = 0; index < pattern.length; index++) {
    const character = pattern[index]!;
    const close = character === "[" ? pattern.indexOf("]", index + 2) : -1;
    if (character === "*") source += "[^]*";
    else if (character === "?") source += "[^]";
    else if (close > 0) {
      const body = pattern
        .slice(index + 1, close)
        .replace(/\\/g, "\\\\")
        .replace(/\]/g, "\\]");
      source += `[${body.startsWith("!") ? `^${body.slice(1)}` : body.replace(/^\^/, "\\^")}]`;
      index = close;
    } else source += character.replace(/[\\^$.*+?()[\]{}|/-]/g, "\\$&");
  }
  try {
    return new RegExp(`^${source}$`, "u").test(text);
  } catch {
    return text === pattern;
  }
}

type Answer = [number, number, string | [string, string | null]];

/** Answers a history request from the entries, oldest first, as (session, line, input or [input, output]). */
export function searchHistory(entries: readonly HistoryEntry[], request: HistoryRequest): Answer[] {
  let found: readonly HistoryEntry[];
  switch (request.type) {
    case "range": {
      const current = entries.at(-1)?.session ?? 1;
      const wanted = request.session > 0 ? request.session : current + request.session;
      found = entries.filter(
        (entry) =>
          entry.session === wanted &&
          entry.line >= request.start &&
          (request.stop === null || entry.line < request.stop),
      );
      break;
    }
    case "search": {
      found = entries.filter((entry) => matchesGlob(entry.input, request.pattern));
      if (request.unique) {
        const last = new Map(found.map((entry) => [entry.input, entry]));
        found = found.filter((entry) => last.get(entry.input) === entry);
      }
      if (request.n !== null) found = found.slice(-request.n || found.length);
      break;
    }
    case "tail":
      found = request.n === null ? entries : request.n > 0 ? entries.slice(-request.n) : [];
      break;
    default:
      found = [];
  }
  return found.map((entry) => [entry.session, entry.line, request.output ? [entry.input, entry.output] : entry.input]);
}
