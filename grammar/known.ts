/** What is declared and at hand when a cell is typed; everything may be left out. */
export interface Known {
  readonly response?: string;
  readonly units?: readonly string[];
  readonly factors?: readonly string[];
  /** Levels by factor. */
  readonly levels?: Readonly<Record<string, readonly string[]>>;
  readonly covariates?: readonly string[];
  readonly contrasts?: readonly string[];
  readonly families?: readonly string[];
  readonly columns?: readonly string[];
  /** One line about each correction or method, by its words. */
  readonly methods?: Readonly<Record<string, string>>;
  readonly files?: readonly string[];
  readonly plans?: readonly string[];
  /** Topics of help beside the statements. */
  readonly topics?: readonly string[];
  /** The declaration of a name, as it was written. */
  readonly declarations?: Readonly<Record<string, string>>;
}
