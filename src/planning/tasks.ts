import { type SimulationInput, simulateStudies } from "./simulate.ts";

/**
 * Tasks that compute workers run: plain data in, plain data out.
 * @param task  "simulate studies"
 * @throws Error for a task that does not exist
 */
export function runTask(task: string, input: unknown): unknown {
  if (task === "simulate studies") return simulateStudies(input as SimulationInput);
  throw new Error(`there is no task "${task}"`);
}
