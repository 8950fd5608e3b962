import type { Note, Picture } from "../results/index.ts";
import { noteTexts } from "./notes.ts";

/** What a result or a report shows, before it becomes text, HTML, Markdown or LaTeX: one description, many forms. */
export type Block =
  | { readonly type: "heading"; readonly level: 1 | 2 | 3; readonly text: string }
  | { readonly type: "paragraph"; readonly text: string; readonly tone?: "plain" | "note" | "caution" | "state" }
  | { readonly type: "list"; readonly items: readonly string[] }
  | { readonly type: "statements"; readonly lines: readonly string[] }
  | { readonly type: "table"; readonly table: PresentedTable }
  | { readonly type: "picture"; readonly picture: Picture; readonly caption: string };

export interface PresentedColumn {
  readonly label: string;
  readonly align: "left" | "right";
}

/** A field of the table as data; a presented column may stand for several, as an interval does for its two ends. */
export interface PresentedField {
  readonly name: string;
  readonly type: "string" | "number" | "boolean";
}

type Value = string | number | boolean | null;

export interface PresentedTable {
  readonly caption: string;
  readonly columns: readonly PresentedColumn[];
  /** Formatted. */
  readonly rows: readonly (readonly string[])[];
  readonly fields: readonly PresentedField[];
  /** Unrounded, a value for each field. */
  readonly values: readonly (readonly Value[])[];
  readonly footnotes: readonly string[];
  /** How many of the leading columns name the row. */
  readonly headers: number;
}

/** Builds a table from column descriptions, each of which formats its own cell. */
export function tableOf<Row>(
  caption: string,
  rows: readonly Row[],
  columns: readonly {
    readonly label: string;
    readonly value: (row: Row) => Value | undefined;
    /** Fields of the table as data that this column stands for, where it is not one of the same name. */
    readonly fields?: readonly { readonly name: string; readonly value: (row: Row) => Value | undefined }[];
    readonly text?: (row: Row) => string;
    readonly header?: boolean;
    readonly align?: "left" | "right";
    /** Left out of the table when false. */
    readonly shown?: boolean;
  }[],
  footnotes: readonly string[] = [],
): PresentedTable {
  const shown = columns.filter((column) => column.shown !== false);
  const own = rows.map((row) => shown.map((column) => column.value(row) ?? null));
  const spread = shown.flatMap((column) => column.fields ?? [{ name: column.label, value: column.value }]);
  const values = rows.map((row) => spread.map((field) => field.value(row) ?? null));
  const names = spread.map((field) => field.name);
  return {
    caption,
    columns: shown.map((column, index) => ({
      label: column.label,
      align:
        column.align ??
        (columnType(own.map((row) => row[index]!)) === "string" || column.header === true ? "left" : "right"),
    })),
    rows: rows.map((row, place) =>
      shown.map((column, index) =>
        column.text === undefined ? String(own[place]![index] ?? "\u2013") : column.text(row),
      ),
    ),
    fields: names.map((name, index) => ({
      name: names.indexOf(name) === index ? name : `${name} (${index + 1})`,
      type: columnType(values.map((row) => row[index]!)),
    })),
    values,
    footnotes,
    headers: Math.max(1, shown.filter((column) => column.header === true).length),
  };
}

/** The two ends of an interval as fields of their own. */
export const intervalFields = <Row>(
  name: string,
  lower: (row: Row) => number | null | undefined,
  upper: (row: Row) => number | null | undefined,
) => [
  { name: `${name}, lower`, value: lower },
  { name: `${name}, upper`, value: upper },
];

export const paragraph = (text: string, tone: "plain" | "note" | "caution" | "state" = "plain"): Block => ({
  type: "paragraph",
  text,
  tone,
});
export const noteBlocks = (notes: readonly Note[]): Block[] => noteTexts(notes).map((text) => paragraph(text, "note"));

function columnType(values: readonly Value[]): "string" | "number" | "boolean" {
  const present = values.filter((value) => value !== null);
  if (present.length > 0 && present.every((value) => typeof value === "number")) return "number";
  if (present.length > 0 && present.every((value) => typeof value === "boolean")) return "boolean";
  return "string";
}
