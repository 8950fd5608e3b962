import type { Block, PresentedTable } from "./blocks.ts";
import { displayWidth, linesOf, padded, wrapped } from "./display-width.ts";
import { escapeHtml, escapeLatex, escapeMarkdown, html, Markup, plainText } from "./markup.ts";

/** How pictures appear in a form; the caller draws them. */
export type PictureForm = (block: Extract<Block, { type: "picture" }>) => string;

/** How a table is numbered in a form that numbers its tables; most do not. */
export type TableNumber = (block: Extract<Block, { type: "table" }>) => string;
const unnumbered: TableNumber = () => "";

export const textWidth = 100;

const columnGap = 3;
/** Columns of a text in a cell, beyond which it goes on below. */
const longestCell = 56;

/**
 * Columns beside each other as far as the line reaches; what has no room follows below, with the columns that name the rows repeated.
 * A column is as wide as its cells and the longest word of its heading.
 */
function textTable(table: PresentedTable): string {
  const rows = table.rows.map((row) => row.map((cell) => linesOf(plainText(cell).replace(/\n/g, " "), longestCell)));
  const longestWord = (label: string) => Math.max(...label.split(" ").map(displayWidth));
  const labels = table.columns.map((column) => plainText(column.label));
  const widths = labels.map((label, index) => {
    const cells = Math.max(0, ...rows.flatMap((row) => row[index]!.map(displayWidth)));
    return Math.max(cells, Math.min(displayWidth(label), Math.max(longestWord(label), 10)));
  });
  const heads = labels.map((label, index) => linesOf(label, widths[index]!));
  const named = Array.from({ length: table.headers }, (_, index) => index);
  const takes = (columns: readonly number[]) => columns.reduce((sum, column) => sum + widths[column]! + columnGap, 0);
  const parts: number[][] = [[...named]];
  for (let column = table.headers; column < table.columns.length; column++) {
    const last = parts.at(-1)!;
    if (last.length > named.length && takes([...last, column]) - columnGap > textWidth - 2)
      parts.push([...named, column]);
    else last.push(column);
  }
  const line = (cells: (column: number) => string, columns: readonly number[]) =>
    `  ${columns.map((column) => padded(cells(column), widths[column]!, table.columns[column]!.align)).join(" ".repeat(columnGap))}`.trimEnd();
  const drawn = parts.map((columns) => {
    const height = Math.max(...columns.map((column) => heads[column]!.length));
    const head = Array.from({ length: height }, (_, place) =>
      line((column) => heads[column]![place - height + heads[column]!.length] ?? "", columns),
    );
    return [
      ...head,
      `  ${"\u2500".repeat(takes(columns) - columnGap)}`,
      ...rows.flatMap((row) =>
        Array.from({ length: Math.max(...columns.map((column) => row[column]!.length)) }, (_, place) =>
          line((column) => row[column]![place] ?? "", columns),
        ),
      ),
    ].join("\n");
  });
  return [
    wrapped(plainText(table.caption), textWidth),
    drawn.join("\n\n"),
    ...(table.footnotes.length === 0
      ? []
      : [table.footnotes.map((note) => wrapped(plainText(note), textWidth, "  ")).join("\n")]),
  ]
    .join("\n\n")
    .replaceAll("\u00a0", " ");
}

/** Plain text, aligned for a terminal. */
export function textForm(blocks: readonly Block[], picture: PictureForm): string {
  return blocks
    .map((block) => {
      switch (block.type) {
        case "heading":
          return block.level === 1
            ? `${plainText(block.text)}\n${"\u2550".repeat(displayWidth(plainText(block.text)))}`
            : plainText(block.text);
        case "paragraph":
          return wrapped(plainText(block.text), textWidth);
        case "list":
          return block.items.map((item) => wrapped(plainText(item), textWidth, "    ", "  \u2022 ")).join("\n");
        case "statements":
          return block.lines
            .flatMap((line) => line.split("\n"))
            .map((line) => `    ${plainText(line)}`)
            .join("\n");
        case "table":
          return textTable(block.table);
        case "picture":
          return picture(block);
      }
    })
    .filter((text) => text !== "")
    .join("\n\n");
}

/** Inline styles only: notebooks drop style elements, and colours must follow the reader's theme. */
const cellStyle = (align: "left" | "right") =>
  `text-align:${align};padding:0.25em 0.8em 0.25em 0;border:0;vertical-align:top;font-variant-numeric:tabular-nums${align === "right" ? ";white-space:nowrap" : ""}`;
const ruled = "border-bottom:1px solid currentColor";

export function htmlTable(table: PresentedTable, number = ""): Markup {
  const head = table.columns.map(
    (column) =>
      new Markup(
        `<th scope="col" style="${cellStyle(column.align)};${ruled};font-weight:600;vertical-align:bottom;white-space:normal">${escapeHtml(column.label)}</th>`,
      ),
  );
  const body = table.rows.map((row) => {
    const cells = row.map((cell, index) => {
      const { align } = table.columns[index]!;
      return index < table.headers
        ? new Markup(
            `<th scope="row" style="${cellStyle(align)};font-weight:400${displayWidth(cell) <= 30 ? ";white-space:nowrap" : ";min-width:12em"}">${escapeHtml(cell)}</th>`,
          )
        : new Markup(`<td style="${cellStyle(align)}">${escapeHtml(cell)}</td>`);
    });
    return html`<tr style="background:none">${cells}</tr>`;
  });
  const notes = table.footnotes.map((note) => html`<div style="font-size:0.9em;max-width:46em">${note}</div>`);
  return new Markup(
    html`<div role="group" tabindex="0" aria-label="${number + table.caption}" style="position:relative;overflow-x:auto;margin:0.6em 0"><table style="border-collapse:collapse;border:0;margin:0"><caption style="caption-side:top;text-align:left;padding:0 0 0.4em 0;color:inherit;font-weight:600"><span style="display:inline-block;position:sticky;left:0;max-width:min(54em,88vw)">${number + table.caption}</span></caption><thead><tr style="background:none">${head}</tr></thead><tbody>${body}</tbody></table>${notes}</div>`
      .text,
  );
}

/** HTML for a notebook's cell or a page: everything escaped, no script, no style element, no fixed colours. */
export function htmlForm(
  blocks: readonly Block[],
  picture: PictureForm,
  headingOffset = 2,
  number: TableNumber = unnumbered,
): string {
  return blocks
    .map((block) => {
      switch (block.type) {
        case "heading": {
          const level = Math.min(6, block.level + headingOffset);
          return `<h${level} style="margin:0.8em 0 0.3em">${escapeHtml(block.text)}</h${level}>`;
        }
        case "paragraph": {
          const style =
            block.tone === "caution"
              ? "border-left:4px solid currentColor;padding:0.2em 0 0.2em 0.8em"
              : block.tone === "note"
                ? "font-size:0.95em"
                : block.tone === "state"
                  ? "font-weight:600"
                  : "";
          return html`<p style="${`margin:0.4em 0;max-width:46em;${style}`}">${block.text}</p>`.text;
        }
        case "list":
          return html`<ul style="margin:0.3em 0;max-width:46em">${block.items.map((item) => html`<li>${item}</li>`)}</ul>`
            .text;
        case "statements":
          return html`<pre style="margin:0.4em 0;background:none;color:inherit;white-space:pre-wrap"><code>${block.lines.join("\n")}</code></pre>`
            .text;
        case "table":
          return htmlTable(block.table, number(block)).text;
        case "picture":
          return picture(block);
      }
    })
    .join("\n");
}

export function markdownTable(table: PresentedTable, number = ""): string {
  const cell = (text: string) => escapeMarkdown(text).replace(/\n/g, " ");
  const line = (cells: readonly string[]) => `| ${cells.join(" | ")} |`;
  return [
    `**${number}${cell(table.caption)}**`,
    "",
    line(table.columns.map((column) => cell(column.label))),
    line(table.columns.map((column) => (column.align === "right" ? "---:" : "---"))),
    ...table.rows.map((row) => line(row.map(cell))),
    ...(table.footnotes.length > 0 ? ["", ...table.footnotes.map((note) => `${escapeMarkdown(note)}  `)] : []),
  ].join("\n");
}

export function markdownForm(
  blocks: readonly Block[],
  picture: PictureForm,
  number: TableNumber = unnumbered,
  headingOffset = 0,
): string {
  return blocks
    .map((block) => {
      switch (block.type) {
        case "heading":
          return `${"#".repeat(Math.min(6, block.level + headingOffset))} ${escapeMarkdown(block.text)}`;
        case "paragraph":
          return block.tone === "caution" ? `> ${escapeMarkdown(block.text)}` : escapeMarkdown(block.text);
        case "list":
          return block.items.map((item) => `- ${escapeMarkdown(item)}`).join("\n");
        case "statements":
          return ["```", ...block.lines.map((line) => plainText(line).replace(/```/g, "` ` `")), "```"].join("\n");
        case "table":
          return markdownTable(block.table, number(block));
        case "picture":
          return picture(block);
      }
    })
    .filter((text) => text !== "")
    .join("\n\n");
}

export function latexTable(table: PresentedTable): string {
  const line = (cells: readonly string[]) => `${cells.map(escapeLatex).join(" & ")} \\\\`;
  return [
    "\\begin{table}[htbp]",
    `\\caption{${escapeLatex(table.caption)}}`,
    `\\begin{tabular}{${table.columns.map((column) => (column.align === "right" ? "r" : "l")).join("")}}`,
    "\\hline",
    line(table.columns.map((column) => column.label)),
    "\\hline",
    ...table.rows.map(line),
    "\\hline",
    "\\end{tabular}",
    ...table.footnotes.map((note) => `\\par\\small ${escapeLatex(note)}`),
    "\\end{table}",
  ].join("\n");
}

export function latexForm(blocks: readonly Block[]): string {
  return blocks
    .map((block) => {
      switch (block.type) {
        case "heading":
          return `\\paragraph{${escapeLatex(block.text)}}`;
        case "paragraph":
          return escapeLatex(block.text);
        case "list":
          return [
            "\\begin{itemize}",
            ...block.items.map((item) => `\\item ${escapeLatex(item)}`),
            "\\end{itemize}",
          ].join("\n");
        case "statements":
          return [
            "\\begin{quote}\\ttfamily",
            ...block.lines.flatMap((line) => line.split("\n")).map((line) => `${escapeLatex(line)}\\\\`),
            "\\end{quote}",
          ].join("\n");
        case "table":
          return latexTable(block.table);
        case "picture":
          return "";
      }
    })
    .filter((text) => text !== "")
    .join("\n\n");
}

/** The table as data (Frictionless Data, tabular data resource): field types and unrounded values. */
export function tableResource(table: PresentedTable): object {
  return {
    schema: { fields: table.fields.map(({ name, type }) => ({ name, type })) },
    data: table.values.map((row) => Object.fromEntries(row.map((value, index) => [table.fields[index]!.name, value]))),
  };
}
