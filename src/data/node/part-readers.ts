import { existsSync } from "node:fs";
import { availableParallelism } from "node:os";
import { fileURLToPath } from "node:url";
import { Worker } from "node:worker_threads";
import { HostError, type Watch } from "../../host/index.ts";
import type { ChunkAnswer, SubjectAnswer } from "./chunk-kernel.ts";
import { type Part, PartReader, type WorkerPlan } from "./chunk-job.ts";

/** How often the watch is looked at while workers work. */
const lookEveryMs = 15;

type Message =
  | ChunkAnswer
  | SubjectAnswer
  | null
  | { readonly failure: { readonly code: string; readonly message: string } };

/** The built worker, also where this runs from sources and a build stands beside; null where there is none. */
function builtWorker(): string | null {
  const here = import.meta.url;
  const url = here.endsWith(".ts") ? "../../../dist/src/data/node/chunk-worker.js" : "./chunk-worker.js";
  const file = fileURLToPath(new URL(url, here));
  return existsSync(file) ? file : null;
}

/** What an error of the file system means to a person. */
export function fileProblem(error: unknown, path: string): unknown {
  const code = error instanceof Error && "code" in error ? String(error.code) : "";
  if (code === "ENOENT") return new HostError("missing-file", path, `There is no file "${path}".`);
  if (/^E[A-Z]+$/.test(code))
    return new HostError("unreadable-file", path, `The file "${path}" cannot be read (${code}).`);
  return error;
}

export interface PartsRead {
  readonly answers: readonly ChunkAnswer[];
  readonly subjects: readonly SubjectAnswer[];
}

/**
 * Reads all parts, on as many threads as asked for; answers in the order of the parts.
 * @param nextPart part that follows an answer where one depends on the other (then everything runs on one thread); null at the end
 */
export async function readParts(
  plan: WorkerPlan,
  parts: readonly Part[],
  options: { readonly threads: number | undefined; readonly workerFile: string | undefined; readonly watch: Watch },
): Promise<PartsRead> {
  const threads = Math.min(options.threads ?? availableParallelism(), parts.length);
  const file = options.workerFile ?? builtWorker();
  if (threads === 0 || file === null || parts.length === 1) return readHere(plan, parts, options.watch);
  return readByWorkers(plan, parts, { threads, file, watch: options.watch });
}

async function readHere(plan: WorkerPlan, parts: readonly Part[], watch: Watch): Promise<PartsRead> {
  const reader = new PartReader(plan);
  try {
    const answers: ChunkAnswer[] = [];
    for (const part of parts) {
      watch.checkpoint();
      answers.push(reader.read(part));
      watch.progress(answers.length, parts.length, "reading the file");
      if (answers.at(-1)!.problem !== null) break;
    }
    const subjects = reader.subjects();
    return { answers, subjects: subjects === null ? [] : [subjects] };
  } finally {
    reader.close();
  }
}

/** Reads the file from front to back, each part beginning where the one before it ended. */
export async function readInOrder(plan: WorkerPlan, size: number, watch: Watch): Promise<PartsRead> {
  const reader = new PartReader(plan);
  try {
    const answers: ChunkAnswer[] = [];
    for (let from = plan.dataStart; from < plan.dataEnd; ) {
      watch.checkpoint();
      const to = Math.min(from + size, plan.dataEnd);
      const answer = reader.read({ from, to, aligned: true, margin: size });
      answers.push(answer);
      if (answer.problem !== null) break;
      from = Math.max(answer.end, to);
      watch.progress(from - plan.dataStart, plan.dataEnd - plan.dataStart, "reading the file");
    }
    const subjects = reader.subjects();
    return { answers, subjects: subjects === null ? [] : [subjects] };
  } finally {
    reader.close();
  }
}

async function readByWorkers(
  plan: WorkerPlan,
  parts: readonly Part[],
  options: { readonly threads: number; readonly file: string; readonly watch: Watch },
): Promise<PartsRead> {
  const answers = new Array<ChunkAnswer>(parts.length);
  const subjects: SubjectAnswer[] = [];
  const workers: Worker[] = [];
  let next = 0;
  let done = 0;
  let stop = parts.length;
  const work = async (): Promise<void> => {
    const worker = new Worker(options.file, { workerData: plan });
    workers.push(worker);
    let settle: { resolve(answer: Message): void; reject(error: Error): void } | null = null;
    worker.on("message", (answer: Message) => settle?.resolve(answer));
    worker.on("error", (error: Error) => settle?.reject(error));
    worker.on("exit", () => settle?.reject(new Error("A reading thread ended unexpectedly.")));
    const ask = (message: Part | "subjects") =>
      new Promise<Message>((resolve, reject) => {
        settle = { resolve, reject };
        worker.postMessage(message);
      });
    while (next < stop) {
      const index = next++;
      const answer = await ask(parts[index]!);
      if (answer !== null && "failure" in answer)
        throw Object.assign(new Error(answer.failure.message), answer.failure);
      answers[index] = answer as ChunkAnswer;
      done++;
      // Parts behind a problem do not matter; those in front may hold an earlier one.
      if (answers[index]!.problem !== null) stop = Math.min(stop, index + 1);
    }
    const own = await ask("subjects");
    if (own !== null && "labels" in own) subjects.push(own);
  };
  try {
    const everything = Promise.all(Array.from({ length: options.threads }, work));
    everything.catch(() => {});
    for (let told = -1; ; ) {
      const finished = await Promise.race([
        everything.then(() => true),
        new Promise<false>((resolve) => setTimeout(resolve, lookEveryMs, false)),
      ]);
      if (done !== told) options.watch.progress(done, parts.length, "reading the file");
      told = done;
      if (finished) break;
      options.watch.checkpoint();
    }
    return { answers: answers.slice(0, stop), subjects };
  } catch (error) {
    throw fileProblem(error, plan.path);
  } finally {
    await Promise.all(workers.map((worker) => worker.terminate()));
  }
}
