import { DataProblem } from "./problem.ts";

/** How many bytes are looked at to find the separator. */
const sniffedBytes = 1 << 16;
const candidates = [44, 59, 9, 124] as const;

export const separatorNames: Readonly<Record<number, string>> = { 44: "comma", 59: "semicolon", 9: "tab", 124: "bar" };

/** The byte of a separator that somebody named: by its word or as itself. */
export function separatorNamed(text: string): number {
  const byName = candidates.find((code) => separatorNames[code] === text.trim().toLowerCase());
  if (byName !== undefined) return byName;
  if (text === "\t" || text === "\\t") return 9;
  if (/^[ !#$%&'()*,/:;<=>?@[\]^_`{|}~]$/.test(text)) return text.charCodeAt(0);
  throw new DataProblem("separator-unknown", { value: text });
}

/** The separator is the one that stands equally often outside quotes in every line; among those, the most frequent. */
export function separatorOf(bytes: Uint8Array): number {
  const end = Math.min(bytes.length, sniffedBytes);
  const counts = candidates.map((): number[] => []);
  let line = candidates.map(() => 0);
  let quoted = false;
  let filled = false;
  const close = () => {
    if (filled) for (const [place, count] of line.entries()) counts[place]!.push(count);
    line = candidates.map(() => 0);
    filled = false;
  };
  for (let position = 0; position < end; position++) {
    const code = bytes[position]!;
    if (code === 34) quoted = !quoted;
    else if (quoted) continue;
    else if (code === 10) close();
    else {
      const place = candidates.indexOf(code as (typeof candidates)[number]);
      if (place >= 0) line[place]!++;
      if (code !== 32 && code !== 13) filled = true;
    }
  }
  // A line that the limit cut off says nothing about its end.
  if (end === bytes.length || counts[0]!.length === 0) close();
  const scores = counts.map((lines) => {
    const first = lines[0] ?? 0;
    const agreeing = lines.filter((count) => count === first).length;
    return first === 0 ? 0 : (agreeing / lines.length) * 1000 + Math.min(first, 500);
  });
  const best = scores.indexOf(Math.max(...scores));
  return scores[best]! > 0 ? candidates[best]! : 44;
}
