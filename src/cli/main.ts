#!/usr/bin/env node
import { readFileSync } from "node:fs";

const usage = `Meanwise: compare the means of several conditions, as planned, and show afterwards that it was done so.

  meanwise run FILE        run a script (.mwise) or a notebook (.ipynb)
    --json OUT             write every result as data
    --html OUT             write what each statement shows as one page
    --notebook OUT         write the notebook with its outputs
    --quiet                print nothing but errors
  meanwise report FILE --to OUT
                           run, and write the report (.html, .md or .docx)
  meanwise audit FILE      check the record of a notebook or a ledger file
  meanwise verify FILE     run a notebook again and compare every number with its record
  meanwise calibrate FILE FAMILY [--studies N] [--shard I/N] [--seed S] [--out OUT]
                           simulate the declared procedure; --merge FILE ... joins shards
  meanwise format FILE     write the statements in their settled form (--check only looks)
  meanwise help [TOPIC]    the language, a statement or a method
  meanwise kernel install [--prefix DIR] | uninstall [--prefix DIR] | list
                           the notebook kernel
  meanwise --version

Exit: 0 done; 1 a statement failed or a record is not whole; 2 the command itself was wrong; 130 stopped by Ctrl-C.`;

function version(): string {
  return (JSON.parse(readFileSync(new URL("../../../package.json", import.meta.url), "utf8")) as { version: string })
    .version;
}

/** Commands are loaded when they are called: the kernel must not wait for what only a report needs. */
async function main(words: readonly string[]): Promise<number> {
  const [command, ...rest] = words;
  switch (command) {
    case "run":
      return (await import("./run.ts")).runCommand(rest);
    case "report":
      return (await import("./report.ts")).reportCommand(rest);
    case "audit":
    case "verify":
      return (await import("./audit.ts")).recordCommand(command, rest);
    case "calibrate":
      return (await import("./calibrate.ts")).calibrateCommand(rest);
    case "format":
      return (await import("./format.ts")).formatCommand(rest);
    case "help":
      return (await import("./help.ts")).helpCommand(rest);
    case "kernel":
      return (await import("./kernel.ts")).kernelCommand(rest);
    case "--version":
      process.stdout.write(`${version()}\n`);
      return 0;
    case undefined:
    case "--help":
    case "-h":
      process.stdout.write(`${usage}\n`);
      return command === undefined ? 2 : 0;
    default: {
      const known = ["run", "report", "audit", "verify", "calibrate", "format", "help", "kernel"];
      const { nearestName } = await import("./arguments.ts");
      const near = nearestName(command, known);
      process.stderr.write(
        `meanwise: there is no command "${command}".${near === null ? "" : ` Did you mean "${near}"?`}\n\n${usage}\n`,
      );
      return 2;
    }
  }
}

main(process.argv.slice(2)).then(
  (code) => {
    process.exitCode = code;
  },
  (error: unknown) => {
    const message = error instanceof Error ? error.message : String(error);
    process.stderr.write(
      `meanwise: this should not have happened: ${message}\nPlease report it with the file that causes it.\n`,
    );
    if (process.env.MEANWISE_LOG === "1") process.stderr.write(`${error instanceof Error ? error.stack : ""}\n`);
    process.exitCode = 1;
  },
);
