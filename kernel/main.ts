import { randomUUID } from "node:crypto";
import { readFileSync, statSync } from "node:fs";
import { ConnectionError, readConnection } from "./connection.ts";
import { createKernelCore } from "./core.ts";
import { bindSockets } from "./sockets.ts";
import { createWire } from "./wire.ts";
import { workerInterpreter } from "./worker-interpreter.ts";

/** How often the kernel looks whether the program that started it is still there. */
const parentCheckMs = 1000;

function packageVersion(): string {
  for (const place of ["../package.json", "../../package.json"]) {
    try {
      return (JSON.parse(readFileSync(new URL(place, import.meta.url), "utf8")) as { version: string }).version;
    } catch {
      // Sources and the build lie at different depths; the other place has it.
    }
  }
  return "unknown";
}

/** The interpreter's thread: joined into few files where the build did so, since opening hundreds of modules takes seconds. */
function workerFile(): URL {
  const folder = new URL(import.meta.url.endsWith(".ts") ? "../dist/kernel/" : "./", import.meta.url);
  const plain = new URL("worker.js", folder);
  const joined = new URL("bundle/worker.js", folder);
  try {
    return statSync(joined).mtimeMs >= statSync(new URL("../src/cli/main.js", folder)).mtimeMs ? joined : plain;
  } catch {
    return plain;
  }
}

/** Calls `leave` once the parent has gone: its process id is no longer there, or this process has been handed to another. */
function watchParent(leave: () => void): void {
  const given = Number(process.env.JPY_PARENT_PID ?? "");
  const first = process.ppid;
  setInterval(() => {
    if (process.ppid !== first) leave();
    if (!Number.isInteger(given) || given <= 1) return;
    try {
      process.kill(given, 0);
    } catch (error) {
      if ((error as NodeJS.ErrnoException).code === "ESRCH") leave();
    }
  }, parentCheckMs).unref();
}

/**
 * Runs the kernel until it is told to stop or its parent is gone.
 * @param connectionFile path of the connection file that the front end wrote
 * @returns only when the kernel could not start: the exit code
 */
export async function runKernel(connectionFile: string): Promise<number> {
  const verbose = process.env.MEANWISE_LOG === "1";
  const log = (line: string) => {
    if (verbose) process.stderr.write(`${line}\n`);
  };
  const identity = randomUUID();
  const documentName = process.env.JPY_SESSION_NAME?.split(/[\\/]/).at(-1) ?? null;
  const file = workerFile();
  try {
    const connection = readConnection(connectionFile);
    const wire = createWire(connection.key, identity);
    const sockets = await bindSockets(connection, wire, identity, log);
    const interpreter = workerInterpreter(file, documentName, log);
    const leave = (code: number) => {
      sockets.close();
      // Lets zeromq hand over what is still queued; nothing else keeps the process.
      setTimeout(() => process.exit(code), 50);
    };
    const core = createKernelCore({
      server: sockets.server,
      interpreter,
      version: packageVersion(),
      onShutdown: () => leave(0),
      log,
    });
    process.on("SIGINT", () => interpreter.interrupt());
    process.on("SIGTERM", () => {
      interpreter.interrupt();
      interpreter.shutdown().finally(() => leave(0));
    });
    watchParent(() => {
      interpreter.interrupt();
      interpreter.shutdown().finally(() => leave(0));
    });
    sockets.listen((channel, message) => core.receive(channel, message));
    await core.announce();
    return await new Promise<number>(() => {});
  } catch (error) {
    const message =
      error instanceof ConnectionError
        ? error.message
        : `The kernel could not start: ${error instanceof Error ? error.message : String(error)}`;
    process.stderr.write(`meanwise kernel: ${message.replace(/\s+/g, " ")}\n`);
    return 1;
  }
}
