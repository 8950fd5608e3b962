import type { Note } from "../results/index.ts";
import { DataProblem } from "./problem.ts";

/** How many bytes are looked at for the zeros that tell UTF-16 without a mark. */
const sniffedBytes = 2000;

/**
 * A file's bytes as UTF-8 without mark. UTF-8 stays as it is; UTF-16 and, where it is neither, Windows-1252 (a superset
 * of Latin-1's letters) are turned into it, which is said.
 * @throws DataProblem "bad-encoding"
 */
export function utf8Bytes(bytes: Uint8Array): { readonly bytes: Uint8Array; readonly notes: readonly Note[] } {
  const turned = (encoding: string, name: string, from: Uint8Array) => ({
    bytes: new TextEncoder().encode(strict(encoding, from)),
    notes: [{ code: "encoding-detected", facts: { encoding: name } }],
  });
  const marked = bytes[0] === 0xef && bytes[1] === 0xbb && bytes[2] === 0xbf;
  const plain = marked ? bytes.subarray(3) : bytes;
  if (bytes[0] === 0xff && bytes[1] === 0xfe) return turned("utf-16le", "UTF-16", bytes.subarray(2));
  if (bytes[0] === 0xfe && bytes[1] === 0xff) return turned("utf-16be", "UTF-16", bytes.subarray(2));
  const sample = plain.subarray(0, sniffedBytes);
  const zeros = [0, 0];
  for (let index = 0; index < sample.length; index++) if (sample[index] === 0) zeros[index & 1]!++;
  if (!marked && zeros[1]! > sample.length / 5 && zeros[0] === 0) return turned("utf-16le", "UTF-16", bytes);
  if (!marked && zeros[0]! > sample.length / 5 && zeros[1] === 0) return turned("utf-16be", "UTF-16", bytes);
  let signs = 0;
  for (let index = 0; index < plain.length; index++) {
    const code = plain[index]!;
    if (code === 0) throw new DataProblem("bad-encoding");
    signs |= code;
  }
  if (signs < 128) return { bytes: plain, notes: [] };
  try {
    new TextDecoder("utf-8", { fatal: true }).decode(plain);
    return { bytes: plain, notes: [] };
  } catch {
    if (marked) throw new DataProblem("bad-encoding");
    return turned("windows-1252", "Latin-1 (Windows-1252)", bytes);
  }
}

function strict(encoding: string, bytes: Uint8Array): string {
  try {
    return new TextDecoder(encoding, { fatal: true }).decode(bytes);
  } catch {
    throw new DataProblem("bad-encoding");
  }
}
