// Joins the kernel's interpreter thread into few files after the build: hundreds of small modules take seconds to open, a handful does not.
// The kernel falls back to the unbundled thread where these files are missing or older than the build.
import { readFileSync, rmSync } from "node:fs";
import { dirname, join, relative } from "node:path";
import { fileURLToPath } from "node:url";
import { build } from "esbuild";

const top = join(dirname(fileURLToPath(import.meta.url)), "..");
const folder = join(top, "dist", "kernel", "bundle");

/** Modules find their neighbours (workers, fonts, package.json) from their own place, which the bundle must not change. */
const placesKept = {
  name: "places kept",
  setup(context) {
    context.onLoad({ filter: /[\\/]dist[\\/].*\.js$/ }, ({ path }) => {
      const place = relative(folder, path).replaceAll("\\", "/");
      const text = readFileSync(path, "utf8");
      return {
        contents: text.replaceAll("import.meta.url", `new URL(${JSON.stringify(place)}, import.meta.url).href`),
        loader: "js",
      };
    });
  },
};

const { dependencies } = JSON.parse(readFileSync(join(top, "package.json"), "utf8"));
/** Small modules in great number are joined; what is loaded late or has native parts stays where it is. */
const joined = ["@noble/hashes", "canonicalize", "chevrotain", "fastest-levenshtein", "fflate", "jstat", "ml-matrix"];
const external = Object.keys(dependencies).filter((name) => !joined.includes(name) && !name.startsWith("hyparquet"));

rmSync(folder, { recursive: true, force: true });
await build({
  entryPoints: [join(top, "dist", "kernel", "worker.js")],
  outdir: folder,
  bundle: true,
  splitting: true,
  format: "esm",
  platform: "node",
  target: "node20",
  minifyWhitespace: true,
  minifySyntax: true,
  external: external.flatMap((name) => [name, `${name}/*`]),
  plugins: [placesKept],
  logLevel: "warning",
});
