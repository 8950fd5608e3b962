import type { Json } from "./wire.ts";

/** A picture, table or text in every form the kernel can give it. */
export interface MimeBundle {
  readonly data: Json;
  readonly metadata?: Json;
}

/** What a running cell says while it runs; each goes to the request that caused it. */
export type Output =
  | ({ readonly type: "display" } & MimeBundle)
  | ({ readonly type: "result" } & MimeBundle)
  | ({ readonly type: "update"; readonly displayId: string } & MimeBundle)
  | ({ readonly type: "progress"; readonly displayId: string } & MimeBundle)
  | { readonly type: "stream"; readonly name: "stdout" | "stderr"; readonly text: string };

export interface Failure {
  readonly ename: string;
  readonly evalue: string;
  readonly traceback: readonly string[];
}

export interface RunOptions {
  /** Number of the cell, which the record keeps. */
  readonly cell: number;
  readonly silent: boolean;
  /** False when the study must stay as it was (user expressions). */
  readonly keep: boolean;
}

export interface Completion {
  readonly matches: readonly { readonly text: string; readonly type: string; readonly signature: string }[];
  /** UTF-16 offsets. */
  readonly start: number;
  readonly end: number;
}

/** The language behind the messages: all the kernel knows of it. Offsets are UTF-16; the kernel converts. */
export interface Interpreter {
  run(code: string, options: RunOptions, emit: (output: Output) => void): Promise<Failure | null>;
  complete(code: string, offset: number): Promise<Completion>;
  inspect(code: string, offset: number, detail: number): Promise<MimeBundle | null>;
  isComplete(
    code: string,
  ): Promise<{ readonly status: "complete" | "incomplete" | "invalid" | "unknown"; readonly indent: string }>;
  /** Stops the running cell; the study before its statement stays. Safe to call at any time. */
  interrupt(): void;
  shutdown(): Promise<void>;
}
