import type { Picture } from "../results/index.ts";

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
  /** Type of the raw values, for the table resource. */
  readonly type: "string" | "number" | "boolean";
}

export interface PresentedTable {
  readonly caption: string;
  readonly columns: readonly PresentedColumn[];
  /** Formatted. */
  readonly rows: readonly (readonly string[])[];
  /** Unrounded, same shape. */
  readonly values: readonly (readonly (string | number | boolean | null)[])[];
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
    readonly value: (row: Row) => string | number | boolean | null | undefined;
    readonly text?: (row: Row) => string;
    readonly header?: boolean;
    readonly align?: "left" | "right";
    /** Left out of the table when false. */
    readonly shown?: boolean;
  }[],
  footnotes: readonly string[] = [],
): PresentedTable {
  const shown = columns.filter((column) => column.shown !== false);
  const values = rows.map((row) => shown.map((column) => column.value(row) ?? null));
  return {
    caption,
    columns: shown.map((column, index) => {
      const type = columnType(values.map((row) => row[index]!));
      return {
        label: column.label,
        type,
        align: column.align ?? (type === "string" || column.header === true ? "left" : "right"),
      };
    }),
    rows: rows.map((row, place) =>
      shown.map((column, index) =>
        column.text === undefined ? String(values[place]![index] ?? "\u2013") : column.text(row),
      ),
    ),
    values,
    footnotes,
    headers: Math.max(1, shown.filter((column) => column.header === true).length),
  };
}

function columnType(values: readonly (string | number | boolean | null)[]): "string" | "number" | "boolean" {
  const present = values.filter((value) => value !== null);
  if (present.length > 0 && present.every((value) => typeof value === "number")) return "number";
  if (present.length > 0 && present.every((value) => typeof value === "boolean")) return "boolean";
  return "string";
}
