import { existsSync, readFileSync, statSync } from "node:fs";
import { homedir, userInfo } from "node:os";
import { join } from "node:path";
import pg from "pg";
import { HostError } from "../../host/index.ts";
import { DataProblem } from "../problem.ts";

/** Whom to call, without a secret: a password comes from the environment, a service file or a password file. */
interface Target {
  readonly host?: string;
  readonly port?: number;
  readonly database?: string;
  readonly user?: string;
  readonly password?: string;
  readonly ssl?: boolean | { readonly rejectUnauthorized: boolean };
  /** For messages: the address without user and secret. */
  readonly named: string;
}

/** One section of a service file (`[name]`, then `key=value` lines). */
function serviceSection(name: string): ReadonlyMap<string, string> {
  const { PGSERVICEFILE, PGSYSCONFDIR } = process.env;
  const files = [
    PGSERVICEFILE ?? join(homedir(), ".pg_service.conf"),
    ...(PGSYSCONFDIR === undefined ? [] : [join(PGSYSCONFDIR, "pg_service.conf")]),
  ];
  for (const file of files.filter(existsSync)) {
    let inside = false;
    const found = new Map<string, string>();
    for (const line of readFileSync(file, "utf8").split(/\r?\n/)) {
      const section = /^\s*\[(.+)\]\s*$/.exec(line);
      if (section !== null) inside = section[1] === name;
      const entry = /^\s*([a-z_]+)\s*=\s*(.*?)\s*$/.exec(line);
      if (inside && entry !== null) found.set(entry[1]!, entry[2]!);
    }
    if (found.size > 0) return found;
  }
  throw new DataProblem("unknown-service", { service: name });
}

/** Password of a line `host:port:database:user:password` of the password file; stars fit anything. Others must not be able to read the file. */
function filedPassword(target: Omit<Target, "named" | "password">): string | undefined {
  const file = process.env.PGPASSFILE ?? join(homedir(), ".pgpass");
  if (!existsSync(file) || (process.platform !== "win32" && (statSync(file).mode & 0o077) !== 0)) return undefined;
  const { PGHOST, PGPORT, PGDATABASE, PGUSER } = process.env;
  const user = target.user ?? PGUSER ?? userInfo().username;
  const wanted = [
    target.host ?? PGHOST ?? "localhost",
    String(target.port ?? PGPORT ?? 5432),
    target.database ?? PGDATABASE ?? user,
    user,
  ];
  for (const line of readFileSync(file, "utf8").split(/\r?\n/)) {
    if (line.startsWith("#")) continue;
    const parts = [...line.matchAll(/((?:\\.|[^:\\])*)(?::|$)/g)].map((found) => found[1]!.replace(/\\(.)/g, "$1"));
    if (parts.length >= 5 && wanted.every((value, index) => parts[index] === "*" || parts[index] === value))
      return parts[4];
  }
  return undefined;
}

/** @throws DataProblem "password-in-address", "not-an-address", "unknown-service" */
export function databaseTarget(address: string): Target {
  let url: URL;
  try {
    url = new URL(address);
  } catch {
    throw new DataProblem("not-an-address");
  }
  if (!/^postgres(ql)?:$/.test(url.protocol)) throw new DataProblem("not-an-address");
  if (url.password !== "" || url.searchParams.has("password")) throw new DataProblem("password-in-address");
  const service = url.searchParams.get("service") ?? process.env.PGSERVICE ?? null;
  const from = service === null ? new Map<string, string>() : serviceSection(service);
  const own = (value: string) => (value === "" ? undefined : decodeURIComponent(value));
  const host = own(url.searchParams.get("host") ?? url.hostname) ?? from.get("host");
  const port = own(url.port) ?? url.searchParams.get("port") ?? from.get("port");
  const database = own(url.pathname.replace(/^\//, "")) ?? from.get("dbname");
  const user = own(url.username) ?? from.get("user");
  const password = from.get("password");
  const mode = url.searchParams.get("sslmode") ?? from.get("sslmode");
  return {
    ...(host === undefined ? {} : { host }),
    ...(port === undefined ? {} : { port: Number(port) }),
    ...(database === undefined ? {} : { database }),
    ...(user === undefined ? {} : { user }),
    ...(password === undefined ? {} : { password }),
    ...(mode === undefined || mode === "disable" || mode === "allow" || mode === "prefer"
      ? {}
      : { ssl: mode === "require" ? { rejectUnauthorized: false } : true }),
    named: `${host ?? process.env.PGHOST ?? "localhost"}/${database ?? process.env.PGDATABASE ?? ""}`,
  };
}

/** What the database or the way to it answered, in words. */
export function databaseProblem(error: unknown, named: string): unknown {
  if (!(error instanceof Error) || error instanceof DataProblem || error instanceof HostError) return error;
  const code = "code" in error ? String(error.code) : "";
  if (/^28/.test(code) || /password|SASL|authentication/i.test(error.message))
    return new DataProblem("database-refused", { database: named });
  if (code === "3D000") return new DataProblem("unknown-database", { database: named });
  if (code === "42501") return new DataProblem("database-not-allowed", { database: named });
  if (code === "22012") return new DataProblem("division-by-zero", { column: "the derived column" });
  if (code === "2201E")
    return new DataProblem("log-of-nonpositive", {
      column: "the derived column",
      value: "a value that is not above zero",
    });
  if (code === "2201F")
    return new DataProblem("root-of-negative", { column: "the derived column", value: "a negative value" });
  if (code === "22003") return new DataProblem("not-finite", { column: "the derived column" });
  if (
    /^(08|57P|ECONN|ENOTFOUND|EHOSTUNREACH|ETIMEDOUT|EPIPE|EAI_AGAIN|ENOENT)/.test(code) ||
    /terminated|not queryable|timeout/i.test(error.message)
  ) {
    const refused = code === "ECONNREFUSED" || code === "ENOTFOUND" || code === "ENOENT" || code === "EAI_AGAIN";
    return new HostError(
      "lost-connection",
      named,
      refused
        ? `No database answers at ${named}.`
        : `The connection to the database at ${named} was lost; nothing was taken in.`,
    );
  }
  return error;
}

export type Ask = (sql: string, values?: readonly unknown[]) => Promise<(string | null)[][]>;

/**
 * Opens a connection, lends it inside one read-only transaction that sees the data as of one moment, and closes it.
 * Values come as texts.
 * @param stop called with a way to cancel the statement that runs
 */
export async function withDatabase<Answer>(
  address: string,
  work: (ask: Ask) => Promise<Answer>,
  stop: (cancel: () => Promise<void>) => void,
): Promise<Answer> {
  const { named, ...target } = databaseTarget(address);
  const password = target.password ?? process.env.PGPASSWORD ?? filedPassword(target) ?? "";
  const options = {
    ...target,
    // As a function, so that the client looks nowhere else.
    password: async () => password,
    connectionTimeoutMillis: 15_000,
    application_name: "meanwise",
    options: "-c standard_conforming_strings=on -c extra_float_digits=1 -c DateStyle=ISO",
  };
  const client = new pg.Client(options);
  // A connection that is lost between statements must not end the process.
  let lost: unknown = null;
  client.on("error", (error) => {
    lost = error;
  });
  const ask: Ask = async (sql, values = []) => {
    if (lost !== null) throw lost;
    const result = await client.query({
      text: sql,
      values: [...values],
      rowMode: "array",
      types: { getTypeParser: () => (value: string) => value },
    });
    return result.rows as (string | null)[][];
  };
  try {
    await client.connect();
    const [[process]] = (await ask("SELECT pg_backend_pid()")) as [[string]];
    stop(async () => {
      const second = new pg.Client(options);
      second.on("error", () => {});
      try {
        await second.connect();
        await second.query("SELECT pg_cancel_backend($1)", [Number(process)]);
      } finally {
        await second.end().catch(() => {});
      }
    });
    await ask("BEGIN ISOLATION LEVEL REPEATABLE READ READ ONLY");
    const answer = await work(ask);
    await ask("COMMIT");
    return answer;
  } catch (error) {
    throw databaseProblem(error, named);
  } finally {
    await client.end().catch(() => {});
  }
}
