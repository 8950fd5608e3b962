import type { Note } from "../results/index.ts";
import { DataProblem } from "./problem.ts";

/** Bytes to text. UTF-8, UTF-16 and, where it is neither, Windows-1252 (a superset of Latin-1), which is said. */
export function decodeText(bytes: Uint8Array): { readonly text: string; readonly notes: readonly Note[] } {
  const said = (encoding: string): readonly Note[] => [{ code: "encoding-detected", facts: { encoding } }];
  if (bytes[0] === 0xef && bytes[1] === 0xbb && bytes[2] === 0xbf) {
    return { text: strict("utf-8", bytes.subarray(3)), notes: [] };
  }
  if (bytes[0] === 0xff && bytes[1] === 0xfe)
    return { text: strict("utf-16le", bytes.subarray(2)), notes: said("UTF-16") };
  if (bytes[0] === 0xfe && bytes[1] === 0xff)
    return { text: strict("utf-16be", bytes.subarray(2)), notes: said("UTF-16") };
  const sample = bytes.subarray(0, 2000);
  const zeros = [0, 0];
  for (let index = 0; index < sample.length; index++) if (sample[index] === 0) zeros[index & 1]!++;
  if (zeros[1]! > sample.length / 5 && zeros[0] === 0)
    return { text: strict("utf-16le", bytes), notes: said("UTF-16") };
  if (zeros[0]! > sample.length / 5 && zeros[1] === 0)
    return { text: strict("utf-16be", bytes), notes: said("UTF-16") };
  if (zeros[0]! + zeros[1]! > 0) throw new DataProblem("bad-encoding");
  try {
    return { text: new TextDecoder("utf-8", { fatal: true }).decode(bytes), notes: [] };
  } catch {
    return { text: new TextDecoder("windows-1252").decode(bytes), notes: said("Latin-1 (Windows-1252)") };
  }
}

function strict(encoding: string, bytes: Uint8Array): string {
  try {
    return new TextDecoder(encoding, { fatal: true }).decode(bytes);
  } catch {
    throw new DataProblem("bad-encoding");
  }
}
