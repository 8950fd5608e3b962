import { rmSync } from "node:fs";
import { Publisher, Reply, Router } from "zeromq";
import { addressOf, type Connection, ConnectionError } from "./connection.ts";
import type { Server } from "./core.ts";
import type { Message, Wire } from "./wire.ts";

export interface Sockets {
  readonly server: Server;
  /** Starts reading; each message that passes the wire goes to `receive`. */
  listen(receive: (channel: "shell" | "control", message: Message) => void): void;
  close(): void;
}

/** One sender at a time per socket: a second send waits for the first. */
function inTurn(send: (frames: Buffer[]) => Promise<void>): (frames: Buffer[]) => Promise<void> {
  let last: Promise<void> = Promise.resolve();
  return (frames) => {
    const next = last.then(() => send(frames));
    last = next.catch(() => {});
    return next;
  };
}

/**
 * Binds the five sockets to the addresses of the connection file.
 * @throws ConnectionError when an address cannot be bound
 */
export async function bindSockets(
  connection: Connection,
  wire: Wire,
  identity: string,
  log: (line: string) => void,
): Promise<Sockets> {
  const sockets = {
    shell: new Router({ linger: 500 }),
    control: new Router({ linger: 500 }),
    stdin: new Router({ linger: 0 }),
    iopub: new Publisher({ linger: 500, sendHighWaterMark: 0 }),
    heartbeat: new Reply({ linger: 0 }),
  };
  const bound: (keyof typeof sockets)[] = [];
  for (const [channel, socket] of Object.entries(sockets)) {
    const address = addressOf(connection, channel as keyof typeof sockets);
    try {
      await socket.bind(address);
      bound.push(channel as keyof typeof sockets);
    } catch (error) {
      for (const other of Object.values(sockets)) other.close();
      removeIpcFiles(connection, bound);
      throw new ConnectionError(
        `The ${channel} address ${address} could not be bound: ${error instanceof Error ? error.message : String(error)}`,
      );
    }
  }
  const senders = {
    shell: inTurn((frames) => sockets.shell.send(frames)),
    control: inTurn((frames) => sockets.control.send(frames)),
    iopub: inTurn((frames) => sockets.iopub.send(frames)),
  };

  async function read(
    channel: "shell" | "control",
    receive: (channel: "shell" | "control", message: Message) => void,
  ): Promise<void> {
    for await (const frames of sockets[channel]) {
      const parsed = wire.parse(frames);
      if ("refused" in parsed) log(`kernel: ${channel}: message dropped: ${parsed.refused}`);
      else receive(channel, parsed.message);
    }
  }

  async function beat(): Promise<void> {
    for await (const frames of sockets.heartbeat) await sockets.heartbeat.send(frames);
  }

  /** Nothing is ever asked on stdin; what arrives is read and dropped, so that it cannot pile up. */
  async function drainInput(): Promise<void> {
    for await (const _ of sockets.stdin);
  }

  return {
    server: {
      reply: (channel, request, type, content) =>
        senders[channel](wire.assemble({ identities: request.identities, type, parent: request.header, content })),
      publish: (type, parent, content, metadata) =>
        senders.iopub(
          wire.assemble({
            identities: [`kernel.${identity}.${type}`],
            type,
            parent,
            content,
            ...(metadata === undefined ? {} : { metadata }),
          }),
        ),
    },
    listen(receive) {
      const ended = (channel: string) => (error: unknown) => log(`kernel: ${channel} ended: ${String(error)}`);
      read("shell", receive).catch(ended("shell"));
      read("control", receive).catch(ended("control"));
      beat().catch(ended("heartbeat"));
      drainInput().catch(ended("stdin"));
    },
    close() {
      for (const socket of Object.values(sockets)) socket.close();
      removeIpcFiles(connection, bound);
    },
  };
}

/** The socket library closes in the background and may not get round to removing its files before the process ends. */
function removeIpcFiles(connection: Connection, bound: readonly (keyof Connection["ports"])[]): void {
  if (connection.transport !== "ipc") return;
  for (const channel of bound) rmSync(addressOf(connection, channel).slice("ipc://".length), { force: true });
}
