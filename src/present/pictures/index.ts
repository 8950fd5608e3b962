import { parse, View } from "vega";
import { compile, type TopLevelSpec } from "vega-lite";
import type { Picture } from "../../results/index.ts";
import { escapeHtml } from "../markup.ts";
import { config } from "./look.ts";
import { specificationOf } from "./specifications.ts";
import { describePicture, pictureCaption } from "./words.ts";

export interface DrawnPicture {
  readonly svg: string;
  /** Vega-Lite 5, with its data and its look; it names no address that a reader would fetch. */
  readonly specification: object;
}

/** A short digest of a text, to keep the ids of two pictures on one page apart (FNV-1a). */
function shortDigest(text: string): string {
  let hash = 0x811c9dc5;
  for (let index = 0; index < text.length; index++) hash = Math.imul(hash ^ text.charCodeAt(index), 0x01000193) >>> 0;
  return hash.toString(36);
}

/** Ids inside the picture get a prefix of its own, and a title and description are put in front for screen readers. */
function finished(svg: string, picture: Picture): string {
  const prefix = `p${shortDigest(svg)}-`;
  const own = svg
    .replace(/\bid="([^"]+)"/g, (_, id: string) => `id="${prefix}${id}"`)
    .replace(/url\(#([^)]+)\)/g, (_, id: string) => `url(#${prefix}${id})`)
    .replace(/href="#([^"]+)"/g, (_, id: string) => `href="#${prefix}${id}"`);
  const words = `<title id="${prefix}title">${escapeHtml(pictureCaption(picture))}</title><desc id="${prefix}desc">${escapeHtml(describePicture(picture))}</desc>`;
  return own
    .replace(/^(<svg[^>]*?)\srole="[^"]*"/, "$1")
    .replace(/\s(?:aria-roledescription|role|aria-label|aria-hidden)="[^"]*"/g, "")
    .replace(/^<svg([^>]*)>/, `<svg$1 role="img" aria-labelledby="${prefix}title ${prefix}desc">${words}`);
}

/** Draws a picture: the specification for front ends that know it, and the SVG that everyone can show. */
export async function drawPicture(picture: Picture): Promise<DrawnPicture> {
  const specification = {
    $schema: "https://vega.github.io/schema/vega-lite/v5.json",
    description: describePicture(picture),
    config,
    ...specificationOf(picture),
  };
  const { $schema: _, ...body } = specification;
  const compiled = compile(body as unknown as TopLevelSpec, { logger: quiet }).spec;
  const view = new View(parse(compiled), { renderer: "none", logLevel: 0 });
  try {
    return { svg: finished(await view.toSVG(), picture), specification };
  } finally {
    view.finalize();
  }
}

/** Warnings of the drawing library are for those who write specifications, not for readers. */
const quiet = {
  level: () => quiet,
  warn: () => quiet,
  info: () => quiet,
  debug: () => quiet,
  error: () => quiet,
} as never;

export { describePicture, pictureCaption };
