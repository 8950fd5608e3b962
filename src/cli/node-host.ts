import { existsSync } from "node:fs";
import { open, readdir, readFile, rename, rm } from "node:fs/promises";
import { basename, dirname, join, resolve } from "node:path";
import { randomBytes } from "node:crypto";
import { type Host, HostError, silentWatch, type Watch } from "../host/index.ts";
import { computePool } from "./compute-pool.ts";
import { appendDurably, FileGrew } from "./append-file.ts";
import { svgToPng } from "./svg-to-png.ts";

export interface NodeHostOptions {
  /** Folder that relative paths start from: the notebook's own. */
  readonly folder: string;
  /** Name of the notebook or script, without folder; null when unknown. */
  readonly documentName: string | null;
  readonly watch?: Watch;
  /** Compute workers; as many as cores when left out. */
  readonly workers?: number;
}

function codeOf(error: unknown): string {
  return typeof error === "object" && error !== null && "code" in error ? String(error.code) : "";
}

function readingError(error: unknown, path: string): HostError {
  const code = codeOf(error);
  if (code === "ENOENT" || code === "ENOTDIR")
    return new HostError("missing-file", path, `There is no file "${path}".`);
  if (code === "EISDIR") return new HostError("unreadable-file", path, `"${path}" is a folder, not a file.`);
  if (code === "EACCES" || code === "EPERM")
    return new HostError("unreadable-file", path, `"${path}" may not be read by this user.`);
  return new HostError("unreadable-file", path, `"${path}" could not be read (${code || "unknown reason"}).`);
}

function writingError(error: unknown, path: string): HostError {
  const code = codeOf(error);
  if (code === "ENOSPC" || code === "EDQUOT")
    return new HostError("disk-full", path, `The disk is full: "${path}" was not written.`);
  if (code === "ENOENT") return new HostError("unwritable-file", path, `The folder of "${path}" does not exist.`);
  if (code === "EISDIR") return new HostError("unwritable-file", path, `"${path}" is a folder.`);
  return new HostError("unwritable-file", path, `"${path}" could not be written (${code || "unknown reason"}).`);
}

/** Writes beside, flushes, renames: a crash at any moment leaves the old file or the new one, never a part. */
async function replaceFile(path: string, bytes: Uint8Array): Promise<void> {
  const beside = `${path}.${randomBytes(6).toString("hex")}.part`;
  try {
    const file = await open(beside, "wx");
    try {
      await file.writeFile(bytes);
      await file.sync();
    } finally {
      await file.close();
    }
    await rename(beside, path);
  } catch (error) {
    await rm(beside, { force: true });
    throw error;
  }
}

/** The host of the command line and the kernel: files, clock, seeds, workers and pictures of this computer. */
export function nodeHost(options: NodeHostOptions): Host {
  const place = (path: string) => resolve(options.folder, path);
  const watch = options.watch ?? silentWatch;
  return {
    async readBytes(path) {
      try {
        return new Uint8Array(await readFile(place(path)));
      } catch (error) {
        throw readingError(error, path);
      }
    },
    async writeBytes(path, bytes) {
      try {
        await replaceFile(place(path), bytes);
      } catch (error) {
        throw writingError(error, path);
      }
    },
    async appendLine(path, line, at) {
      try {
        await appendDurably(place(path), line, at ?? null);
      } catch (error) {
        if (error instanceof FileGrew)
          throw new HostError("file-grew", path, `Another session wrote to "${path}" meanwhile.`);
        throw writingError(error, path);
      }
    },
    async exists(path) {
      return existsSync(place(path));
    },
    async listFiles(folder) {
      try {
        const entries = await readdir(place(folder), { withFileTypes: true });
        return entries.map((entry) => (entry.isDirectory() ? `${entry.name}/` : entry.name)).sort();
      } catch {
        return [];
      }
    },
    now: () => Date.now(),
    randomSeed: () => randomBytes(4).readUInt32LE(),
    runJobs: (jobs, jobWatch) => computePool(options.workers).run(jobs, jobWatch),
    svgToPng,
    // Loaded with the first database: nothing else should wait for it.
    bulk: {
      readDatabase: async (source, databaseWatch) =>
        (await import("../data/node/index.ts")).databaseTable(source, databaseWatch),
    },
    watch,
    documentName: options.documentName,
    environment: { node: process.versions.node, platform: `${process.platform}-${process.arch}` },
  };
}

/** Host for a document: its folder is where relative paths start. */
export function hostForDocument(path: string, options: Omit<NodeHostOptions, "folder" | "documentName"> = {}): Host {
  const whole = resolve(path);
  return nodeHost({ ...options, folder: dirname(whole), documentName: basename(whole) });
}

export { join as joinPath };
