import { expect } from "vitest";

/** Agrees to a relative error (absolute where the wanted value is below 1e-300). */
export function expectClose(value: number | null | undefined, wanted: number, relative: number, what = ""): void {
  const error = Math.abs(value! - wanted) / Math.max(Math.abs(wanted), 1e-300);
  expect(error, `${what}: ${value} for ${wanted}`).toBeLessThanOrEqual(relative);
}
