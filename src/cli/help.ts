import { presentProblems, presentText } from "../present/index.ts";
import { openSession, runCell } from "../session/index.ts";
import { nodeHost } from "./node-host.ts";
import { packageVersion } from "./run.ts";

/** `meanwise help [TOPIC]`: the same answer as the statement. */
export async function helpCommand(words: readonly string[]): Promise<number> {
  const host = nodeHost({ folder: process.cwd(), documentName: null });
  const source = `help ${words.join(" ")}`.trim();
  const done = await runCell(await openSession(host, packageVersion()), source, { cell: 1, host });
  if (done.problems.length > 0) {
    process.stderr.write(`${presentProblems(done.problems, source).text}\n`);
    return 2;
  }
  for (const { result } of done.outcomes) if (result !== null) process.stdout.write(`${presentText(result)}\n`);
  return 0;
}
