import { parentPort, workerData } from "node:worker_threads";
import { type Part, PartReader, type WorkerPlan } from "./chunk-job.ts";

const reader = new PartReader(workerData as WorkerPlan);

parentPort?.on("message", (message: Part | "subjects") => {
  try {
    parentPort?.postMessage(message === "subjects" ? reader.subjects() : reader.read(message));
  } catch (error) {
    const code = error instanceof Error && "code" in error ? String(error.code) : "";
    parentPort?.postMessage({ failure: { code, message: error instanceof Error ? error.message : String(error) } });
  }
});
