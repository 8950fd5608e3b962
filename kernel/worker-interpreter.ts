import { Worker } from "node:worker_threads";
import type { Completion, Failure, Interpreter, MimeBundle, Output, RunOptions } from "./interpreter.ts";

/** What crosses to the interpreter's thread. `call` pairs an answer with its question. */
export type Question =
  | { readonly call: number; readonly ask: "run"; readonly code: string; readonly options: RunOptions }
  | { readonly call: number; readonly ask: "complete"; readonly code: string; readonly offset: number }
  | {
      readonly call: number;
      readonly ask: "inspect";
      readonly code: string;
      readonly offset: number;
      readonly detail: number;
    }
  | { readonly call: number; readonly ask: "isComplete"; readonly code: string }
  | { readonly call: number; readonly ask: "shutdown" };

/** What comes back. */
export type Answer =
  | { readonly call: number; readonly output: Output }
  | { readonly call: number; readonly value: unknown }
  | { readonly call: number; readonly crash: string };

export interface WorkerData {
  /** One 32-bit word, 1 while an interrupt is asked for. */
  readonly flag: SharedArrayBuffer;
  readonly documentName: string | null;
}

type Ask = Question extends infer Q ? (Q extends { call: number } ? Omit<Q, "call"> : never) : never;

interface Waiting {
  readonly resolve: (value: unknown) => void;
  readonly reject: (error: Error) => void;
  readonly emit: (output: Output) => void;
}

/** The interpreter in a thread of its own, so that sockets stay responsive whatever a statement computes. */
export function workerInterpreter(file: URL, documentName: string | null, log: (line: string) => void): Interpreter {
  const flag = new SharedArrayBuffer(4);
  const word = new Int32Array(flag);
  const waiting = new Map<number, Waiting>();
  let calls = 0;
  let running = 0;
  let worker = start();

  function start(): Worker {
    const thread = new Worker(file, { workerData: { flag, documentName } satisfies WorkerData });
    thread.on("message", (answer: Answer) => {
      const entry = waiting.get(answer.call);
      if (entry === undefined) return;
      if ("output" in answer) {
        entry.emit(answer.output);
        return;
      }
      waiting.delete(answer.call);
      if ("crash" in answer) entry.reject(new Error(answer.crash));
      else entry.resolve(answer.value);
    });
    thread.on("error", (error) => {
      log(`kernel: interpreter thread: ${error.stack ?? error.message}`);
      for (const entry of waiting.values()) entry.reject(error);
      waiting.clear();
      worker = start();
    });
    return thread;
  }

  function ask<T>(question: Ask, emit: (output: Output) => void = () => {}): Promise<T> {
    const call = ++calls;
    return new Promise<T>((resolve, reject) => {
      waiting.set(call, { resolve: resolve as (value: unknown) => void, reject, emit });
      worker.postMessage({ ...question, call } as Question);
    });
  }

  return {
    async run(code, options, emit) {
      Atomics.store(word, 0, 0);
      running++;
      try {
        return await ask<Failure | null>({ ask: "run", code, options }, emit);
      } finally {
        running--;
      }
    },
    complete: (code, offset) => ask<Completion>({ ask: "complete", code, offset }),
    inspect: (code, offset, detail) => ask<MimeBundle | null>({ ask: "inspect", code, offset, detail }),
    isComplete: (code) => ask({ ask: "isComplete", code }),
    interrupt() {
      if (running === 0) return;
      Atomics.store(word, 0, 1);
      Atomics.notify(word, 0);
    },
    async shutdown() {
      // Half a second for open files; the front end expects the process to be gone within one.
      await Promise.race([
        ask({ ask: "shutdown" }).catch(() => {}),
        new Promise((resolve) => setTimeout(resolve, 500).unref()),
      ]);
      await worker.terminate();
    },
  };
}
