import { readFileSync } from "node:fs";

/** A document to run: its cells in order, and the notebook around them where there is one. */
export interface Document {
  readonly path: string;
  readonly kind: "script" | "notebook";
  readonly cells: readonly DocumentCell[];
  readonly notebook: Notebook | null;
}

export interface DocumentCell {
  /** From 1, code cells only. */
  readonly number: number;
  readonly text: string;
  /** Line of the file (scripts) at which the cell begins, from 1; 1 for notebooks, whose lines are counted within the cell. */
  readonly firstLine: number;
  /** Index among all cells of the notebook. */
  readonly position: number;
}

/** The open notebook format 4.5, as far as this program touches it; all else is kept as it is. */
export interface Notebook {
  cells: NotebookCell[];
  metadata: Record<string, unknown>;
  nbformat: number;
  nbformat_minor: number;
}

export interface NotebookCell {
  cell_type: string;
  source: string | string[];
  metadata?: Record<string, unknown>;
  outputs?: unknown[];
  execution_count?: number | null;
  id?: string;
  [field: string]: unknown;
}

/** A file that is no document this program can run; exit code 2. */
export class DocumentError extends Error {}

const sourceText = (source: string | string[]): string => (Array.isArray(source) ? source.join("") : source);

function isNotebook(value: unknown): value is Notebook {
  if (typeof value !== "object" || value === null) return false;
  const { cells, nbformat } = value as Partial<Notebook>;
  return (
    Array.isArray(cells) &&
    typeof nbformat === "number" &&
    nbformat >= 4 &&
    cells.every(
      (cell) =>
        typeof cell === "object" && cell !== null && (typeof cell.source === "string" || Array.isArray(cell.source)),
    )
  );
}

/**
 * Reads a script (`.mwise`: one cell) or a notebook (`.ipynb`: its code cells).
 * @throws DocumentError when the file is missing, unreadable or of another kind
 */
export function readDocument(path: string): Document {
  let text: string;
  try {
    text = readFileSync(path, "utf8");
  } catch (error) {
    const code = (error as NodeJS.ErrnoException).code;
    throw new DocumentError(
      code === "ENOENT" ? `There is no file "${path}".` : `"${path}" could not be read (${code}).`,
    );
  }
  if (!/\.ipynb$/i.test(path)) {
    return {
      path,
      kind: "script",
      notebook: null,
      cells: [{ number: 1, text: text.replace(/^\uFEFF/, ""), firstLine: 1, position: 0 }],
    };
  }
  let value: unknown;
  try {
    value = JSON.parse(text);
  } catch {
    throw new DocumentError(`"${path}" is not a notebook: it is not complete JSON.`);
  }
  if (!isNotebook(value)) throw new DocumentError(`"${path}" is not a notebook of format 4.`);
  const cells: DocumentCell[] = [];
  for (const [position, cell] of value.cells.entries()) {
    if (cell.cell_type !== "code") continue;
    cells.push({ number: cells.length + 1, text: sourceText(cell.source), firstLine: 1, position });
  }
  return { path, kind: "notebook", notebook: value, cells };
}
