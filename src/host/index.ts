/**
 * The small border between the portable core and whatever runs it (command line, kernel worker, browser, test).
 * Types only, apart from the errors that cross it. Nothing here imports a Node module.
 */

/** Long loops call `checkpoint` at least every 20 ms; it throws `Interrupted` when the person asked to stop. */
export interface Watch {
  checkpoint(): void;
  /**
   * Tells how far a long computation has come.
   * @param done units finished, 0 <= done <= total
   * @param total units in all, > 0
   * @param label what is being done, in words a researcher understands
   */
  progress(done: number, total: number, label: string): void;
}

/** A watch that never interrupts and tells nobody; for tests and short work. */
export const silentWatch: Watch = { checkpoint() {}, progress() {} };

/** Thrown by `Watch.checkpoint`; the session drops the statement and keeps the study as it was before it. */
export class Interrupted extends Error {
  constructor() {
    super("Interrupted by the user.");
    this.name = "Interrupted";
  }
}

/** One job for the pool of compute workers: plain data in, plain data out, the same answer wherever it runs. */
export interface Job {
  /** Which exported task of `src/planning/tasks.ts` runs it. */
  readonly task: string;
  readonly input: unknown;
}

export interface Host {
  /** Reads a whole file. Throws `HostError` with code "missing-file" or "unreadable-file". Paths are relative to the notebook. */
  readBytes(path: string): Promise<Uint8Array>;
  /** Writes a whole file, replacing it in one step (write beside, flush, rename), so that a crash leaves the old or the new one. */
  writeBytes(path: string, bytes: Uint8Array): Promise<void>;
  /**
   * Appends to a file and flushes it to the disk before it resolves.
   * @param at length in bytes up to which the file is known; a torn line beyond it (without its end) is cut off. A whole line beyond
   *   it, or a shorter file, throws `HostError` "file-grew" and writes nothing: somebody else wrote meanwhile.
   */
  appendLine(path: string, line: string, at?: number): Promise<void>;
  exists(path: string): Promise<boolean>;
  /** Names beside the notebook, for completion and for "did you mean". */
  listFiles(folder: string): Promise<readonly string[]>;
  /** Milliseconds since 1970-01-01 UTC. */
  now(): number;
  /** A fresh 32-bit seed, used only where the user set none; always recorded. */
  randomSeed(): number;
  /** Runs jobs on all cores, in any order, answers in the order of the jobs. */
  runJobs(jobs: readonly Job[], watch: Watch): Promise<readonly unknown[]>;
  /** Turns an SVG picture into PNG bytes, where the host can (a browser host may answer null). */
  svgToPng(svg: string, widthPixels: number): Promise<Uint8Array | null>;
  /** Databases, where the host has them (src/data/node); absent in a browser. The answer is a table of the data room. */
  readonly bulk?: {
    readDatabase(
      source: { readonly connection: string; readonly table: string; readonly most: number },
      watch: Watch,
    ): Promise<unknown>;
  };
  readonly watch: Watch;
  /** Name of the notebook or script being run, without folder; null when unknown. */
  readonly documentName: string | null;
  /** Versions that the record keeps, for instance { node: "20.20.2", platform: "linux-x64" }. */
  readonly environment: Readonly<Record<string, string>>;
}

export type HostErrorCode =
  | "missing-file"
  | "unreadable-file"
  | "unwritable-file"
  | "disk-full"
  | "no-engine"
  | "lost-connection"
  | "file-grew";

export class HostError extends Error {
  readonly code: HostErrorCode;
  readonly path: string;
  constructor(code: HostErrorCode, path: string, message: string) {
    super(message);
    this.name = "HostError";
    this.code = code;
    this.path = path;
  }
}
