import { readFileSync } from "node:fs";

/** What the front end writes into the connection file. */
export interface Connection {
  readonly transport: "tcp" | "ipc";
  readonly ip: string;
  readonly key: string;
  readonly ports: Readonly<Record<"shell" | "control" | "iopub" | "stdin" | "heartbeat", number>>;
}

/** A connection file that cannot be used; the message fits on one line of stderr. */
export class ConnectionError extends Error {}

/**
 * Reads a connection file.
 * @throws ConnectionError naming what is missing or not supported
 */
export function readConnection(path: string): Connection {
  let value: Record<string, unknown>;
  try {
    value = JSON.parse(readFileSync(path, "utf8")) as Record<string, unknown>;
  } catch (error) {
    throw new ConnectionError(
      `The connection file could not be read: ${error instanceof Error ? error.message : String(error)}`,
    );
  }
  const port = (name: string): number => {
    const number = value[name];
    if (typeof number !== "number" || !Number.isInteger(number) || number < 1) {
      throw new ConnectionError(`The connection file has no usable "${name}".`);
    }
    return number;
  };
  const transport = value.transport ?? "tcp";
  if (transport !== "tcp" && transport !== "ipc") {
    throw new ConnectionError(`The transport "${String(transport)}" is not supported; tcp and ipc are.`);
  }
  const scheme = value.signature_scheme ?? "hmac-sha256";
  if (value.key && scheme !== "hmac-sha256") {
    throw new ConnectionError(`The signature scheme "${String(scheme)}" is not supported; hmac-sha256 is.`);
  }
  return {
    transport,
    ip: typeof value.ip === "string" && value.ip !== "" ? value.ip : "127.0.0.1",
    key: typeof value.key === "string" ? value.key : "",
    ports: {
      shell: port("shell_port"),
      control: port("control_port"),
      iopub: port("iopub_port"),
      stdin: port("stdin_port"),
      heartbeat: port("hb_port"),
    },
  };
}

/** Address of one channel: the connection file's own address, never another one. */
export function addressOf(connection: Connection, channel: keyof Connection["ports"]): string {
  const port = connection.ports[channel];
  if (connection.transport === "ipc") return `ipc://${connection.ip}-${port}`;
  const host = connection.ip.includes(":") && !connection.ip.startsWith("[") ? `[${connection.ip}]` : connection.ip;
  return `tcp://${host}:${port}`;
}
