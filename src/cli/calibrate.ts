import { UsageError, withUsage } from "./arguments.ts";

/** `meanwise calibrate`: sharded calibration on the command line. */
export async function calibrateCommand(_words: readonly string[]): Promise<number> {
  return withUsage(async () => {
    throw new UsageError(
      "calibrate on the command line is not available yet in this version; write calibrate FAMILY with 20000 studies in the document.",
    );
  });
}
