import { type ChildProcess, spawn } from "node:child_process";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import type { Connection } from "../../kernel/connection.ts";
import { Client, freshConnection } from "./client.ts";
import { built } from "./front-ends.ts";

export interface Running {
  readonly process: ChildProcess;
  readonly client: Client;
  readonly folder: string;
  readonly connection: Connection;
  /** Resolves with the exit code (or the signal) once the process is gone. */
  readonly ended: Promise<number | string>;
  /** What the process wrote on standard output and error. */
  readonly said: () => string;
  readonly stop: () => Promise<void>;
}

export function writeConnection(folder: string, connection: Connection): string {
  const file = join(folder, "connection file.json");
  writeFileSync(
    file,
    JSON.stringify({
      transport: connection.transport,
      ip: connection.ip,
      key: connection.key,
      signature_scheme: "hmac-sha256",
      shell_port: connection.ports.shell,
      control_port: connection.ports.control,
      iopub_port: connection.ports.iopub,
      stdin_port: connection.ports.stdin,
      hb_port: connection.ports.heartbeat,
    }),
  );
  return file;
}

/** Starts the built kernel in a folder of its own (its name has a space) and waits until it publishes. */
export async function startKernel(
  options: {
    readonly connection?: Connection;
    readonly environment?: Readonly<Record<string, string>>;
    readonly wait?: boolean;
    readonly nodeWords?: readonly string[];
  } = {},
): Promise<Running> {
  const folder = mkdtempSync(join(tmpdir(), "meanwise kernel "));
  const connection = options.connection ?? (await freshConnection());
  const file = writeConnection(folder, connection);
  const environment: NodeJS.ProcessEnv = { ...process.env, ...options.environment };
  if (options.environment?.JPY_SESSION_NAME === undefined) delete environment.JPY_SESSION_NAME;
  const child = spawn(process.execPath, [...(options.nodeWords ?? []), built, "kernel", "run", file], {
    cwd: folder,
    env: environment,
    stdio: ["ignore", "pipe", "pipe"],
  });
  let text = "";
  child.stdout?.on("data", (part) => {
    text += String(part);
  });
  child.stderr?.on("data", (part) => {
    text += String(part);
  });
  const ended = new Promise<number | string>((resolve) =>
    child.on("close", (code, signal) => resolve(code ?? signal ?? "")),
  );
  const client = new Client(connection);
  if (options.wait !== false) await client.ready();
  return {
    process: child,
    client,
    folder,
    connection,
    ended,
    said: () => text,
    async stop() {
      if (child.exitCode === null && child.signalCode === null) child.kill("SIGKILL");
      await ended;
      client.close();
      rmSync(folder, { recursive: true, force: true });
    },
  };
}
