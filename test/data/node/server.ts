import { spawn, spawnSync } from "node:child_process";
import {
  chmodSync,
  chownSync,
  existsSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from "node:fs";
import { createServer } from "node:net";
import { tmpdir } from "node:os";
import { join } from "node:path";

/** A PostgreSQL server of the test's own, on loopback, in a temporary folder. */
export interface TestServer {
  readonly port: number;
  readonly password: string;
  stop(): void;
  /** Ends the server at once, as a crash would. */
  crash(): void;
}

function programs(): string | null {
  const top = "/usr/lib/postgresql";
  if (!existsSync(top)) return null;
  const versions = readdirSync(top).sort((left, right) => Number(right) - Number(left));
  const found = versions.map((version) => join(top, version, "bin")).find((bin) => existsSync(join(bin, "initdb")));
  return found ?? null;
}

/** The server refuses to run as root: then as the user that the packages made for it, or as nobody. */
function plainUser(): { readonly uid: number; readonly gid: number } | null {
  if (process.getuid?.() !== 0) return null;
  const entries = readFileSync("/etc/passwd", "utf8")
    .split("\n")
    .map((line) => line.split(":"));
  const entry = entries.find(([name]) => name === "postgres") ?? entries.find(([name]) => name === "nobody");
  return entry === undefined ? null : { uid: Number(entry[2]), gid: Number(entry[3]) };
}

function freePort(): Promise<number> {
  return new Promise((resolve, reject) => {
    const probe = createServer();
    probe.on("error", reject);
    probe.listen(0, "127.0.0.1", () => {
      const address = probe.address();
      probe.close(() => resolve(typeof address === "object" && address !== null ? address.port : 0));
    });
  });
}

/** Why the tests with a server cannot run here, or null. */
export const serverMissing: string | null =
  programs() === null ? "no PostgreSQL programs under /usr/lib/postgresql" : null;

export async function startServer(): Promise<TestServer> {
  const bin = programs()!;
  const user = plainUser();
  const folder = mkdtempSync(join(tmpdir(), "meanwise-postgres-"));
  const password = "only for this test";
  const passwordFile = join(folder, "password");
  writeFileSync(passwordFile, password);
  chmodSync(folder, 0o700);
  if (user !== null) {
    chownSync(folder, user.uid, user.gid);
    chownSync(passwordFile, user.uid, user.gid);
  }
  const as = user === null ? {} : user;
  const cluster = join(folder, "cluster");
  const made = spawnSync(
    join(bin, "initdb"),
    [
      "-D",
      cluster,
      "-U",
      "lab",
      "--auth=scram-sha-256",
      `--pwfile=${passwordFile}`,
      "--no-sync",
      "--encoding=UTF8",
      "--locale=C",
    ],
    { ...as, cwd: folder, encoding: "utf8" },
  );
  if (made.status !== 0) throw new Error(`initdb: ${made.stderr}`);
  const port = await freePort();
  const server = spawn(
    join(bin, "postgres"),
    [
      "-D",
      cluster,
      "-p",
      String(port),
      "-c",
      "listen_addresses=127.0.0.1",
      "-c",
      `unix_socket_directories=${folder}`,
      "-c",
      "fsync=off",
    ],
    { ...as, cwd: folder, stdio: ["ignore", "ignore", "pipe"] },
  );
  await new Promise<void>((resolve, reject) => {
    let said = "";
    server.stderr.on("data", (bytes: Buffer) => {
      said += String(bytes);
      if (said.includes("ready to accept connections")) resolve();
    });
    server.on("exit", () => reject(new Error(`postgres: ${said}`)));
  });
  const end = (signal: "SIGINT" | "SIGQUIT") => {
    server.kill(signal);
  };
  return {
    port,
    password,
    crash: () => end("SIGQUIT"),
    stop() {
      end("SIGINT");
      server.once("exit", () => rmSync(folder, { recursive: true, force: true }));
      if (server.exitCode !== null) rmSync(folder, { recursive: true, force: true });
    },
  };
}
