import { availableParallelism } from "node:os";
import { fileURLToPath } from "node:url";
import { Worker } from "node:worker_threads";
import type { Job, Watch } from "../host/index.ts";

interface Waiting {
  readonly job: Job;
  readonly resolve: (value: unknown) => void;
  readonly reject: (error: unknown) => void;
}

type Answer =
  | { readonly value: unknown }
  | { readonly error: { readonly name: string; readonly message: string; readonly facts: unknown } };

export interface ComputePool {
  /** Runs jobs on the workers and answers in the order of the jobs, whatever the number of workers. */
  run(jobs: readonly Job[], watch: Watch): Promise<readonly unknown[]>;
  close(): Promise<void>;
}

/** The built worker; tests that run from sources use the build too, so that it is the shipped file that is tested. */
function workerFile(): string {
  const here = new URL("./compute-worker.js", import.meta.url);
  if (import.meta.url.endsWith(".js")) return fileURLToPath(here);
  return fileURLToPath(new URL("../../dist/src/cli/compute-worker.js", import.meta.url));
}

function startPool(size: number): ComputePool {
  const idle: Worker[] = [];
  const all = new Set<Worker>();
  const queue: Waiting[] = [];
  const current = new Map<Worker, Waiting>();

  function give(worker: Worker): void {
    const next = queue.shift();
    if (next === undefined) {
      worker.unref();
      idle.push(worker);
      return;
    }
    worker.ref();
    current.set(worker, next);
    worker.postMessage(next.job);
  }

  function add(): void {
    const worker = new Worker(workerFile());
    all.add(worker);
    worker.on("message", (answer: Answer) => {
      const waiting = current.get(worker);
      current.delete(worker);
      if (waiting !== undefined) {
        if ("value" in answer) waiting.resolve(answer.value);
        else
          waiting.reject(
            Object.assign(new Error(answer.error.message), { name: answer.error.name }, answer.error.facts),
          );
      }
      give(worker);
    });
    worker.on("error", (error) => {
      current.get(worker)?.reject(error);
      current.delete(worker);
      all.delete(worker);
    });
    give(worker);
  }

  async function drop(): Promise<void> {
    queue.length = 0;
    const workers = [...all];
    all.clear();
    idle.length = 0;
    current.clear();
    await Promise.all(workers.map((worker) => worker.terminate()));
  }

  return {
    async run(jobs, watch) {
      const answers = jobs.map(
        (job) => new Promise<unknown>((resolve, reject) => queue.push({ job, resolve, reject })),
      );
      while (all.size < Math.min(size, jobs.length)) add();
      while (idle.length > 0 && queue.length > 0) give(idle.pop()!);
      // An interrupt must not wait for a job to end: it is looked for often, and stops the workers themselves.
      const everything = Promise.all(answers);
      let done = 0;
      for (const answer of answers) {
        answer.then(
          () => watch.progress(++done, jobs.length, "computing"),
          () => {},
        );
      }
      everything.catch(() => {});
      for (;;) {
        const finished = await Promise.race([
          everything.then(() => true),
          new Promise<false>((resolve) => setTimeout(resolve, 20, false)),
        ]);
        if (finished) return everything;
        try {
          watch.checkpoint();
        } catch (error) {
          // Not waited for: whoever interrupts sees the end of the statement, not of the workers.
          drop().catch(() => {});
          throw error;
        }
      }
    },
    close: drop,
  };
}

/** Pools by size, kept for the life of the process: starting a worker costs more than most jobs. */
const pools = new Map<number, ComputePool>();

/** @param size number of workers; the number of cores when left out */
export function computePool(size: number = availableParallelism()): ComputePool {
  let pool = pools.get(size);
  if (pool === undefined) {
    pool = startPool(size);
    pools.set(size, pool);
  }
  return pool;
}
