import type { Host } from "../host/index.ts";
import type { Picture, Result } from "../results/index.ts";
import { blocksOf } from "./bundle.ts";
import { drawPicture, type PictureWidth, paperSvg } from "./pictures/index.ts";

/** A spreadsheet takes a cell that begins like this for a formula; a leading apostrophe keeps it text. */
const formulaStart = /^\s*[=+\-@\t\r]/;

function csvCell(value: string | number | boolean | null): string {
  if (value === null) return "";
  if (typeof value === "number" || typeof value === "boolean") return String(value);
  const safe = formulaStart.test(value) && Number.isNaN(Number(value)) ? `'${value}` : value;
  return /[",\n\r;]/.test(safe) ? `"${safe.replace(/"/g, '""')}"` : safe;
}

/** The tables of a result as CSV (RFC 4180), unrounded; several tables one after another with a blank line between. */
export function resultToCsv(result: Result): string {
  const tables = blocksOf(result).flatMap((block) => (block.type === "table" ? [block.table] : []));
  return tables
    .map((table) =>
      [table.fields.map((field) => csvCell(field.name)), ...table.values.map((row) => row.map(csvCell))]
        .map((row) => row.join(","))
        .join("\r\n"),
    )
    .join("\r\n\r\n")
    .concat("\r\n");
}

/** The result as data, just as the command line writes it. */
export function resultToJson(result: Result): string {
  return `${JSON.stringify(result, null, 2)}\n`;
}

/** Pixels to the inch of a picture that goes to a printer. */
const printDensity = 300 / 96;

/**
 * A picture as a file for white paper: near-black text on a white ground, PNG at 300 pixels to the inch.
 *
 * @param width one or two columns of a journal's page; left out, what the content needs
 * @returns the bytes; null where the host cannot make a PNG
 */
export async function pictureFile(
  picture: Picture,
  format: "svg" | "png",
  host: Pick<Host, "svgToPng">,
  width?: PictureWidth,
): Promise<Uint8Array | null> {
  const drawn = await drawPicture(picture, width);
  const svg = paperSvg(drawn);
  return format === "svg"
    ? new TextEncoder().encode(`${svg}\n`)
    : host.svgToPng(svg, Math.round(drawn.width * printDensity));
}
