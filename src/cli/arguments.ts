import { distance } from "fastest-levenshtein";

/** A command line that cannot be understood: one line for standard error, exit code 2. */
export class UsageError extends Error {}

export interface Arguments {
  readonly files: readonly string[];
  /** Value of an option that takes one, or null. */
  value(name: string): string | null;
  has(name: string): boolean;
}

/** The nearest of some names, when it is near enough to be a slip of the fingers. */
export function nearestName(name: string, known: readonly string[]): string | null {
  const best = known
    .map((other) => ({ other, far: distance(name.toLowerCase(), other.toLowerCase()) }))
    .sort((left, right) => left.far - right.far)[0];
  return best !== undefined && best.far <= Math.max(1, Math.floor(name.length / 3)) ? best.other : null;
}

/**
 * Reads the words after a command.
 * @param words the words
 * @param options what the command takes: option name -> whether a value follows
 * @throws UsageError for an unknown option, a missing value or an option given twice
 */
export function readArguments(
  words: readonly string[],
  options: Readonly<Record<string, "value" | "flag">>,
): Arguments {
  const files: string[] = [];
  const values = new Map<string, string | null>();
  for (let index = 0; index < words.length; index++) {
    const word = words[index]!;
    if (!word.startsWith("--") || word === "--") {
      files.push(word);
      continue;
    }
    const [name, given] = word.includes("=")
      ? [word.slice(0, word.indexOf("=")), word.slice(word.indexOf("=") + 1)]
      : [word, null];
    const kind = options[name];
    if (kind === undefined) {
      const near = nearestName(name, Object.keys(options));
      throw new UsageError(`there is no option "${name}".${near === null ? "" : ` Did you mean "${near}"?`}`);
    }
    if (values.has(name)) throw new UsageError(`"${name}" is given twice.`);
    if (kind === "flag") {
      values.set(name, null);
      continue;
    }
    const value = given ?? words[++index];
    if (value === undefined || value === "") throw new UsageError(`"${name}" needs a value after it.`);
    values.set(name, value);
  }
  return { files, value: (name) => values.get(name) ?? null, has: (name) => values.has(name) };
}

/** Runs a command's body, turning usage mistakes into one line and exit code 2. */
export async function withUsage(body: () => Promise<number>): Promise<number> {
  try {
    return await body();
  } catch (error) {
    if (!(error instanceof UsageError)) throw error;
    process.stderr.write(`meanwise: ${error.message}\nSee: meanwise --help\n`);
    return 2;
  }
}
