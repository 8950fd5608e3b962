import type { CodedCovariate, CodedFactor, ModelData } from "../../../src/design/types.ts";

/** A decimal text as a scaled integer. */
function scaled(text: string, decimals: number): bigint {
  const [whole, fraction = ""] = text.trim().split(".");
  return BigInt(`${whole || "0"}${fraction.padEnd(decimals, "0")}`.replace(/^(-?)\s*/, "$1"));
}

/** Rows of [group, decimal text], centred near their mean in integer arithmetic before anything becomes binary. */
export function exactData(rows: readonly (readonly [string, string])[]): ModelData {
  const decimals = Math.max(...rows.map(([, text]) => (text.trim().split(".")[1] ?? "").length));
  const integers = rows.map(([, text]) => scaled(text, decimals));
  const unit = 10n ** BigInt(decimals);
  const binary = 2n ** 60n;
  const sum = integers.reduce((total, value) => total + value, 0n);
  const center = Number(`${sum / BigInt(rows.length)}e-${decimals}`);
  // The center is a double, hence a whole number of 2^-60 here.
  const centerBinary = BigInt(Math.trunc(center)) * binary + BigInt((center - Math.trunc(center)) * 2 ** 60);
  const offsets = integers.map((value) => Number(value * binary - centerBinary * unit) / Number(unit * binary));
  return groupData(
    rows.map(([group]) => group),
    offsets,
    center,
  );
}

/** One between factor, levels in order of appearance. */
export function groupData(groups: readonly string[], values: readonly number[], center = 0): ModelData {
  return factorData({ group: groups }, values, { center });
}

export interface DataOptions {
  readonly center?: number;
  readonly covariates?: Readonly<Record<string, readonly number[]>>;
  readonly levels?: Readonly<Record<string, readonly string[]>>;
  readonly variances?: "equal" | "unequal";
  readonly blocks?: readonly string[];
}

/** Between factors as columns of level names; covariates centred. */
export function factorData(
  columns: Readonly<Record<string, readonly string[]>>,
  values: readonly number[],
  options: DataOptions = {},
): ModelData {
  const rows = values.length;
  const factors: CodedFactor[] = Object.entries(columns).map(([name, column]) => {
    const levels = options.levels?.[name] ?? [...new Set(column)];
    return {
      name,
      levels,
      varies: "between",
      unit: "subject",
      betweenUnit: null,
      ordered: false,
      positions: null,
      reference: null,
      measured: false,
      codes: Int32Array.from(column, (level) => levels.indexOf(level)),
    };
  });
  const cells = new Int32Array(rows);
  for (const factor of factors) {
    for (let row = 0; row < rows; row++) cells[row] = cells[row]! * factor.levels.length + factor.codes[row]!;
  }
  const covariates: CodedCovariate[] = Object.entries(options.covariates ?? {}).map(([name, column]) => {
    const center = column.reduce((sum, value) => sum + value, 0) / rows;
    return { name, varies: "between", centred: true, center, values: Float64Array.from(column, (v) => v - center) };
  });
  const blockLabels = [...new Set(options.blocks ?? [])];
  return {
    rows,
    response: { center: options.center ?? 0, offsets: Float64Array.from(values) },
    factors,
    units: [
      {
        name: "subject",
        role: "subjects",
        nestedIn: [],
        slopes: [],
        codes: Int32Array.from({ length: rows }, (_, row) => row),
        labels: Array.from({ length: rows }, (_, row) => `s${row + 1}`),
        count: rows,
      },
      ...(options.blocks === undefined
        ? []
        : [
            {
              name: "block",
              role: "blocks" as const,
              nestedIn: [],
              slopes: [],
              codes: Int32Array.from(options.blocks, (label) => blockLabels.indexOf(label)),
              labels: blockLabels,
              count: blockLabels.length,
            },
          ]),
    ],
    covariates,
    assumptions: { variances: options.variances ?? "equal", covariance: null },
    cells,
    cellCount: factors.reduce((count, factor) => count * factor.levels.length, 1),
  };
}
