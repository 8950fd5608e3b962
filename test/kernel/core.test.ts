import { randomBytes } from "node:crypto";
import fc from "fast-check";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { codePointOffset, utf16Offset } from "../../kernel/code-points.ts";
import { createKernelCore, type KernelCore } from "../../kernel/core.ts";
import { matchesGlob } from "../../kernel/history.ts";
import type { Interpreter, Output } from "../../kernel/interpreter.ts";
import { bindSockets, type Sockets } from "../../kernel/sockets.ts";
import { createWire } from "../../kernel/wire.ts";
import { Client, freshConnection } from "./client.ts";

/** An interpreter that repeats, fails, waits or breaks as told: it stands for the language. */
function parrot(): Interpreter & { interrupts: number } {
  let release: (() => void) | null = null;
  const self = {
    interrupts: 0,
    async run(code: string, _: unknown, emit: (output: Output) => void) {
      if (code === "fail")
        return { ename: "unknown-factor", evalue: "There is no factor.", traceback: ["line 1", "advice"] };
      if (code === "break") throw new Error("a mistake in the program");
      if (code === "wait") {
        await new Promise<void>((resolve) => {
          release = resolve;
        });
        return { ename: "interrupted", evalue: "Interrupted.", traceback: [] };
      }
      emit({ type: "stream", name: "stdout", text: "heard\n" });
      emit({ type: "progress", displayId: "p1", data: { "text/plain": "0 of 2" } });
      emit({ type: "update", displayId: "p1", data: { "text/plain": "2 of 2" } });
      emit({ type: "display", data: { "text/plain": "first" } });
      emit({ type: "result", data: { "text/plain": code } });
      return null;
    },
    async complete(code: string, offset: number) {
      return { matches: [{ text: code.slice(0, offset), type: "name", signature: "" }], start: 0, end: offset };
    },
    async inspect(code: string, offset: number) {
      return offset > 0 ? { data: { "text/plain": code.slice(0, offset) } } : null;
    },
    async isComplete(code: string) {
      return code.endsWith(":")
        ? ({ status: "incomplete", indent: "  " } as const)
        : ({ status: "complete", indent: "" } as const);
    },
    interrupt() {
      self.interrupts++;
      release?.();
    },
    async shutdown() {},
  };
  return self;
}

let sockets: Sockets;
let client: Client;
let core: KernelCore;
let interpreter: ReturnType<typeof parrot>;
let closed: boolean[];
let logged: string[];

beforeEach(async () => {
  const connection = await freshConnection();
  closed = [];
  logged = [];
  interpreter = parrot();
  sockets = await bindSockets(connection, createWire(connection.key, "kernel-session"), "kernel-session", (line) =>
    logged.push(line),
  );
  core = createKernelCore({
    server: sockets.server,
    interpreter,
    version: "1.2.3",
    onShutdown: (restart) => closed.push(restart),
    log: (line) => logged.push(line),
  });
  sockets.listen((channel, message) => core.receive(channel, message));
  client = new Client(connection);
  await client.ready();
});

afterEach(() => {
  client.close();
  sockets.close();
});

const types = (messages: readonly { type: string; content: Record<string, unknown> }[]) =>
  messages.map((message) => (message.type === "status" ? String(message.content.execution_state) : message.type));

// Source of every expectation here: the Jupyter messaging specification, 5.3.
describe("kernel core over real sockets", () => {
  it("describes itself", async () => {
    const { reply } = await client.request("shell", "kernel_info_request", {});
    expect(reply.content).toMatchObject({
      status: "ok",
      protocol_version: "5.3",
      implementation: "meanwise",
      implementation_version: "1.2.3",
      language_info: { name: "meanwise", file_extension: ".mwise", mimetype: "text/x-meanwise" },
    });
  });

  it("wraps a cell in busy and idle, outputs in order, the whole header as parent", async () => {
    const { reply, outputs } = await client.request("shell", "execute_request", {
      code: "compare primary",
      silent: false,
    });
    expect(types(outputs)).toEqual([
      "busy",
      "execute_input",
      "stream",
      "display_data",
      "update_display_data",
      "display_data",
      "execute_result",
      "idle",
    ]);
    expect(reply.content).toMatchObject({ status: "ok", execution_count: 1, payload: [], user_expressions: {} });
    expect(reply.parent.extra).toBe(1);
    expect(outputs.find((message) => message.type === "execute_result")!.content.execution_count).toBe(1);
  });

  it("counts only cells that are stored", async () => {
    const run = async (content: object) =>
      (await client.request("shell", "execute_request", { code: "x", ...content })).reply.content.execution_count;
    expect(await run({})).toBe(1);
    expect(await run({ silent: true })).toBe(1);
    expect(await run({ store_history: false })).toBe(1);
    expect(await run({})).toBe(2);
  });

  it("publishes nothing but its status for a silent cell", async () => {
    const { outputs } = await client.request("shell", "execute_request", { code: "x", silent: true });
    expect(types(outputs)).toEqual(["busy", "idle"]);
  });

  it("takes an empty cell as done", async () => {
    const { reply } = await client.request("shell", "execute_request", { code: " \n" });
    expect(reply.content.status).toBe("ok");
  });

  it("tells an error on both channels and aborts what was already waiting, not what comes later", async () => {
    const first = client.request("shell", "execute_request", { code: "fail" });
    const second = client.request("shell", "execute_request", { code: "x" });
    const outcome = await first;
    expect(outcome.reply.content).toMatchObject({
      status: "error",
      ename: "unknown-factor",
      evalue: "There is no factor.",
    });
    expect(types(outcome.outputs)).toEqual(["busy", "execute_input", "error", "idle"]);
    const statuses = [
      (await second).reply.content.status,
      (await client.request("shell", "execute_request", { code: "x" })).reply.content.status,
    ];
    expect(statuses.at(-1)).toBe("ok");
  });

  it("answers queued cells as aborted after an error", async () => {
    const waiting = client.request("shell", "execute_request", { code: "wait" });
    await new Promise((resolve) => setTimeout(resolve, 50));
    const queued = client.request("shell", "execute_request", { code: "x" });
    await new Promise((resolve) => setTimeout(resolve, 50));
    await client.request("control", "interrupt_request", {});
    expect((await waiting).reply.content.ename).toBe("interrupted");
    const late = await queued;
    expect(late.reply.content.status).toBe("aborted");
    expect(types(late.outputs)).toEqual(["busy", "idle"]);
  });

  it("keeps queued cells when told not to stop on error", async () => {
    const waiting = client.request("shell", "execute_request", { code: "wait", stop_on_error: false });
    await new Promise((resolve) => setTimeout(resolve, 50));
    const queued = client.request("shell", "execute_request", { code: "x" });
    await new Promise((resolve) => setTimeout(resolve, 50));
    await client.request("control", "interrupt_request", {});
    await waiting;
    expect((await queued).reply.content.status).toBe("ok");
  });

  it("answers control while a cell runs", async () => {
    const waiting = client.request("shell", "execute_request", { code: "wait" });
    await new Promise((resolve) => setTimeout(resolve, 50));
    expect((await client.request("control", "kernel_info_request", {})).reply.content.status).toBe("ok");
    expect((await client.heartbeat(Buffer.from([0, 255, 1]))).equals(Buffer.from([0, 255, 1]))).toBe(true);
    await client.request("control", "interrupt_request", {});
    await waiting;
  });

  it("goes idle and stays alive after a mistake in the program, and shows no stack trace", async () => {
    const { reply, outputs } = await client.request("shell", "execute_request", { code: "break" });
    expect(reply.content.status).toBe("error");
    expect(JSON.stringify(reply.content)).not.toMatch(/core\.ts|at .*:\d+:\d+/);
    expect(types(outputs).at(-1)).toBe("idle");
    expect((await client.request("shell", "execute_request", { code: "x" })).reply.content.status).toBe("ok");
  });

  it("evaluates user expressions, each on its own", async () => {
    const { reply } = await client.request("shell", "execute_request", {
      code: "x",
      user_expressions: { good: "show design", bad: "fail" },
    });
    expect(reply.content.user_expressions).toMatchObject({
      good: { status: "ok", data: { "text/plain": "show design" } },
      bad: { status: "error", ename: "unknown-factor" },
    });
  });

  it("counts cursor positions in code points, also after an emoji", async () => {
    const { reply } = await client.request("shell", "complete_request", { code: "🧤 glo", cursor_pos: 3 });
    expect(reply.content).toMatchObject({ matches: ["🧤 g"], cursor_start: 0, cursor_end: 3 });
    const inspected = await client.request("shell", "inspect_request", {
      code: "🧤🧤x",
      cursor_pos: 2,
      detail_level: 0,
    });
    expect(inspected.reply.content).toMatchObject({ status: "ok", found: true, data: { "text/plain": "🧤🧤" } });
    const nothing = await client.request("shell", "inspect_request", { code: "x", cursor_pos: 0 });
    expect(nothing.reply.content).toMatchObject({ status: "ok", found: false, data: {} });
  });

  it("says whether a cell is complete, with the indent", async () => {
    expect((await client.request("shell", "is_complete_request", { code: "family a:" })).reply.content).toEqual({
      status: "incomplete",
      indent: "  ",
    });
    expect((await client.request("shell", "is_complete_request", { code: "check" })).reply.content).toEqual({
      status: "complete",
    });
  });

  it("keeps history for range, tail and search", async () => {
    for (const code of ["check", "describe seconds", "check"])
      await client.request("shell", "execute_request", { code });
    const ask = async (content: object) =>
      (await client.request("shell", "history_request", { raw: true, ...content })).reply.content.history;
    expect(await ask({ hist_access_type: "tail", n: 2, output: false })).toEqual([
      [1, 2, "describe seconds"],
      [1, 3, "check"],
    ]);
    expect(await ask({ hist_access_type: "search", pattern: "ch*k", unique: true, output: false })).toEqual([
      [1, 3, "check"],
    ]);
    expect(await ask({ hist_access_type: "range", session: 0, start: 1, stop: 3, output: true })).toEqual([
      [1, 1, ["check", "check"]],
      [1, 2, ["describe seconds", "describe seconds"]],
    ]);
  });

  it("closes comms that nobody registered and lists none", async () => {
    expect((await client.request("shell", "comm_info_request", {})).reply.content).toEqual({ status: "ok", comms: {} });
    await client.sendRaw("shell", client.frames("comm_open", { comm_id: "c1", target_name: "nobody", data: {} }));
    await client.request("shell", "kernel_info_request", {});
    expect(client.published.some((message) => message.type === "comm_close" && message.content.comm_id === "c1")).toBe(
      true,
    );
  });

  it("goes busy and idle for an unknown message and lives on", async () => {
    await client.sendRaw("shell", client.frames("no_such_request", {}, "unknown-1"));
    await client.request("shell", "kernel_info_request", {});
    expect(types(client.published.filter((message) => message.parent.msg_id === "unknown-1"))).toEqual([
      "busy",
      "idle",
    ]);
  });

  it("answers shutdown with the same restart flag before it leaves", async () => {
    const { reply, outputs } = await client.request("control", "shutdown_request", { restart: true });
    expect(reply.content).toEqual({ status: "ok", restart: true });
    expect(types(outputs)).toContain("shutdown_reply");
    await core.settled();
    expect(closed).toEqual([true]);
  });

  it("drops wrong signatures, replays and garbage, and answers what comes after", async () => {
    const good = client.frames("kernel_info_request", {}, "replay-1");
    const unsigned = client.frames("kernel_info_request", {}, "wrong-1");
    unsigned[1] = Buffer.from("0".repeat(64));
    for (const frames of [good, good, unsigned, [Buffer.from("<IDS|MSG>")], [Buffer.from("x")], []]) {
      if (frames.length > 0) await client.sendRaw("shell", frames);
    }
    await client.request("shell", "kernel_info_request", {});
    expect(client.published.filter((message) => message.parent.msg_id === "replay-1")).toHaveLength(2);
    expect(client.published.some((message) => message.parent.msg_id === "wrong-1")).toBe(false);
    expect(logged.some((line) => line.includes("replayed"))).toBe(true);
  });

  it("survives 5,000 malformed messages", async () => {
    let seed = 12345;
    const random = (below: number) => {
      seed = (Math.imul(seed, 1103515245) + 12345) >>> 0;
      return (seed >>> 8) % below;
    };
    for (let count = 0; count < 5000; count++) {
      const frames = client.frames("execute_request", { code: "x", silent: true });
      const kind = random(6);
      if (kind === 0) frames.splice(random(frames.length), 1);
      else if (kind === 1) frames[random(frames.length)] = randomBytes(random(40));
      else if (kind === 2) frames[2 + random(4)] = Buffer.from(["[]", "null", "{", '"x"', "1e999", "{}"][random(6)]!);
      else if (kind === 3) frames.splice(random(frames.length), 0, randomBytes(random(20)));
      else if (kind === 4) frames[2] = Buffer.from(JSON.stringify({ msg_id: 5, msg_type: [] }));
      else frames.length = random(frames.length) + 1;
      // Half of them are signed rightly, so that what lies behind the signature is tried too.
      if (random(2) === 0 && frames.length >= 6) frames[1] = Buffer.from(client.sign(frames.slice(2, 6)));
      await client.sendRaw(random(2) === 0 ? "shell" : "control", frames);
    }
    const { reply } = await client.request("shell", "execute_request", { code: "still here" });
    expect(reply.content.status).toBe("ok");
  });
});

describe("code points", () => {
  it("convert there and back at every boundary", () => {
    fc.assert(
      fc.property(fc.string({ unit: "grapheme" }), (text) => {
        const points = [...text];
        for (let count = 0; count <= points.length; count++) {
          const offset = utf16Offset(text, count);
          expect(offset).toBe(points.slice(0, count).join("").length);
          expect(codePointOffset(text, offset)).toBe(count);
        }
      }),
    );
  });
});

describe("history patterns", () => {
  it.each([
    ["check", "ch*", true],
    ["check\nx", "*x", true],
    ["a.b", "a?b", true],
    ["axb", "a[!y]b", true],
    ["ayb", "a[!y]b", false],
    ["a+b", "a+b", true],
    ["check", "hec", false],
  ])("%j against %j is %s", (text, pattern, expected) => expect(matchesGlob(text, pattern)).toBe(expected));
});
