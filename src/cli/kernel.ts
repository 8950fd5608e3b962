import { resolve } from "node:path";
import { readArguments, UsageError, withUsage } from "./arguments.ts";
import { installedKernels, installKernel, type InstallOptions, uninstallKernel } from "./kernel-install.ts";

/** `meanwise kernel install|uninstall|list|run`. */
export async function kernelCommand(words: readonly string[]): Promise<number> {
  return withUsage(async () => {
    const [action, ...rest] = words;
    if (action === "run") {
      if (rest.length !== 1) throw new UsageError("kernel run takes the connection file that the front end wrote.");
      return (await import("../../kernel/main.ts")).runKernel(rest[0]!);
    }
    const given = readArguments(rest, { "--prefix": "value", "--user": "flag", "--sys-prefix": "flag" });
    if (given.files.length > 0) throw new UsageError(`"${given.files[0]}" is not expected here.`);
    if (given.has("--user") && given.has("--prefix")) throw new UsageError("--user and --prefix exclude each other.");
    const environmentPrefix = process.env.VIRTUAL_ENV ?? process.env.CONDA_PREFIX ?? null;
    if (given.has("--sys-prefix") && environmentPrefix === null) {
      throw new UsageError("--sys-prefix needs an active environment (VIRTUAL_ENV or CONDA_PREFIX); use --prefix DIR.");
    }
    const prefix = given.value("--prefix") ?? (given.has("--sys-prefix") ? environmentPrefix : null);
    const options: InstallOptions = {
      prefix: prefix === null ? null : resolve(prefix),
      environment: process.env,
      platform: process.platform,
    };
    switch (action) {
      case "install": {
        try {
          const { folder, replaced } = installKernel(options);
          process.stdout.write(`${replaced ? "Replaced the kernel in" : "Installed the kernel into"} ${folder}\n`);
          return 0;
        } catch (error) {
          process.stderr.write(
            `meanwise: the kernel could not be installed: ${error instanceof Error ? error.message : String(error)}\n`,
          );
          return 1;
        }
      }
      case "uninstall": {
        const { folder, removed, left } = uninstallKernel(options);
        if (!removed) {
          process.stderr.write(`meanwise: there is no kernel in ${folder}\n`);
          return 1;
        }
        process.stdout.write(`Removed the kernel from ${folder}\n`);
        if (left.length > 0) process.stdout.write(`Left in place, not ours: ${left.join(", ")}\n`);
        return 0;
      }
      case "list": {
        const found = installedKernels(options);
        if (found.length === 0)
          process.stdout.write("No Meanwise kernel is installed. Install it with: meanwise kernel install\n");
        for (const kernel of found)
          process.stdout.write(`${kernel.folder}${kernel.usable ? "" : "  (its program is gone; install again)"}\n`);
        return 0;
      }
      default:
        throw new UsageError(
          action === undefined
            ? "kernel takes install, uninstall or list."
            : `kernel has no action "${action}"; it takes install, uninstall or list.`,
        );
    }
  });
}
