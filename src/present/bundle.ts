import type { Host } from "../host/index.ts";
import type { Picture, Result } from "../results/index.ts";
import { base64 } from "./base64.ts";
import type { Block, PresentedTable } from "./blocks.ts";
import { htmlForm, latexForm, markdownForm, tableResource, textForm, textWidth } from "./forms.ts";
import { wrapped } from "./display-width.ts";
import { escapeHtml, plainText } from "./markup.ts";
import { defaultOptions, type PresentOptions } from "./options.ts";
import { type DrawnPicture, describePicture, drawPicture, inlineSvg, pictureCaption } from "./pictures/index.ts";
import { comparisonsBlocks } from "./tables/comparisons.ts";
import { omnibusBlocks } from "./tables/omnibus.ts";
import { checkBlocks } from "./tables/check.ts";
import { dataBlocks } from "./tables/data.ts";
import { describeBlocks } from "./tables/describe.ts";
import { calibrationBlocks, detectableBlocks, powerBlocks, sizeBlocks } from "./tables/planning.ts";
import { helpBlocks, ledgerBlocks, messageBlocks, planBlocks } from "./tables/record.ts";

/** A result in every form that a front end may choose from (MIME type -> content). */
export interface Bundle {
  readonly "text/plain": string;
  readonly "text/html"?: string;
  readonly "text/markdown"?: string;
  readonly "text/latex"?: string;
  readonly "application/vnd.dataresource+json"?: object;
  readonly "application/vnd.vegalite.v5+json"?: object;
  readonly "image/svg+xml"?: string;
  readonly "image/png"?: string;
}

type Presenter<K extends Result["kind"]> = (result: Extract<Result, { kind: K }>, options: PresentOptions) => Block[];

/** One presenter for each kind; a missing or surplus one does not compile. */
const presenters: { readonly [K in Result["kind"]]: Presenter<K> } = {
  omnibus: (result) => omnibusBlocks(result),
  comparisons: comparisonsBlocks,
  describe: describeBlocks,
  check: (result) => checkBlocks(result),
  picture: (result) => [{ type: "picture", picture: result.picture, caption: pictureCaption(result.picture) }],
  power: (result) => powerBlocks(result),
  size: (result) => sizeBlocks(result),
  detectable: (result) => detectableBlocks(result),
  calibration: (result) => calibrationBlocks(result),
  data: (result) => dataBlocks(result),
  plan: (result) => planBlocks(result),
  ledger: (result) => ledgerBlocks(result),
  report: (result) => [
    {
      type: "paragraph",
      text: `Report written to ${result.path} (${result.bytes < 10_000 ? `${result.bytes} bytes` : `${Math.round(result.bytes / 1024)} KB`}): ${result.sections.join(", ")}.`,
    },
  ],
  export: (result) => [{ type: "paragraph", text: `Wrote ${result.of} to ${result.path}.` }],
  message: (result) => messageBlocks(result),
  help: (result) => helpBlocks(result),
};

/** What a result shows, before it takes a form. */
export function blocksOf(result: Result, options: PresentOptions = defaultOptions): Block[] {
  const present = presenters[result.kind] as (result: Result, options: PresentOptions) => Block[];
  return present(result, options);
}

/** The tables that a result shows, with their unrounded values. */
export function tablesOf(result: Result): PresentedTable[] {
  return blocksOf(result).flatMap((block) => (block.type === "table" ? [block.table] : []));
}

const pictureText = (block: Extract<Block, { type: "picture" }>): string =>
  `${wrapped(plainText(block.caption), textWidth)}\n\n${wrapped(plainText(describePicture(block.picture)), textWidth, "  ")}`;

/** Plain text of a result, for terminals. */
export function presentText(result: Result, options: PresentOptions = defaultOptions): string {
  return textForm(blocksOf(result, options), pictureText);
}

/** Pixels of a PNG to one of the picture: sharp on a high-density screen, small enough to mail. */
const pngDensity = 2;

function figure(picture: Picture, drawn: DrawnPicture, caption: string): string {
  return `<figure style="margin:0.6em 0">${inlineSvg(drawn, "1")}<figcaption style="max-width:46em;font-size:0.95em">${escapeHtml(caption)} ${escapeHtml(describePicture(picture))}</figcaption></figure>`;
}

/** Every form of a result. Pictures are drawn once and shared by the forms. */
export async function presentResult(
  result: Result,
  options: PresentOptions = defaultOptions,
  host: Pick<Host, "svgToPng"> | null = null,
): Promise<Bundle> {
  const blocks = blocksOf(result, options);
  const drawn = new Map<Picture, DrawnPicture>();
  for (const block of blocks)
    if (block.type === "picture") drawn.set(block.picture, await drawPicture(block.picture, options.width));
  const plain = textForm(blocks, pictureText);
  const tables = blocks.filter((block) => block.type === "table");
  const latex = latexForm(blocks);
  if (result.kind === "picture") {
    const { svg, specification, width } = drawn.get(result.picture)!;
    const png = host === null ? null : await host.svgToPng(svg, Math.round(pngDensity * width));
    return {
      "text/plain": plain,
      "application/vnd.vegalite.v5+json": specification,
      "image/svg+xml": svg,
      ...(png === null ? {} : { "image/png": base64(png) }),
    };
  }
  return {
    "text/plain": plain,
    "text/html": htmlForm(blocks, (block) => figure(block.picture, drawn.get(block.picture)!, block.caption)),
    "text/markdown": markdownForm(blocks, (block) => `${block.caption}. ${describePicture(block.picture)}`),
    ...(latex === "" ? {} : { "text/latex": latex }),
    ...(tables.length === 0 ? {} : { "application/vnd.dataresource+json": tableResource(tables[0]!.table) }),
  };
}
