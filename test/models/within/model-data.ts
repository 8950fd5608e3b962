import type { ModelData } from "../../../src/design/types.ts";

/** A design laid out by hand: what the design room would hand over. */
export function modelData(options: {
  readonly response: readonly number[];
  readonly factors: readonly {
    readonly name: string;
    readonly codes: readonly number[];
    readonly within: boolean;
    readonly measured?: boolean;
    readonly levels?: number;
  }[];
  readonly units: Readonly<Record<string, readonly number[]>>;
  readonly items?: readonly string[];
  readonly blocks?: readonly string[];
  readonly slopes?: Readonly<Record<string, readonly string[]>>;
  readonly covariates?: Readonly<Record<string, readonly number[]>>;
  readonly variances?: "equal" | "unequal";
  readonly covariance?: ModelData["assumptions"]["covariance"];
  readonly center?: number;
}): ModelData {
  const rows = options.response.length;
  const unitNames = Object.keys(options.units);
  const factors = options.factors.map(({ name, codes, within, measured, levels }) => ({
    name,
    levels: Array.from({ length: levels ?? Math.max(...codes) + 1 }, (_, level) => `${name}${level}`),
    varies: within ? ("within" as const) : ("between" as const),
    unit: unitNames[0]!,
    betweenUnit: null,
    ordered: false,
    positions: null,
    reference: null,
    measured: measured === true,
    codes: Int32Array.from(codes),
  }));
  const cells = new Int32Array(rows);
  for (const factor of factors) {
    for (let row = 0; row < rows; row++) cells[row] = cells[row]! * factor.levels.length + factor.codes[row]!;
  }
  const center = options.center ?? 0;
  return {
    rows,
    response: { center, offsets: Float64Array.from(options.response, (value) => value - center) },
    factors,
    units: unitNames.map((name) => {
      const codes = Int32Array.from(options.units[name]!);
      const count = Math.max(...codes) + 1;
      return {
        name,
        role: options.items?.includes(name)
          ? ("items" as const)
          : options.blocks?.includes(name)
            ? ("blocks" as const)
            : ("subjects" as const),
        nestedIn: [],
        slopes: options.slopes?.[name] ?? [],
        codes,
        labels: Array.from({ length: count }, (_, index) => `${name} ${index + 1}`),
        count,
      };
    }),
    covariates: Object.entries(options.covariates ?? {}).map(([name, values]) => ({
      name,
      varies: "within" as const,
      centred: false,
      values: Float64Array.from(values),
      center: 0,
    })),
    assumptions: { variances: options.variances ?? "equal", covariance: options.covariance ?? null },
    cells,
    cellCount: factors.reduce((count, factor) => count * factor.levels.length, 1),
  };
}
