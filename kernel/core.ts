import { codePointOffset, utf16Offset } from "./code-points.ts";
import { type HistoryEntry, searchHistory } from "./history.ts";
import type { Failure, Interpreter, Output } from "./interpreter.ts";
import { type Header, type Json, type Message, protocolVersion } from "./wire.ts";

/** How the core sends; the sockets behind it can be replaced in a test. */
export interface Server {
  /** Answers a request on the channel it came from. */
  reply(channel: "shell" | "control", request: Message, type: string, content: Json): Promise<void>;
  /** Publishes to everyone, with the request as parent. */
  publish(type: string, parent: Header | null, content: Json, metadata?: Json): Promise<void>;
}

export interface KernelOptions {
  readonly server: Server;
  readonly interpreter: Interpreter;
  readonly version: string;
  /** Called after the reply to a shutdown request has gone out. */
  readonly onShutdown: (restart: boolean) => void;
  /** One line for whoever reads standard error; silent by default. */
  readonly log: (line: string) => void;
}

export interface KernelCore {
  /** Takes one message in; shell messages are worked off in order, control ones at once. Never throws. */
  receive(channel: "shell" | "control", message: Message): void;
  /** Says once that the kernel is starting. */
  announce(): Promise<void>;
  /** Resolves when everything received so far is answered. */
  settled(): Promise<void>;
}

/** Runs one request type; what it returns is the reply's content. */
type Handler = (
  message: Message,
  channel: "shell" | "control",
) => Promise<{ readonly type: string; readonly content: Json } | null>;

const text = (value: unknown, otherwise = ""): string => (typeof value === "string" ? value : otherwise);
const truth = (value: unknown, otherwise: boolean): boolean => (typeof value === "boolean" ? value : otherwise);
const whole = (value: unknown, otherwise: number): number =>
  typeof value === "number" && Number.isFinite(value) ? Math.trunc(value) : otherwise;

const historyKept = 10_000;

/** The message handlers of the kernel, apart from sockets and from the language. */
export function createKernelCore(options: KernelOptions): KernelCore {
  const { server, interpreter } = options;
  let executionCount = 0;
  const history: HistoryEntry[] = [];
  let shell: Promise<void> = Promise.resolve();
  let control: Promise<void> = Promise.resolve();
  /** Requests that were waiting on shell when a cell failed; they are answered as aborted. */
  const waiting = new Set<Message>();
  const aborted = new WeakSet<Message>();

  const status = (state: string, parent: Header | null) => server.publish("status", parent, { execution_state: state });

  function send(output: Output, parent: Header, count: number): Promise<void> {
    switch (output.type) {
      case "stream":
        return server.publish("stream", parent, { name: output.name, text: output.text });
      case "display":
        return server.publish("display_data", parent, {
          data: output.data,
          metadata: output.metadata ?? {},
          transient: {},
        });
      case "progress":
        return server.publish("display_data", parent, {
          data: output.data,
          metadata: output.metadata ?? {},
          transient: { display_id: output.displayId },
        });
      case "update":
        return server.publish("update_display_data", parent, {
          data: output.data,
          metadata: output.metadata ?? {},
          transient: { display_id: output.displayId },
        });
      case "result":
        return server.publish("execute_result", parent, {
          execution_count: count,
          data: output.data,
          metadata: output.metadata ?? {},
        });
    }
  }

  async function userExpressions(expressions: unknown, count: number): Promise<Json> {
    if (typeof expressions !== "object" || expressions === null) return {};
    const answers: Record<string, unknown> = {};
    for (const [name, code] of Object.entries(expressions)) {
      let last: Json | null = null;
      const failure = await interpreter.run(text(code), { cell: count, silent: true, keep: false }, (output) => {
        if (output.type === "result" || output.type === "display")
          last = { data: output.data, metadata: output.metadata ?? {} };
      });
      answers[name] =
        failure !== null
          ? { status: "error", ...failure }
          : { status: "ok", ...(last ?? { data: { "text/plain": "" }, metadata: {} }) };
    }
    return answers;
  }

  async function execute(message: Message): Promise<{ type: string; content: Json }> {
    const { content, header } = message;
    const code = text(content.code);
    const silent = truth(content.silent, false);
    const storeHistory = !silent && truth(content.store_history, true);
    if (aborted.has(message)) {
      return {
        type: "execute_reply",
        content: { status: "aborted", execution_count: executionCount, payload: [], user_expressions: {} },
      };
    }
    if (storeHistory) {
      executionCount++;
      history.push({ session: 1, line: executionCount, input: code, output: null });
      if (history.length > historyKept) history.shift();
    }
    const count = executionCount;
    if (!silent) await server.publish("execute_input", header, { code, execution_count: count });
    const sent: Promise<void>[] = [];
    let failure: Failure | null = null;
    let plain = "";
    try {
      failure =
        code.trim() === ""
          ? null
          : await interpreter.run(code, { cell: count, silent, keep: true }, (output) => {
              if (output.type === "result") plain = text(output.data["text/plain"]);
              if (!silent) sent.push(send(output, header, count));
            });
    } catch (error) {
      options.log(`kernel: ${error instanceof Error ? (error.stack ?? error.message) : String(error)}`);
      failure = {
        ename: "InternalError",
        evalue: "The statement could not be finished because of a mistake in Meanwise itself.",
        traceback: [
          "The statement could not be finished because of a mistake in Meanwise itself; the study is as it was. Please report the cell that causes it.",
        ],
      };
    }
    await Promise.all(sent);
    if (storeHistory && plain !== "") history[history.length - 1] = { ...history.at(-1)!, output: plain };
    if (failure === null) {
      const expressions = await userExpressions(content.user_expressions, count);
      return {
        type: "execute_reply",
        content: { status: "ok", execution_count: count, payload: [], user_expressions: expressions },
      };
    }
    if (!silent) await server.publish("error", header, { ...failure });
    if (truth(content.stop_on_error, true)) for (const other of waiting) aborted.add(other);
    return {
      type: "execute_reply",
      content: { status: "error", execution_count: count, payload: [], user_expressions: {}, ...failure },
    };
  }

  const shutdown: Handler = async (message) => {
    const restart = truth(message.content.restart, false);
    interpreter.interrupt();
    await server.publish("shutdown_reply", message.header, { status: "ok", restart });
    await interpreter.shutdown();
    return { type: "shutdown_reply", content: { status: "ok", restart } };
  };

  const handlers: Readonly<Record<string, Handler>> = {
    kernel_info_request: async () => ({ type: "kernel_info_reply", content: kernelInfo(options.version) }),
    execute_request: execute,
    complete_request: async ({ content }) => {
      const code = text(content.code);
      const cursor = whole(content.cursor_pos, Number.POSITIVE_INFINITY);
      const found = await interpreter.complete(code, utf16Offset(code, cursor));
      const start = codePointOffset(code, found.start);
      const end = codePointOffset(code, found.end);
      return {
        type: "complete_reply",
        content: {
          status: "ok",
          matches: found.matches.map((match) => match.text),
          cursor_start: start,
          cursor_end: end,
          metadata: {
            _jupyter_types_experimental: found.matches.map((match) => ({ start, end, ...match })),
          },
        },
      };
    },
    inspect_request: async ({ content }) => {
      const code = text(content.code);
      const found = await interpreter.inspect(
        code,
        utf16Offset(code, whole(content.cursor_pos, Number.POSITIVE_INFINITY)),
        whole(content.detail_level, 0),
      );
      return {
        type: "inspect_reply",
        content: { status: "ok", found: found !== null, data: found?.data ?? {}, metadata: found?.metadata ?? {} },
      };
    },
    is_complete_request: async ({ content }) => {
      const { status: state, indent } = await interpreter.isComplete(text(content.code));
      return {
        type: "is_complete_reply",
        content: state === "incomplete" ? { status: state, indent } : { status: state },
      };
    },
    history_request: async ({ content }) => ({
      type: "history_reply",
      content: {
        status: "ok",
        history: searchHistory(history, {
          type: text(content.hist_access_type, "tail"),
          output: truth(content.output, false),
          session: whole(content.session, 0),
          start: whole(content.start, 0),
          stop: typeof content.stop === "number" ? content.stop : null,
          n: typeof content.n === "number" ? content.n : null,
          pattern: text(content.pattern, "*"),
          unique: truth(content.unique, false),
        }),
      },
    }),
    comm_info_request: async () => ({ type: "comm_info_reply", content: { status: "ok", comms: {} } }),
    comm_open: async (message) => {
      await server.publish("comm_close", message.header, { comm_id: text(message.content.comm_id), data: {} });
      return null;
    },
    comm_msg: async () => null,
    comm_close: async () => null,
    interrupt_request: async () => {
      interpreter.interrupt();
      return { type: "interrupt_reply", content: { status: "ok" } };
    },
    shutdown_request: shutdown,
  };

  async function work(channel: "shell" | "control", message: Message): Promise<void> {
    const type = message.header.msg_type;
    waiting.delete(message);
    let closing: boolean | null = null;
    try {
      await status("busy", message.header);
      const handler = handlers[type];
      if (handler === undefined) options.log(`kernel: no handler for ${type}`);
      const answer = handler === undefined ? null : await handler(message, channel);
      if (answer !== null) await server.reply(channel, message, answer.type, answer.content);
      if (type === "shutdown_request") closing = truth(message.content.restart, false);
    } catch (error) {
      options.log(`kernel: ${type}: ${error instanceof Error ? (error.stack ?? error.message) : String(error)}`);
      if (type.endsWith("_request")) {
        const failure = {
          status: "error",
          ename: "InternalError",
          evalue: "The request could not be answered.",
          traceback: [],
        };
        await server.reply(channel, message, type.replace(/_request$/, "_reply"), failure).catch(() => {});
      }
    } finally {
      await status("idle", message.header).catch(() => {});
    }
    if (closing !== null) options.onShutdown(closing);
  }

  return {
    receive(channel, message) {
      if (channel === "control") {
        control = control.then(() => work(channel, message));
        return;
      }
      if (message.header.msg_type === "execute_request") waiting.add(message);
      shell = shell.then(() => work(channel, message));
    },
    announce: () => status("starting", null),
    async settled() {
      await Promise.all([shell, control]);
    },
  };
}

function kernelInfo(version: string): Json {
  return {
    status: "ok",
    protocol_version: protocolVersion,
    implementation: "meanwise",
    implementation_version: version,
    language_info: {
      name: "meanwise",
      version,
      mimetype: "text/x-meanwise",
      file_extension: ".mwise",
      // "text" is a lexer that every converter has; an unknown name would break or warn in conversion.
      pygments_lexer: "text",
      codemirror_mode: "meanwise",
      nbconvert_exporter: "script",
    },
    banner: `Meanwise ${version}: compare the means of several conditions, as planned. Type help to begin.`,
    help_links: [],
    debugger: false,
    supported_features: [],
  };
}
