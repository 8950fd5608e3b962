import { type Host, HostError, silentWatch } from "../../src/host/index.ts";
import { runTask } from "../../src/planning/tasks.ts";

export interface MemoryHost extends Host {
  readonly files: Map<string, Uint8Array>;
  text(path: string): string;
  put(path: string, text: string): void;
}

/** A host without a disk: files in a map, a clock that ticks by a second, jobs run in place. */
export function memoryHost(documentName: string | null = "study.mwise"): MemoryHost {
  const files = new Map<string, Uint8Array>();
  let clock = Date.UTC(2026, 11, 1, 9);
  const missing = (path: string) => new HostError("missing-file", path, `There is no file "${path}".`);
  return {
    files,
    text: (path) => {
      const bytes = files.get(path);
      if (bytes === undefined) throw missing(path);
      return new TextDecoder().decode(bytes);
    },
    put: (path, text) => void files.set(path, new TextEncoder().encode(text)),
    async readBytes(path) {
      const bytes = files.get(path);
      if (bytes === undefined) throw missing(path);
      return bytes;
    },
    async writeBytes(path, bytes) {
      files.set(path, bytes);
    },
    async appendLine(path, line, at) {
      const all = files.get(path) ?? new Uint8Array();
      if (at !== undefined && (all.length < at || all.subarray(at).includes(10)))
        throw new HostError("file-grew", path, `Another session wrote to "${path}" meanwhile.`);
      const before = at === undefined ? all : all.subarray(0, at);
      const added = new TextEncoder().encode(line);
      const whole = new Uint8Array(before.length + added.length);
      whole.set(before);
      whole.set(added, before.length);
      files.set(path, whole);
    },
    async exists(path) {
      return files.has(path);
    },
    async listFiles() {
      return [...files.keys()].sort();
    },
    now: () => {
      clock += 1000;
      return clock;
    },
    randomSeed: () => 7,
    async runJobs(jobs, watch) {
      const answers: unknown[] = [];
      for (const job of jobs) {
        watch.checkpoint();
        answers.push(await runTask(job.task, job.input));
      }
      return answers;
    },
    async svgToPng() {
      return null;
    },
    watch: silentWatch,
    documentName,
    environment: { node: "test" },
  };
}
