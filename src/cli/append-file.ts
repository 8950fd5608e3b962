import { randomBytes } from "node:crypto";
import { type FileHandle, open, readFile, rm, stat } from "node:fs/promises";
import { dirname } from "node:path";
import { setTimeout as wait } from "node:timers/promises";

/** Somebody else wrote to the file since its length was taken. */
export class FileGrew extends Error {}

const patience = 10_000;
const pause = 3;

function isAlive(process_: number): boolean {
  try {
    process.kill(process_, 0);
    return true;
  } catch (error) {
    return (error as NodeJS.ErrnoException).code === "EPERM";
  }
}

/** Whether the holder of a lock is gone: a killed process leaves its lock behind, whole or still empty. */
async function isAbandoned(lock: string): Promise<boolean> {
  try {
    const holder = Number.parseInt(await readFile(lock, "utf8"), 10);
    if (Number.isSafeInteger(holder)) return !isAlive(holder);
    return Date.now() - (await stat(lock)).mtimeMs > 1000;
  } catch {
    return false;
  }
}

/** Runs `body` while no other process does so for the same file. */
async function alone<T>(path: string, body: () => Promise<T>): Promise<T> {
  const lock = `${path}.lock`;
  const token = `${process.pid} ${randomBytes(8).toString("hex")}`;
  const until = Date.now() + patience;
  for (;;) {
    try {
      const file = await open(lock, "wx");
      await file.writeFile(token);
      await file.close();
      // Two who found the same abandoned lock may both have removed it; only the one whose token stands goes on.
      if ((await readFile(lock, "utf8").catch(() => "")) === token) break;
    } catch (error) {
      if ((error as NodeJS.ErrnoException).code !== "EEXIST") throw error;
      if (await isAbandoned(lock)) await rm(lock, { force: true });
    }
    if (Date.now() > until) throw new FileGrew();
    await wait(pause * (1 + Math.random()));
  }
  try {
    return await body();
  } finally {
    await rm(lock, { force: true });
  }
}

async function openForAppending(path: string): Promise<FileHandle> {
  try {
    return await open(path, "r+");
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code !== "ENOENT") throw error;
  }
  const file = await open(path, "wx+");
  try {
    // The new name must outlive a power cut as well.
    const folder = await open(dirname(path), "r");
    await folder.sync().finally(() => folder.close());
  } catch {
    // Not every system lets a folder be flushed.
  }
  return file;
}

/**
 * Appends a line and flushes it to the disk.
 * @param at length in bytes up to which the caller knows the file, or null; a torn line beyond it is cut off
 * @throws FileGrew when a whole line stands beyond `at`, or the file is shorter; errors of the file system otherwise
 */
export async function appendDurably(path: string, line: string, at: number | null): Promise<void> {
  await alone(path, async () => {
    const file = await openForAppending(path);
    try {
      const { size } = await file.stat();
      const start = at ?? size;
      if (size < start) throw new FileGrew();
      if (size > start) {
        const beyond = Buffer.alloc(size - start);
        await file.read(beyond, 0, beyond.length, start);
        if (beyond.includes(10)) throw new FileGrew();
        await file.truncate(start);
      }
      const bytes = Buffer.from(line);
      try {
        let written = 0;
        while (written < bytes.length)
          written += (await file.write(bytes, written, bytes.length - written, start + written)).bytesWritten;
        await file.sync();
      } catch (error) {
        // A full disk must not leave half a line.
        await file.truncate(start).catch(() => {});
        throw error;
      }
    } finally {
      await file.close();
    }
  });
}
