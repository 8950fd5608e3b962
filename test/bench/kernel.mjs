// The kernel beside the ecosystem's reference kernel (Debian python3-ipykernel), interleaved, with one client for both:
// start to kernel_info reply, start to first result, trivial round trip (median, p99), idle memory. Run by: npm run bench kernel.
import { spawn, spawnSync } from "node:child_process";
import { createHmac, randomUUID } from "node:crypto";
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { createServer } from "node:net";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { Dealer, Subscriber } from "zeromq";

const top = join(dirname(fileURLToPath(import.meta.url)), "..", "..");
const python = "/usr/bin/python3";
const starts = Number(process.env.STARTS ?? 7);
const trips = Number(process.env.TRIPS ?? 400);
/** Ratio to the reference kernel that the project promises for start and round trip. */
const target = 0.5;

const kernels = {
  meanwise: {
    command: (file) => [process.execPath, [join(top, "dist/src/cli/main.js"), "kernel", "run", file]],
    first: "show settings",
    trivial: "show settings",
  },
  reference: {
    command: (file) => [python, ["-m", "ipykernel_launcher", "-f", file]],
    first: "1 + 1",
    trivial: "1 + 1",
  },
};

const wait = (ms) => new Promise((resolve) => setTimeout(resolve, ms));
const sorted = (values) => [...values].sort((left, right) => left - right);
const quantile = (values, share) => sorted(values)[Math.min(values.length - 1, Math.floor(share * values.length))];

function freePort() {
  return new Promise((resolve, reject) => {
    const server = createServer();
    server.on("error", reject);
    server.listen(0, "127.0.0.1", () => {
      const { port } = server.address();
      server.close(() => resolve(port));
    });
  });
}

/** Memory of a process and its children in MB: each shared page counted once (Pss). */
function memory(pid) {
  const children = spawnSync("ps", ["-o", "pid=", "--ppid", String(pid)], { encoding: "utf8" })
    .stdout.split(/\s+/)
    .filter(Boolean);
  const own = Number(/^Pss:\s+(\d+)/m.exec(readFileSync(`/proc/${pid}/smaps_rollup`, "utf8"))?.[1] ?? 0) / 1024;
  return own + children.reduce((sum, child) => sum + memory(child), 0);
}

async function start(kind) {
  const folder = mkdtempSync(join(tmpdir(), "meanwise-bench-kernel-"));
  const key = randomUUID();
  const names = ["shell_port", "control_port", "iopub_port", "stdin_port", "hb_port"];
  const ports = {};
  for (const name of names) ports[name] = await freePort();
  const file = join(folder, "connection.json");
  writeFileSync(
    file,
    JSON.stringify({ transport: "tcp", ip: "127.0.0.1", key, signature_scheme: "hmac-sha256", kernel_name: "", ...ports }),
  );
  const [program, words] = kernels[kind].command(file);
  const began = performance.now();
  const child = spawn(program, words, {
    cwd: folder,
    stdio: "ignore",
    env: { ...process.env, IPYTHONDIR: join(folder, "ipython") },
  });
  const shell = new Dealer({ linger: 0, routingId: randomUUID(), reconnectInterval: 5, reconnectMaxInterval: 5 });
  const iopub = new Subscriber({ linger: 0, reconnectInterval: 5, reconnectMaxInterval: 5 });
  shell.connect(`tcp://127.0.0.1:${ports.shell_port}`);
  iopub.connect(`tcp://127.0.0.1:${ports.iopub_port}`);
  iopub.subscribe();
  const replies = new Map();
  const idle = new Map();
  const sign = (parts) => parts.reduce((hmac, part) => hmac.update(part), createHmac("sha256", key)).digest("hex");
  const partsOf = (frames) => {
    const at = frames.findIndex((frame) => frame.toString() === "<IDS|MSG>");
    return frames.slice(at + 2, at + 6).map((part) => JSON.parse(part.toString()));
  };
  (async () => {
    for await (const frames of shell) {
      const [header, parent, , content] = partsOf(frames);
      replies.get(parent.msg_id)?.({ header, content });
    }
  })().catch(() => {});
  (async () => {
    for await (const frames of iopub) {
      const [header, parent, , content] = partsOf(frames);
      if (header.msg_type === "status" && content.execution_state === "idle") idle.get(parent.msg_id)?.();
    }
  })().catch(() => {});
  async function request(type, content, idleToo = true) {
    const id = randomUUID();
    const header = { msg_id: id, session: "bench", username: "bench", date: new Date().toISOString(), msg_type: type, version: "5.3" };
    const parts = [header, {}, {}, content].map((part) => Buffer.from(JSON.stringify(part)));
    const both = [new Promise((resolve) => replies.set(id, resolve))];
    if (idleToo) both.push(new Promise((resolve) => idle.set(id, resolve)));
    await shell.send(["<IDS|MSG>", sign(parts), ...parts]);
    const [reply] = await Promise.race([
      Promise.all(both),
      wait(30_000).then(() => {
        throw new Error(`${kind} did not answer ${type}`);
      }),
    ]);
    return reply;
  }
  const execute = async (code) => {
    const reply = await request("execute_request", { code, silent: false, store_history: true, user_expressions: {}, allow_stdin: false });
    if (reply.content.status !== "ok") throw new Error(`${kind}: ${JSON.stringify(reply.content)}`);
  };
  return {
    began,
    child,
    request,
    execute,
    async stop() {
      const gone = new Promise((resolve) => child.on("close", resolve));
      child.kill("SIGKILL");
      await gone;
      shell.close();
      iopub.close();
      rmSync(folder, { recursive: true, force: true });
    },
  };
}

if (!existsSync(python) || spawnSync(python, ["-c", "import ipykernel"]).status !== 0) {
  console.log("skipped: the reference kernel (python3-ipykernel) is not installed");
  process.exit(0);
}

const measured = Object.fromEntries(
  Object.keys(kernels).map((kind) => [kind, { info: [], first: [], trip: [], memory: [] }]),
);
// One start of each that is not counted: files come from the disk the first time.
for (let turn = -1; turn < starts; turn++) {
  for (const kind of Object.keys(kernels)) {
    const running = await start(kind);
    try {
      await running.request("kernel_info_request", {}, false);
      const info = performance.now() - running.began;
      await running.execute(kernels[kind].first);
      const first = performance.now() - running.began;
      if (turn < 0) continue;
      measured[kind].info.push(info);
      measured[kind].first.push(first);
      await wait(300);
      measured[kind].memory.push(memory(running.child.pid));
    } finally {
      await running.stop();
    }
  }
}

const both = {};
for (const kind of Object.keys(kernels)) both[kind] = await start(kind);
for (const kind of Object.keys(kernels)) {
  await both[kind].request("kernel_info_request", {}, false);
  for (let turn = 0; turn < 50; turn++) await both[kind].execute(kernels[kind].trivial);
}
for (let turn = 0; turn < trips; turn++) {
  for (const kind of Object.keys(kernels)) {
    const began = performance.now();
    await both[kind].execute(kernels[kind].trivial);
    measured[kind].trip.push(performance.now() - began);
  }
}
for (const kind of Object.keys(kernels)) await both[kind].stop();

let missed = 0;
const rows = [
  ["start to kernel_info reply, median ms", "info", 0.5, target],
  ["start to first result, median ms", "first", 0.5, target],
  ["trivial round trip, median ms", "trip", 0.5, target],
  ["trivial round trip, 99th percentile ms", "trip", 0.99, target],
  ["idle memory, median MB", "memory", 0.5, null],
];
console.log(`${"".padEnd(42)}${"meanwise".padStart(10)}${"reference".padStart(11)}${"ratio".padStart(8)}  target`);
for (const [title, key, share, limit] of rows) {
  const own = quantile(measured.meanwise[key], share);
  const other = quantile(measured.reference[key], share);
  const ratio = own / other;
  const judged = limit === null ? "" : ratio <= limit ? `≤ ${limit}: met` : `≤ ${limit}: missed`;
  if (judged.endsWith("missed")) missed++;
  console.log(
    `${title.padEnd(42)}${own.toFixed(1).padStart(10)}${other.toFixed(1).padStart(11)}${ratio.toFixed(2).padStart(8)}  ${judged}`,
  );
}
process.exitCode = missed === 0 ? 0 : 1;
