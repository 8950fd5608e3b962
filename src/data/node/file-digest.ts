import { createHash } from "node:crypto";
import { createReadStream } from "node:fs";
import { stat } from "node:fs/promises";
import type { Watch } from "../../host/index.ts";
import { fileProblem } from "./part-readers.ts";

/**
 * SHA-256 of a file of any size, in hexadecimal digits, as the record keeps it.
 * @throws HostError "missing-file", "unreadable-file"; Interrupted
 */
export async function fileDigest(path: string, watch: Watch): Promise<string> {
  const hash = createHash("sha256");
  try {
    const { size } = await stat(path);
    let done = 0;
    for await (const piece of createReadStream(path, { highWaterMark: 1 << 22 })) {
      watch.checkpoint();
      hash.update(piece as Uint8Array);
      done += (piece as Uint8Array).length;
      watch.progress(Math.min(done, size), size, "checking the file");
    }
  } catch (error) {
    throw fileProblem(error, path);
  }
  return hash.digest("hex");
}
