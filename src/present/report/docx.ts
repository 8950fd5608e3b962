import {
  AlignmentType,
  BorderStyle,
  convertMillimetersToTwip,
  Document,
  Footer,
  HeadingLevel,
  ImageRun,
  LevelFormat,
  LineRuleType,
  Packer,
  PageNumber,
  Paragraph,
  Table,
  TableCell,
  TableLayoutType,
  TableRow,
  TextRun,
  WidthType,
} from "docx";
import type { Host } from "../../host/index.ts";
import type { Block, PresentedTable } from "../blocks.ts";
import { plainText } from "../markup.ts";
import { describePicture, drawPicture, paperSvg } from "../pictures/index.ts";
import { textWidth } from "../pictures/text-width.ts";
import type { ReportDocument } from "./document.ts";
import { type Numbering, numberingOf } from "./numbering.ts";

/** Pixels of a figure's width: 300 to the inch over two columns of a journal's page. */
const figurePixels = 2126;
/** Text width of an A4 page with margins of 22 mm, in millimetres; and the widest a figure stands on it. */
const textMillimetres = 166;

const run = (text: string, more: { bold?: boolean; italics?: boolean; size?: number; font?: string } = {}): TextRun =>
  new TextRun({ text: plainText(text), ...more });

const none = { style: BorderStyle.NONE, size: 0, color: "auto" } as const;
const rule = (size: number) => ({ style: BorderStyle.SINGLE, size, color: "auto" }) as const;

/** Columns that stand beside each other, with their widths in points. */
interface TablePart {
  readonly columns: readonly number[];
  readonly widths: readonly number[];
}

const pagePoints = (textMillimetres / 25.4) * 72;

/**
 * Letters as large as the page allows; where even small ones have no room, columns go on below, with those that name the rows repeated.
 * A heading may break at blanks; numbers and intervals may not.
 */
function fitted(table: PresentedTable): { readonly points: number; readonly parts: readonly TablePart[] } {
  const labels = table.columns.map((column) => plainText(column.label));
  const cells = table.rows.map((row) => row.map(plainText));
  const words = (text: string, size: number) => Math.max(...text.split(" ").map((word) => textWidth(word, size)));
  const widthsAt = (size: number): number[] =>
    table.columns.map((column, index) => {
      const body = cells.map((row) => {
        const text = row[index]!;
        if (column.align === "right") return Math.min(0.7 * pagePoints, textWidth(text, size));
        return Math.max(Math.min((index < table.headers ? 18 : 22) * size, textWidth(text, size)), words(text, size));
      });
      return Math.max(1.1 * words(labels[index]!, size), ...body) + 8;
    });
  const sum = (widths: readonly number[]) => widths.reduce((total, width) => total + width, 0);
  const all = table.columns.map((_, index) => index);
  for (const points of [9, 8.5, 8, 7.5]) {
    const widths = widthsAt(points);
    if (sum(widths) <= pagePoints) return { points, parts: [{ columns: all, widths }] };
  }
  const points = 8.5;
  const widths = widthsAt(points);
  const named = all.slice(0, table.headers);
  const inParts = (limit: number): number[][] => {
    const parts: number[][] = [[...named]];
    for (const column of all.slice(table.headers)) {
      const last = parts.at(-1)!;
      if (last.length > named.length && sum([...last, column].map((each) => widths[each]!)) > limit)
        parts.push([...named, column]);
      else last.push(column);
    }
    return parts;
  };
  // As few parts as there must be, and those about alike.
  const fewest = inParts(pagePoints).length;
  const shares = Array.from({ length: 20 }, (_, step) => inParts(pagePoints * (0.5 + 0.025 * (step + 1))));
  const parts = shares.find((each) => each.length === fewest) ?? inParts(pagePoints);
  return { points, parts: parts.map((columns) => ({ columns, widths: columns.map((column) => widths[column]!) })) };
}

/** Rules above, below the head and at the foot, none between columns: as journals set tables. */
function docxTable(table: PresentedTable, number: number): (Paragraph | Table)[] {
  const { points, parts } = fitted(table);
  const whole = convertMillimetersToTwip(textMillimetres);
  const drawn = parts.map(({ columns, widths }, part) => {
    const total = widths.reduce((sum, width) => sum + width, 0);
    // Each part takes the page's width, unless it is a short one of several.
    const taken = parts.length > 1 && part > 0 ? Math.min(whole, Math.round(total * 20)) : whole;
    const shares = widths.map((width) => Math.floor((width / total) * taken));
    const cell = (text: string, place: number, row: "head" | "body" | "foot") => {
      const { align } = table.columns[columns[place]!]!;
      return new TableCell({
        width: { size: shares[place]!, type: WidthType.DXA },
        margins: { top: 30, bottom: 30, left: place === 0 ? 0 : 50, right: 50, marginUnitType: WidthType.DXA },
        borders: {
          left: none,
          right: none,
          top: row === "head" ? rule(10) : none,
          bottom: row === "head" ? rule(6) : row === "foot" ? rule(10) : none,
        },
        verticalAlign: row === "head" ? "bottom" : "top",
        children: [
          new Paragraph({
            alignment: align === "right" ? AlignmentType.RIGHT : AlignmentType.LEFT,
            keepNext: row !== "foot",
            spacing: { before: 0, after: 0, line: 240, lineRule: LineRuleType.AUTO },
            children: [
              run(row !== "head" && align === "right" ? text.replaceAll(" ", "\u00a0") : text, { size: 2 * points }),
            ],
          }),
        ],
      });
    };
    return new Table({
      width: { size: taken, type: WidthType.DXA },
      columnWidths: shares,
      layout: TableLayoutType.FIXED,
      borders: { top: none, bottom: none, left: none, right: none, insideHorizontal: none, insideVertical: none },
      rows: [
        new TableRow({
          tableHeader: true,
          cantSplit: true,
          children: columns.map((column, place) => cell(plainText(table.columns[column]!.label), place, "head")),
        }),
        ...table.rows.map(
          (row, index) =>
            new TableRow({
              cantSplit: true,
              children: columns.map((column, place) =>
                cell(plainText(row[column]!), place, index === table.rows.length - 1 ? "foot" : "body"),
              ),
            }),
        ),
      ],
    });
  });
  const between = () =>
    new Paragraph({ keepNext: true, spacing: { before: 0, after: 0 }, children: [run(" ", { size: 8 })] });
  return [
    new Paragraph({
      keepNext: true,
      spacing: { before: 220, after: 60 },
      children: [run(`Table ${number}. `, { bold: true, size: 19 }), run(table.caption, { size: 19 })],
    }),
    ...drawn.flatMap((part, index) => (index === 0 ? [part] : [between(), part])),
    new Paragraph({
      spacing: { before: 50, after: 220 },
      children:
        table.footnotes.length === 0
          ? []
          : [run("Note. ", { italics: true, size: 17 }), run(table.footnotes.join(" "), { size: 17 })],
    }),
  ];
}

async function figure(
  block: Extract<Block, { type: "picture" }>,
  number: number,
  host: Pick<Host, "svgToPng">,
): Promise<Paragraph[]> {
  const drawn = await drawPicture(block.picture);
  const width = Math.min(drawn.width, 627);
  const png = await host.svgToPng(paperSvg(drawn), Math.round((figurePixels * width) / 680));
  const words = describePicture(block.picture);
  const caption = new Paragraph({
    spacing: { before: 60, after: 260 },
    children: [
      run(`Figure ${number}. `, { bold: true, size: 19 }),
      run(png === null ? `${block.caption} ${words}` : block.caption, { size: 19 }),
    ],
  });
  if (png === null) return [caption];
  return [
    new Paragraph({
      keepNext: true,
      spacing: { before: 220, after: 0, line: 240, lineRule: LineRuleType.AUTO },
      children: [
        new ImageRun({
          type: "png",
          data: png,
          transformation: { width, height: Math.round((drawn.height * width) / drawn.width) },
          altText: { name: `Figure ${number}`, title: plainText(block.caption), description: plainText(words) },
        }),
      ],
    }),
    caption,
  ];
}

function paragraphOf(block: Extract<Block, { type: "paragraph" }>): Paragraph {
  if (block.tone === "caution" || block.tone === "state")
    return new Paragraph({
      spacing: { before: 80, after: 120 },
      indent: { left: 160 },
      border: { left: { style: BorderStyle.SINGLE, size: 18, space: 8, color: "auto" } },
      children: [run(block.text, block.tone === "state" ? { bold: true } : {})],
    });
  return new Paragraph({
    spacing: { before: 0, after: 120 },
    children: [run(block.text, block.tone === "note" ? { size: 19 } : {})],
  });
}

async function blockOf(block: Block, numbers: Numbering, host: Pick<Host, "svgToPng">): Promise<(Paragraph | Table)[]> {
  switch (block.type) {
    case "heading":
      return [new Paragraph({ heading: HeadingLevel.HEADING_2, keepNext: true, children: [run(block.text)] })];
    case "paragraph":
      return [paragraphOf(block)];
    case "list":
      return block.items.map(
        (item) =>
          new Paragraph({
            numbering: { reference: "points", level: 0 },
            spacing: { after: 60 },
            children: [run(item)],
          }),
      );
    case "statements":
      return block.lines
        .flatMap((line) => line.split("\n"))
        .map(
          (line) =>
            new Paragraph({
              spacing: { before: 0, after: 0 },
              indent: { left: 240 },
              children: [
                run(
                  line.replace(/^ +/, (blanks) => "\u00a0".repeat(blanks.length)),
                  { font: "DejaVu Sans Mono", size: 16 },
                ),
              ],
            }),
        );
    case "table":
      return docxTable(block.table, numbers.of(block));
    case "picture":
      return figure(block, numbers.of(block), host);
  }
}

/** The report as a word processor's document (Office Open XML): numbered tables and figures, captions, page numbers, alternative texts. */
export async function reportDocx(document: ReportDocument, host: Pick<Host, "svgToPng">): Promise<Uint8Array> {
  const numbers = numberingOf(document);
  const children: (Paragraph | Table)[] = [
    new Paragraph({ heading: HeadingLevel.TITLE, children: [run(document.title)] }),
    ...document.banner.map(
      (line) =>
        new Paragraph({
          spacing: { before: 0, after: 0 },
          border: {
            top: rule(6),
            bottom: rule(6),
            left: { ...rule(6), space: 6 },
            right: { ...rule(6), space: 6 },
          },
          indent: { left: 120, right: 120 },
          children: [run(line, { size: 19 })],
        }),
    ),
  ];
  for (const section of document.sections) {
    children.push(new Paragraph({ heading: HeadingLevel.HEADING_1, keepNext: true, children: [run(section.title)] }));
    for (const block of section.blocks) children.push(...(await blockOf(block, numbers, host)));
  }
  const file = new Document({
    title: plainText(document.title),
    creator: `Meanwise ${document.version}`,
    description: plainText(document.banner.join(" ")),
    styles: {
      default: {
        document: {
          run: { font: "Calibri", size: 21 },
          paragraph: { spacing: { line: 276, lineRule: LineRuleType.AUTO } },
        },
        title: { run: { size: 36, bold: true, font: "Calibri" }, paragraph: { spacing: { after: 160 } } },
        heading1: {
          run: { size: 27, bold: true, font: "Calibri" },
          paragraph: { spacing: { before: 360, after: 120 } },
        },
        heading2: {
          run: { size: 23, bold: true, font: "Calibri" },
          paragraph: { spacing: { before: 240, after: 80 } },
        },
      },
    },
    numbering: {
      config: [
        {
          reference: "points",
          levels: [
            {
              level: 0,
              format: LevelFormat.BULLET,
              text: "\u2022",
              alignment: AlignmentType.LEFT,
              style: { paragraph: { indent: { left: 360, hanging: 240 } } },
            },
          ],
        },
      ],
    },
    sections: [
      {
        properties: {
          page: {
            size: { width: convertMillimetersToTwip(210), height: convertMillimetersToTwip(297) },
            margin: {
              top: convertMillimetersToTwip(22),
              bottom: convertMillimetersToTwip(22),
              left: convertMillimetersToTwip(22),
              right: convertMillimetersToTwip(22),
            },
          },
        },
        footers: {
          default: new Footer({
            children: [
              new Paragraph({
                alignment: AlignmentType.RIGHT,
                children: [new TextRun({ size: 17, children: [PageNumber.CURRENT, " / ", PageNumber.TOTAL_PAGES] })],
              }),
            ],
          }),
        },
        children,
      },
    ],
  });
  return new Uint8Array(await (await Packer.toBlob(file)).arrayBuffer());
}
