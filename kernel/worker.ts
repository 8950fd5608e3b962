import { parentPort, workerData } from "node:worker_threads";
import { HostError, Interrupted, type Host, type Watch } from "../src/host/index.ts";
import type { Completion, Failure, MimeBundle, Output, RunOptions } from "./interpreter.ts";
import type { Answer, Question, WorkerData } from "./worker-interpreter.ts";

/** The interpreter's thread: holds the session, runs cells, answers completion and hover. Heavy modules load behind the first question. */

const { flag, documentName } = workerData as WorkerData;
const word = new Int32Array(flag);
/** Display updates are at most four a second. */
const progressEveryMs = 250;

type Language = Awaited<ReturnType<typeof load>>;

async function load() {
  const [grammar, session, present, cli] = await Promise.all([
    import("../grammar/index.ts"),
    import("../src/session/index.ts"),
    import("../src/present/index.ts"),
    import("../src/cli/node-host.ts"),
  ]);
  return { grammar, session, present, cli };
}

let loading: Promise<Language> | null = null;
const language = (): Promise<Language> => {
  loading ??= load();
  return loading;
};

let progressOf: ((done: number, total: number, label: string) => void) | null = null;

const watch: Watch = {
  checkpoint() {
    if (Atomics.load(word, 0) === 0) return;
    Atomics.store(word, 0, 0);
    throw new Interrupted();
  },
  progress: (done, total, label) => progressOf?.(done, total, label),
};

async function packageVersion(): Promise<string> {
  return (await import("../src/cli/run.ts")).packageVersion();
}

type Held = {
  session: Awaited<ReturnType<Language["session"]["openSession"]>>;
  host: ReturnType<Language["cli"]["nodeHost"]>;
};
let held: Promise<Held> | null = null;

function opened(): Promise<Held> {
  held ??= (async () => {
    const { session, cli } = await language();
    const host = cli.nodeHost({ folder: process.cwd(), documentName, watch });
    return { host, session: await session.openSession(host, await packageVersion()) };
  })();
  return held;
}

/** Progress as a display that is updated and, at the end, says that it is done. */
function progressDisplay(call: number, emit: (output: Output) => void) {
  const displayId = `progress-${process.pid}-${call}`;
  let last = 0;
  let open = false;
  const bundle = (text: string) => ({ data: { "text/plain": text } });
  return {
    report(done: number, total: number, label: string) {
      const now = Date.now();
      if (now - last < progressEveryMs) return;
      last = now;
      const text = `${label}: ${Math.floor((100 * done) / total)}% of ${total}`;
      emit(open ? { type: "update", displayId, ...bundle(text) } : { type: "progress", displayId, ...bundle(text) });
      open = true;
    },
    close(finished: boolean) {
      if (open) emit({ type: "update", displayId, ...bundle(finished ? "done" : "stopped") });
    },
  };
}

/** The host of an expression beside a cell: it looks, it writes nothing. */
function lookingOnly(host: Host): Host {
  return {
    ...host,
    async writeBytes(path) {
      throw new HostError("unwritable-file", path, "An expression beside a cell writes no file.");
    },
  };
}

async function run(
  call: number,
  code: string,
  options: RunOptions,
  emit: (output: Output) => void,
): Promise<Failure | null> {
  const { session, present } = await language();
  const current = await opened();
  const progress = progressDisplay(call, emit);
  progressOf = progress.report;
  let finished = false;
  try {
    const start = options.keep ? current.session : { ...current.session, ledgerPath: null };
    const host = options.keep ? current.host : lookingOnly(current.host);
    const done = await session.runCell(start, code, {
      cell: options.cell,
      host,
      onResult: async (outcome, last, study) => {
        // Kept statement by statement: what is in the ledger stays in the study, even if a later one hits a mistake of our own.
        if (options.keep) held = Promise.resolve({ host: current.host, session: { ...current.session, study } });
        if (outcome.result === null) return;
        // Declarations speak only when they are all that a cell holds.
        if (outcome.result.kind === "message" && !last) return;
        if (outcome.result.kind === "message" && !options.silent) {
          emit({ type: "stream", name: "stdout", text: `${present.presentText(outcome.result)}\n` });
          return;
        }
        const bundle = await present.presentResult(
          outcome.result,
          session.presentOptions(study),
          options.silent ? null : current.host,
        );
        emit(last ? { type: "result", data: { ...bundle } } : { type: "display", data: { ...bundle } });
      },
    });
    if (options.keep) held = Promise.resolve({ host: current.host, session: done.session });
    const readData = done.outcomes.some(
      (outcome) =>
        outcome.result?.kind === "data" && (outcome.result.action === "read" || outcome.result.action === "typed"),
    );
    // Said with every reading: from then on the record matters.
    if (options.keep && documentName === null && readData) {
      emit({
        type: "stream",
        name: "stderr",
        text: "The front end did not tell this notebook's name: its ledger is kept in this session only. meanwise run NOTEBOOK --notebook OUT embeds the record.\n",
      });
    }
    finished = done.problems.length === 0;
    if (finished) return null;
    const [first] = done.problems;
    const text = present.presentProblems(done.problems, code).text;
    return { ename: first!.code, evalue: first!.message, traceback: text.split("\n") };
  } finally {
    progressOf = null;
    progress.close(finished);
  }
}

async function complete(code: string, offset: number): Promise<Completion> {
  const { grammar, session } = await language();
  const current = await opened();
  const known = await session.knownNames(current.session.study, current.host);
  const found = grammar.complete(code, offset, known);
  return {
    start: found.start,
    end: found.end,
    matches: found.items.map(({ text, type, signature }) => ({ text, type, signature })),
  };
}

async function inspect(code: string, offset: number): Promise<MimeBundle | null> {
  const { grammar, session } = await language();
  const current = await opened();
  const known = await session.knownNames(current.session.study, current.host);
  const found = grammar.hover(code, offset, known);
  if (found === null) return null;
  const example = found.example === null ? [] : ["", found.example];
  return { data: { "text/plain": [found.title, "", ...found.lines, ...example].join("\n") } };
}

async function answerTo(question: Question): Promise<unknown> {
  switch (question.ask) {
    case "run":
      return run(question.call, question.code, question.options, (output) =>
        parentPort?.postMessage({ call: question.call, output } satisfies Answer),
      );
    case "complete":
      return complete(question.code, question.offset);
    case "inspect":
      return inspect(question.code, question.offset);
    case "isComplete": {
      const { grammar } = await language();
      const found = grammar.isComplete(question.code);
      return { status: found.status, indent: found.indent };
    }
    case "shutdown":
      return null;
  }
}

parentPort?.on("message", (question: Question) => {
  answerTo(question).then(
    (value) => parentPort?.postMessage({ call: question.call, value } satisfies Answer),
    (error: unknown) =>
      parentPort?.postMessage({
        call: question.call,
        crash: error instanceof Error ? (error.stack ?? error.message) : String(error),
      } satisfies Answer),
  );
});
// The first cell should not wait for the language to load.
language().catch(() => {});
