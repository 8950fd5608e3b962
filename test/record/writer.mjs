// Writes entries to a ledger without end, each told on standard output once it is flushed: what was "shown". Arguments: folder, count or 0.
import { nodeHost } from "../../dist/src/cli/node-host.js";
import { appendEntry, readLedger } from "../../dist/src/record/index.js";

const [folder, count] = process.argv.slice(2);
const host = nodeHost({ folder, documentName: "study.mwise" });
const path = "study.ledger.jsonl";
const filler = "é".repeat(400);
for (let written = 0; count === "0" || written < Number(count); ) {
  const bytes = (await host.exists(path)) ? await host.readBytes(path) : new Uint8Array();
  const length = bytes.lastIndexOf(10) + 1;
  const { ledger } = readLedger(new TextDecoder().decode(bytes.subarray(0, length)));
  const { line, entry } = appendEntry(ledger, "result", { seen: true, writer: process.pid, written, filler }, 1_000_000);
  try {
    await host.appendLine(path, line, length);
  } catch (error) {
    if (error.code === "file-grew") continue;
    throw error;
  }
  process.stdout.write(`${entry.digest}\n`);
  written++;
}
