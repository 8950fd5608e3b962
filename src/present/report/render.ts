import type { Host } from "../../host/index.ts";
import type { Picture } from "../../results/index.ts";
import type { Block } from "../blocks.ts";
import { htmlForm, markdownForm } from "../forms.ts";
import { escapeHtml, escapeMarkdown, html, Markup } from "../markup.ts";
import {
  type DrawnPicture,
  describePicture,
  drawPicture,
  inlineSvg,
  type PictureWidth,
  paperSvg,
} from "../pictures/index.ts";
import { base64 } from "../base64.ts";
import type { ReportDocument } from "./document.ts";
import { numberingOf } from "./numbering.ts";

const encode = (text: string): Uint8Array => new TextEncoder().encode(text);

/** Reads on paper and on screens, in light and dark, at any width. */
const style = `
:root{color-scheme:light dark}
body{font:16px/1.55 system-ui,"DejaVu Sans",sans-serif;margin:0 auto;padding:1.5rem 1.2rem 4rem;max-width:63rem;color:#1c2326;background:#fff}
h1{font-size:1.75rem;line-height:1.25;margin:0 0 .8rem;text-wrap:balance}
h2{font-size:1.25rem;margin:2.4rem 0 .5rem;padding-top:.7rem;border-top:1px solid #87949a}
h3{font-size:1.05rem;margin:1.4rem 0 .4rem}
nav{margin:0 0 1.5rem}nav ol{columns:2;column-gap:2rem;padding-left:1.6rem;margin:.3rem 0 0}nav li{break-inside:avoid}
a{color:inherit;text-underline-offset:.15em}a:focus-visible,[tabindex]:focus-visible,summary:focus-visible{outline:2px solid currentColor;outline-offset:3px}
.banner{border:1px solid currentColor;border-left-width:.35rem;padding:.5rem .9rem;margin:0 0 1.3rem}.banner p{margin:.2rem 0}
p,li,figcaption,caption{overflow-wrap:anywhere}pre{font-size:.86rem;overflow-wrap:anywhere}
table{font-size:.86rem}caption{max-width:54rem}.narrow{display:none}
figure{margin:1.3rem 0}figcaption{font-size:.95rem;max-width:46em;margin-top:.3rem}details{margin-top:.2rem}summary{cursor:pointer}
.exploratory{border-left:4px dashed #87949a;padding-left:1rem}
@media (prefers-color-scheme:dark){body{color:#e4eaec;background:#14191b}}
@media (max-width:40rem){.wide{display:none}.narrow{display:block}nav ol{columns:1}body{padding:1rem .8rem 3rem}.exploratory{padding-left:.6rem}}
@media print{@page{margin:18mm}body{max-width:none;padding:0;color:#000;background:#fff;font-size:10pt}nav,details{display:none}h2{break-after:avoid}figure,tr,.banner{break-inside:avoid}[role=group]{overflow:visible!important}.wide{display:block}.narrow{display:none}caption{break-after:avoid}table{font-size:7.5pt;width:100%}th,td{padding-right:.5em!important}p{orphans:3;widows:3}}
`;

async function drawings(document: ReportDocument, width?: PictureWidth): Promise<Map<Picture, DrawnPicture>> {
  const drawn = new Map<Picture, DrawnPicture>();
  for (const section of document.sections) {
    for (const block of section.blocks)
      if (block.type === "picture") drawn.set(block.picture, await drawPicture(block.picture, width));
  }
  return drawn;
}

export async function reportHtml(document: ReportDocument): Promise<string> {
  const drawn = await drawings(document);
  // A telephone gets pictures that were drawn for its width, not shrunken ones.
  const small = await drawings(document, "one column");
  const numbers = numberingOf(document);
  const figure = (block: Extract<Block, { type: "picture" }>) => {
    const number = numbers.of(block);
    const wide = inlineSvg(drawn.get(block.picture)!, String(number));
    const narrow = inlineSvg(small.get(block.picture)!, `${number}n`);
    return `<figure><div class="wide">${wide}</div><div class="narrow">${narrow}</div><figcaption><strong>Figure ${number}.</strong> ${escapeHtml(block.caption)}<details><summary>In words</summary>${escapeHtml(describePicture(block.picture))}</details></figcaption></figure>`;
  };
  const contents = document.sections.map(
    (section) => html`<li><a href="${`#${section.id}`}">${section.title}</a></li>`,
  );
  const sections = document.sections.map(
    (section) =>
      new Markup(
        `<section aria-labelledby="${section.id}"${section.id === "exploratory" ? ' class="exploratory"' : ""}><h2 id="${section.id}">${escapeHtml(section.title)}</h2>\n${htmlForm(section.blocks, figure, 2, (block) => `Table ${numbers.of(block)}. `)}</section>`,
      ),
  );
  const page = html`<!doctype html>
<html lang="en">
<head><meta charset="utf-8"><meta name="viewport" content="width=device-width, initial-scale=1"><meta name="generator" content="${`Meanwise ${document.version}`}"><title>${document.title}</title><style>${new Markup(style)}</style></head>
<body>
<main>
<h1>${document.title}</h1>
<div class="banner">${document.banner.map((line) => html`<p>${line}</p>`)}</div>
<nav aria-label="Contents"><strong>Contents</strong><ol>${contents}</ol></nav>
${sections}
</main>
</body>
</html>
`;
  return page.text;
}

/** Pixels of a picture in Markdown, where it stands in the text itself. */
const markdownPixels = 1100;

export async function reportMarkdown(document: ReportDocument, host: Pick<Host, "svgToPng">): Promise<string> {
  const drawn = await drawings(document);
  const pictures = new Map<Picture, string>();
  for (const [picture, { svg: _, ...size }] of drawn) {
    const png = await host.svgToPng(paperSvg(drawn.get(picture)!), Math.min(markdownPixels, 2 * size.width));
    if (png !== null) pictures.set(picture, `data:image/png;base64,${base64(png)}`);
  }
  const numbers = numberingOf(document);
  const figure = (block: Extract<Block, { type: "picture" }>) => {
    const address = pictures.get(block.picture);
    const image = address === undefined ? "" : `![Figure ${numbers.of(block)}](${address})\n\n`;
    return `${image}**Figure ${numbers.of(block)}.** ${escapeMarkdown(block.caption)} ${escapeMarkdown(describePicture(block.picture))}`;
  };
  const parts = [`# ${escapeMarkdown(document.title)}`, ...document.banner.map((line) => `> ${escapeMarkdown(line)}`)];
  for (const section of document.sections)
    parts.push(
      `## ${escapeMarkdown(section.title)}`,
      markdownForm(section.blocks, figure, (block) => `Table ${numbers.of(block)}. `, 2),
    );
  return `${parts.join("\n\n")}\n`;
}

/** The report as a file's bytes. */
export async function renderReport(
  document: ReportDocument,
  format: "html" | "md" | "docx",
  host: Pick<Host, "svgToPng">,
): Promise<Uint8Array> {
  switch (format) {
    case "html":
      return encode(await reportHtml(document));
    case "md":
      return encode(await reportMarkdown(document, host));
    case "docx":
      return (await import("./docx.ts")).reportDocx(document, host);
  }
}
