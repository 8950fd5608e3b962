import type { Host } from "../../host/index.ts";
import type { Picture } from "../../results/index.ts";
import type { Block } from "../blocks.ts";
import { htmlForm, markdownForm } from "../forms.ts";
import { escapeHtml, escapeMarkdown, html, Markup } from "../markup.ts";
import { type DrawnPicture, describePicture, drawPicture, inlineSvg } from "../pictures/index.ts";
import type { ReportDocument } from "./document.ts";
import { numberingOf } from "./numbering.ts";

const encode = (text: string): Uint8Array => new TextEncoder().encode(text);

/** Reads on paper and on screens, in light and dark, at any width. */
const style = `
:root{color-scheme:light dark}
body{font:16px/1.55 system-ui,"DejaVu Sans",sans-serif;margin:0 auto;padding:1.5rem 1.2rem 4rem;max-width:60rem;color:#1c2326;background:#fff}
h1{font-size:1.7rem;line-height:1.25;margin:0 0 .6rem}h2{font-size:1.25rem;margin:2.2rem 0 .5rem;padding-top:.6rem;border-top:1px solid #9aa7ad}
h3,h4,h5{font-size:1.02rem}
nav ol{columns:2;padding-left:1.4rem;margin:.3rem 0 0}nav a{color:inherit}
.banner{border:1px solid currentColor;border-radius:.4rem;padding:.6rem .9rem;margin:0 0 1.2rem}.banner p{margin:.25rem 0;overflow-wrap:anywhere}
pre{overflow-x:auto}p,li{overflow-wrap:anywhere}figure svg{max-width:100%;height:auto}
a:focus-visible{outline:2px solid currentColor;outline-offset:2px}
@media (prefers-color-scheme:dark){body{color:#e4eaec;background:#14191b}}
@media (max-width:40rem){nav ol{columns:1}body{padding:1rem .8rem 3rem}}
@media print{body{max-width:none;color:#000;background:#fff;font-size:10.5pt}nav{display:none}h2{break-after:avoid}figure,tr{break-inside:avoid}div[style*="overflow-x"]{overflow:visible!important}th,td{white-space:normal!important}}
`;

async function drawings(document: ReportDocument): Promise<Map<Picture, DrawnPicture>> {
  const drawn = new Map<Picture, DrawnPicture>();
  for (const section of document.sections) {
    for (const block of section.blocks)
      if (block.type === "picture") drawn.set(block.picture, await drawPicture(block.picture));
  }
  return drawn;
}

export async function reportHtml(document: ReportDocument): Promise<string> {
  const drawn = await drawings(document);
  const numbers = numberingOf(document);
  const figure = (block: Extract<Block, { type: "picture" }>) => {
    const number = numbers.of(block);
    return `<figure>${inlineSvg(drawn.get(block.picture)!, String(number))}<figcaption><strong>Figure ${number}.</strong> ${escapeHtml(block.caption)}<details><summary>In words</summary>${escapeHtml(describePicture(block.picture))}</details></figcaption></figure>`;
  };
  const contents = document.sections.map(
    (section) => html`<li><a href="${`#${section.id}`}">${section.title}</a></li>`,
  );
  const sections = document.sections.map(
    (section) =>
      new Markup(
        `<section aria-labelledby="${section.id}"><h2 id="${section.id}">${escapeHtml(section.title)}</h2>\n${htmlForm(section.blocks, figure, 1, (block) => `Table ${numbers.of(block)}. `)}</section>`,
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

export function reportMarkdown(document: ReportDocument): string {
  const numbers = numberingOf(document);
  const figure = (block: Extract<Block, { type: "picture" }>) => {
    return `**Figure ${numbers.of(block)}.** ${escapeMarkdown(block.caption)} ${escapeMarkdown(describePicture(block.picture))}`;
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
      return encode(reportMarkdown(document));
    case "docx":
      return (await import("./docx.ts")).reportDocx(document, host);
  }
}
