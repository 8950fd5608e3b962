/** Tasks that compute workers run. */
export async function runTask(task: string, _input: unknown): Promise<unknown> {
  throw new Error(`there is no task "${task}"`);
}
