import { parentPort, workerData } from "node:worker_threads";
import { type Part, PartReader, type WorkerPlan } from "./chunk-job.ts";

const reader = new PartReader(workerData as WorkerPlan);

parentPort?.on("message", (message: Part | "subjects") => {
  try {
    if (message !== "subjects") {
      parentPort?.postMessage(reader.read(message));
      return;
    }
    const answer = reader.subjects();
    // Handed over, not copied: with a million subjects that is what takes the time.
    const buffers = answer === null ? [] : [answer.sums, answer.firsts, answer.labels.bytes, answer.labels.ends];
    parentPort?.postMessage(
      answer,
      buffers.map((array) => array.buffer),
    );
  } catch (error) {
    const code = error instanceof Error && "code" in error ? String(error.code) : "";
    parentPort?.postMessage({ failure: { code, message: error instanceof Error ? error.message : String(error) } });
  }
});
