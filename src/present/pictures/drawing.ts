import type { TopLevelSpec } from "vega-lite";
import type { Picture } from "../../results/index.ts";
import { escapeHtml, plainText } from "../markup.ts";
import { config, ink, type PictureWidth } from "./look.ts";
import { specificationOf } from "./specifications.ts";
import { textWidth } from "./text-width.ts";
import { describePicture, pictureCaption } from "./words.ts";

export interface DrawnPicture {
  /** A whole SVG document on a transparent ground. */
  readonly svg: string;
  /** Vega-Lite 5, with its data and its look; it names no address that a reader would fetch. */
  readonly specification: object;
  /** Pixels. */
  readonly width: number;
  readonly height: number;
}

/** A short digest of a text, to keep the ids of two pictures on one page apart (FNV-1a). */
function shortDigest(text: string): string {
  let hash = 0x811c9dc5;
  for (let index = 0; index < text.length; index++) hash = Math.imul(hash ^ text.charCodeAt(index), 0x01000193) >>> 0;
  return hash.toString(36);
}

/**
 * The library numbers its ids through the whole process; here they are numbered from one in each picture and carry a prefix of the
 * picture's own. A title and a description are put in front for screen readers.
 */
function finished(svg: string, picture: Picture): string {
  const numbers = new Map<string, string>();
  const own = (id: string): string => {
    if (!numbers.has(id)) numbers.set(id, `part${numbers.size + 1}`);
    return `PICTURE-${numbers.get(id)!}`;
  };
  const numbered = svg
    .replace(/\bid="([^"]+)"/g, (_, id: string) => `id="${own(id)}"`)
    .replace(/url\(#([^)]+)\)/g, (_, id: string) => `url(#${own(id)})`)
    .replace(/href="#([^"]+)"/g, (_, id: string) => `href="#${own(id)}"`)
    .replace(/\s(?:aria-roledescription|role|aria-label|aria-hidden)="[^"]*"/g, "");
  const words = `<title id="PICTURE-title">${escapeHtml(pictureCaption(picture))}</title><desc id="PICTURE-desc">${escapeHtml(describePicture(picture))}</desc>`;
  return withPrefix(
    numbered.replace(
      /^<svg([^>]*)>/,
      `<svg$1 role="img" aria-labelledby="PICTURE-title" aria-describedby="PICTURE-desc">${words.replace(/\$/g, "$$$$")}`,
    ),
    "PICTURE",
    `p${shortDigest(numbered + words)}`,
  );
}

/** Changes the prefix of ids, only where an id or a reference to one stands: no level can be called like one, as its quotes are escaped. */
const withPrefix = (svg: string, old: string, prefix: string): string =>
  svg
    .replaceAll(`="${old}-`, `="${prefix}-`)
    .replaceAll(`url(#${old}-`, `url(#${prefix}-`)
    .replaceAll(`="#${old}-`, `="#${prefix}-`);

/** The picture with every text in it, also names of factors that stand as keys, free of signs that no file format takes. */
function cleaned<Value>(value: Value): Value {
  const clean = (part: unknown): unknown => {
    if (typeof part === "string") return plainText(part);
    if (Array.isArray(part)) return part.map(clean);
    if (typeof part === "object" && part !== null)
      return Object.fromEntries(Object.entries(part).map(([key, each]) => [plainText(key), clean(each)]));
    return part;
  };
  return clean(value) as Value;
}

/** Draws a picture: the specification for front ends that know it, and the SVG that everyone can show. */
export async function drawPicture(given: Picture, width?: PictureWidth): Promise<DrawnPicture> {
  const picture = cleaned(given);
  const body = { description: describePicture(picture), config, ...specificationOf(picture, width) };
  // Loaded with the first picture: a kernel must not wait for it when it starts.
  const [vega, { compile }] = await Promise.all([import("vega"), import("vega-lite")]);
  // The library has one text measure for the whole process; ours needs no canvas and is the same in every host.
  (vega as unknown as { textMetrics: { width: unknown } }).textMetrics.width = (
    item: { fontSize?: number },
    text: string,
  ) => textWidth(String(text ?? ""), item.fontSize ?? 11);
  // Warnings of the library are for those who write specifications, not for readers.
  const compiled = compile(body as unknown as TopLevelSpec, { logger: vega.logger(0) as never }).spec;
  const view = new vega.View(vega.parse(compiled), { renderer: "none", logLevel: 0 });
  try {
    const svg = finished(await view.toSVG(), picture);
    return {
      svg,
      specification: { $schema: "https://vega.github.io/schema/vega-lite/v5.json", ...body },
      width: Number(/\bwidth="([\d.]+)"/.exec(svg)![1]),
      height: Number(/\bheight="([\d.]+)"/.exec(svg)![1]),
    };
  } finally {
    view.finalize();
  }
}

/**
 * The picture for the inside of a page: text and rules take the page's own colour, ids carry the page's number for it, and it shrinks with
 * the page.
 */
export function inlineSvg(drawn: DrawnPicture, number: string): string {
  const prefix = /<title id="(p[0-9a-z]+)-title"/.exec(drawn.svg)![1]!;
  return withPrefix(drawn.svg, prefix, `${prefix}-${number}`)
    .replaceAll(ink, "currentColor")
    .replace(/^<svg/, '<svg style="max-width:100%;height:auto"');
}

/** The picture for white paper: text and rules in near-black on a white ground. */
export function paperSvg(drawn: DrawnPicture): string {
  return drawn.svg
    .replaceAll(ink, "#2b3134")
    .replace("</desc>", `</desc><rect width="${drawn.width}" height="${drawn.height}" fill="#ffffff"/>`);
}
