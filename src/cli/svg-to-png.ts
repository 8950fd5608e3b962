import { createRequire } from "node:module";
import { dirname, join } from "node:path";

/** Folder of the fonts that pictures are measured and drawn with. */
function fontFolder(): string {
  return join(dirname(createRequire(import.meta.url).resolve("dejavu-fonts-ttf/package.json")), "ttf");
}

/**
 * Letters that the bundled fonts have: Latin, Greek, Cyrillic, Armenian, Hebrew, Arabic, Georgian, general punctuation, arrows, mathematics, shapes.
 * Anything beyond (East Asian scripts, emoji, scripts of India) makes the renderer look through the computer's own fonts, which costs time.
 */
const bundled =
  // biome-ignore lint/suspicious/noControlCharactersInRegex: the whole range from the first character on is meant
  /^[\u0000-\u058f\u0590-\u06ff\u10a0-\u10ff\u1d00-\u1dbf\u1e00-\u27bf\u2900-\u2bff\ufb00-\ufdff\ufe70-\ufefc]*$/;

/**
 * Turns an SVG picture into PNG bytes with fonts that are the same on every computer.
 *
 * @param svg a whole SVG document
 * @param widthPixels width of the PNG, pixels, > 0; the height follows
 * @returns PNG bytes; null when the drawing library cannot be loaded on this computer
 */
export async function svgToPng(svg: string, widthPixels: number): Promise<Uint8Array | null> {
  let library: typeof import("@resvg/resvg-js");
  try {
    library = await import("@resvg/resvg-js");
  } catch {
    return null;
  }
  const folder = fontFolder();
  const image = await library.renderAsync(svg, {
    fitTo: { mode: "width", value: Math.max(1, Math.round(widthPixels)) },
    font: {
      loadSystemFonts: !bundled.test(svg),
      fontFiles: ["DejaVuSans.ttf", "DejaVuSans-Bold.ttf"].map((file) => join(folder, file)),
      defaultFontFamily: "DejaVu Sans",
      sansSerifFamily: "DejaVu Sans",
    },
    logLevel: "off",
  });
  return new Uint8Array(image.asPng());
}
