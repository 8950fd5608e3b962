import { parentPort } from "node:worker_threads";
import type { Job } from "../host/index.ts";
import { runTask } from "../planning/tasks.ts";

parentPort?.on("message", async (job: Job) => {
  try {
    parentPort?.postMessage({ value: await runTask(job.task, job.input) });
  } catch (error) {
    const { name, message, ...facts } =
      error instanceof Error
        ? { ...error, name: error.name, message: error.message }
        : { name: "Error", message: String(error) };
    parentPort?.postMessage({ error: { name, message, facts: JSON.parse(JSON.stringify(facts)) } });
  }
});
