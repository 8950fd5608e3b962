import { createHmac, randomUUID } from "node:crypto";
import { createServer } from "node:net";
import { Dealer, Request, Subscriber } from "zeromq";
import type { Connection } from "../../kernel/connection.ts";

export interface Received {
  readonly type: string;
  readonly header: Record<string, unknown>;
  readonly parent: Record<string, unknown>;
  readonly content: Record<string, unknown>;
}

/** A port that nobody listens on at this moment. */
async function freePort(): Promise<number> {
  return new Promise((resolve, reject) => {
    const server = createServer();
    server.on("error", reject);
    server.listen(0, "127.0.0.1", () => {
      const address = server.address();
      server.close(() => resolve(typeof address === "object" && address !== null ? address.port : 0));
    });
  });
}

export async function freshConnection(key = "secret"): Promise<Connection> {
  const ports = await Promise.all([freePort(), freePort(), freePort(), freePort(), freePort()]);
  return {
    transport: "tcp",
    ip: "127.0.0.1",
    key,
    ports: { shell: ports[0]!, control: ports[1]!, iopub: ports[2]!, stdin: ports[3]!, heartbeat: ports[4]! },
  };
}

/** A front end of our own for the tests: written from the specification, sharing no code with the kernel. */
export class Client {
  readonly #connection: Connection;
  readonly #shell: Dealer;
  readonly #control: Dealer;
  readonly #iopub: Subscriber;
  readonly #replies = new Map<string, (message: Received) => void>();
  readonly #idle = new Map<string, () => void>();
  readonly published: Received[] = [];
  readonly #heartbeat: Request;

  constructor(connection: Connection) {
    this.#connection = connection;
    const identity = randomUUID();
    this.#shell = new Dealer({ routingId: identity, linger: 0 });
    this.#control = new Dealer({ routingId: identity, linger: 0 });
    this.#iopub = new Subscriber({ linger: 0 });
    this.#heartbeat = new Request({ linger: 0 });
    const at = (channel: keyof Connection["ports"]) =>
      connection.transport === "ipc"
        ? `ipc://${connection.ip}-${connection.ports[channel]}`
        : `tcp://${connection.ip}:${connection.ports[channel]}`;
    this.#shell.connect(at("shell"));
    this.#control.connect(at("control"));
    this.#iopub.connect(at("iopub"));
    this.#iopub.subscribe();
    this.#heartbeat.connect(at("heartbeat"));
    for (const socket of [this.#shell, this.#control]) this.#readReplies(socket).catch(() => {});
    this.#readPublished().catch(() => {});
  }

  /** Subscriptions arrive late: asks until the kernel's status has come through. */
  async ready(): Promise<void> {
    for (let attempt = 0; attempt < 100; attempt++) {
      const before = this.published.length;
      await this.request("shell", "kernel_info_request", {});
      await new Promise((resolve) => setTimeout(resolve, 20));
      if (this.published.length > before) return;
    }
    throw new Error("nothing is published");
  }

  sign(parts: readonly Buffer[]): string {
    if (this.#connection.key === "") return "";
    const hmac = createHmac("sha256", this.#connection.key);
    for (const part of parts) hmac.update(part);
    return hmac.digest("hex");
  }

  frames(type: string, content: object, id: string = randomUUID()): Buffer[] {
    const header = {
      msg_id: id,
      session: "test",
      username: "tester",
      date: new Date().toISOString(),
      msg_type: type,
      version: "5.3",
      extra: 1,
    };
    const parts = [header, {}, {}, content].map((part) => Buffer.from(JSON.stringify(part)));
    return [Buffer.from("<IDS|MSG>"), Buffer.from(this.sign(parts)), ...parts];
  }

  async sendRaw(channel: "shell" | "control", frames: readonly Buffer[]): Promise<void> {
    await (channel === "shell" ? this.#shell : this.#control).send([...frames]);
  }

  /** Sends a request and resolves with its reply once the kernel is idle again; `outputs` are what it published for it. */
  async request(
    channel: "shell" | "control",
    type: string,
    content: object,
    timeoutMs = 20_000,
  ): Promise<{ reply: Received; outputs: Received[]; id: string }> {
    const id = randomUUID();
    const reply = new Promise<Received>((resolve) => this.#replies.set(id, resolve));
    const idle = new Promise<void>((resolve) => this.#idle.set(id, resolve));
    await this.sendRaw(channel, this.frames(type, content, id));
    const late = new Promise<never>((_, reject) =>
      setTimeout(() => reject(new Error(`no answer to ${type}`)), timeoutMs).unref(),
    );
    const answer = await Promise.race([reply, late]);
    // Before the subscription is through, idle may be missed; the reply has come all the same.
    await Promise.race([
      idle,
      new Promise((resolve) => setTimeout(resolve, type === "kernel_info_request" ? 100 : timeoutMs).unref()),
    ]);
    return { reply: answer, outputs: this.published.filter((message) => message.parent.msg_id === id), id };
  }

  async heartbeat(bytes: Buffer): Promise<Buffer> {
    await this.#heartbeat.send(bytes);
    return (await this.#heartbeat.receive())[0]!;
  }

  close(): void {
    for (const socket of [this.#shell, this.#control, this.#iopub, this.#heartbeat]) socket.close();
  }

  #parse(frames: readonly Buffer[]): Received {
    const start = frames.findIndex((frame) => frame.toString() === "<IDS|MSG>");
    const parts = frames.slice(start + 2, start + 6);
    if (frames[start + 1]!.toString() !== this.sign(parts)) throw new Error("the kernel signed wrongly");
    const [header, parent, , content] = parts.map((part) => JSON.parse(part.toString()) as Record<string, unknown>);
    return { type: String(header!.msg_type), header: header!, parent: parent!, content: content! };
  }

  async #readReplies(socket: Dealer): Promise<void> {
    for await (const frames of socket) {
      const message = this.#parse(frames);
      this.#replies.get(String(message.parent.msg_id))?.(message);
    }
  }

  async #readPublished(): Promise<void> {
    for await (const frames of this.#iopub) {
      const message = this.#parse(frames);
      this.published.push(message);
      if (message.type === "status" && message.content.execution_state === "idle")
        this.#idle.get(String(message.parent.msg_id))?.();
    }
  }
}
