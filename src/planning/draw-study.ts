import { choleskyFactor, type RandomStream } from "../numeric/index.ts";
import { type PlanLayout, symmetricRoot } from "./layout.ts";

/** Statistics of one simulated study around the true means; overwritten by every draw. */
export interface DrawnStudy {
  readonly sizes: Int32Array;
  /** Mean minus true mean, groups x within cells. */
  readonly means: Float64Array;
  /** Sums of squares and products within groups, summed over groups, within cells x within cells. */
  readonly products: Float64Array;
  /** The same for each group apart; only filled where `own` was asked for. */
  readonly ownProducts: Float64Array;
  /** Subjects minus groups. */
  df: number;
  /** False where some group is left with fewer than two complete subjects. */
  whole: boolean;
}

/** Gamma variate of shape >= 1/2 and scale 1. @source marsaglia-tsang-2000 (ACM Trans. Math. Softw. 26, 363-372) */
function gammaVariate(stream: RandomStream, shape: number): number {
  if (shape < 1) return gammaVariate(stream, shape + 1) * stream.uniform() ** (1 / shape);
  const d = shape - 1 / 3;
  const c = 1 / Math.sqrt(9 * d);
  for (;;) {
    const x = stream.normal();
    const root = 1 + c * x;
    if (root <= 0) continue;
    const v = root * root * root;
    const u = stream.uniform();
    if (u < 1 - 0.0331 * x ** 4 || Math.log(u) < 0.5 * x * x + d * (1 - v + Math.log(v))) return d * v;
  }
}

/** A variate of mean 0 and variance 1. Skewed: gamma of shape 2 (skewness 1.41); heavy tails: t with 5 df (excess kurtosis 6). */
export function shapedVariate(
  stream: RandomStream,
  shape: PlanLayout["shape"],
  residuals: readonly number[] | null,
): number {
  if (residuals !== null) return residuals[stream.integer(residuals.length)]!;
  if (shape === "skewed") return (-Math.log(stream.uniform() * stream.uniform()) - 2) / Math.SQRT2;
  if (shape === "heavy tails") return stream.normal() * Math.sqrt(1.5 / gammaVariate(stream, 2.5));
  return stream.normal();
}

/**
 * Draws the statistics that the analyses need. Normal scores: means and sums of products directly, from their own laws (Bartlett 1933,
 * also with fewer df than cells), so that the work does not grow with the number of subjects. Other shapes: all scores.
 * With values missing, only complete subjects count.
 *
 * @param own  also the sums of products of each group
 * @source bartlett-1933 (Proc. R. Soc. Edinb. 53, 260-283)
 */
export function studyDrawer(layout: PlanLayout, sizes: readonly number[], own: boolean) {
  const { groups, withinCells: width, missing } = layout;
  const study: DrawnStudy = {
    sizes: Int32Array.from(sizes),
    means: new Float64Array(groups * width),
    products: new Float64Array(width * width),
    ownProducts: new Float64Array(own ? groups * width * width : 0),
    df: 0,
    whole: true,
  };
  const complete = (1 - missing) ** width;
  const normal = layout.shape === "normal" && layout.residuals === null;
  const roots = layout.covariances.map((covariance) =>
    Float64Array.from((normal ? choleskyFactor(covariance) : symmetricRoot(covariance)).flat()),
  );
  // All normal variates of a study are drawn at once; those of the gamma variates come after them.
  const triangle = (width * (width - 1)) / 2;
  const normals = new Float64Array(groups * width + (own || !layout.sameCovariance ? groups : 1) * triangle);
  let used = 0;
  const variates = new Float64Array(width);
  const scores = new Float64Array(width);
  const bartlett = new Float64Array(width * width);
  const turned = new Float64Array(width * width);

  const setSizes = (stream: RandomStream) => {
    study.df = -groups;
    study.whole = true;
    for (let group = 0; group < groups; group++) {
      let size = sizes[group]!;
      if (missing > 0) {
        size = 0;
        for (let subject = 0; subject < sizes[group]!; subject++) if (stream.uniform() < complete) size++;
      }
      study.sizes[group] = size;
      study.df += size;
      if (size < 2) study.whole = false;
    }
  };

  /** Adds root times B times B' times root', B Bartlett's lower trapezoid of `df` columns. */
  const addWishart = (stream: RandomStream, root: Float64Array, df: number, target: Float64Array, at: number) => {
    const columns = Math.min(width, df);
    for (let i = 0; i < width; i++)
      for (let j = 0; j < columns; j++)
        bartlett[i * width + j] =
          j < i ? normals[used++]! : j === i ? Math.sqrt(2 * gammaVariate(stream, (df - i) / 2)) : 0;
    for (let i = 0; i < width; i++)
      for (let j = 0; j < columns; j++) {
        let sum = 0;
        for (let k = j; k <= i; k++) sum += root[i * width + k]! * bartlett[k * width + j]!;
        turned[i * width + j] = sum;
      }
    for (let i = 0; i < width; i++)
      for (let j = 0; j <= i; j++) {
        let sum = 0;
        const last = Math.min(j + 1, columns);
        for (let k = 0; k < last; k++) sum += turned[i * width + k]! * turned[j * width + k]!;
        target[at + i * width + j]! += sum;
        if (i !== j) target[at + j * width + i]! += sum;
      }
  };

  const drawNormal = (stream: RandomStream) => {
    stream.fillNormals(normals);
    used = 0;
    for (let group = 0; group < groups; group++) {
      const root = roots[group]!;
      const scale = 1 / Math.sqrt(study.sizes[group]!);
      for (let i = 0; i < width; i++) variates[i] = normals[used++]!;
      for (let i = 0; i < width; i++) {
        let sum = 0;
        for (let k = 0; k <= i; k++) sum += root[i * width + k]! * variates[k]!;
        study.means[group * width + i] = sum * scale;
      }
    }
    if (!own && layout.sameCovariance) {
      addWishart(stream, roots[0]!, study.df, study.products, 0);
      return;
    }
    for (let group = 0; group < groups; group++) {
      const target = own ? study.ownProducts : study.products;
      addWishart(stream, roots[group]!, study.sizes[group]! - 1, target, own ? group * width * width : 0);
    }
    if (own) sumOwn();
  };

  const sumOwn = () => {
    const square = width * width;
    for (let group = 0; group < groups; group++)
      for (let at = 0; at < square; at++) study.products[at]! += study.ownProducts[group * square + at]!;
  };

  const drawScores = (stream: RandomStream) => {
    for (let group = 0; group < groups; group++) {
      const root = roots[group]!;
      const size = study.sizes[group]!;
      const target = own ? study.ownProducts : study.products;
      const at = own ? group * width * width : 0;
      const start = group * width;
      for (let i = 0; i < width; i++) study.means[start + i] = 0;
      for (let subject = 0; subject < size; subject++) {
        for (let i = 0; i < width; i++) variates[i] = shapedVariate(stream, layout.shape, layout.residuals);
        // running means and products (Welford 1962): no cancellation
        const share = 1 / (subject + 1);
        for (let i = 0; i < width; i++) {
          let sum = 0;
          for (let k = 0; k < width; k++) sum += root[i * width + k]! * variates[k]!;
          scores[i] = sum - study.means[start + i]!;
        }
        const weight = subject * share;
        for (let i = 0; i < width; i++) {
          for (let j = 0; j <= i; j++) {
            const product = weight * scores[i]! * scores[j]!;
            target[at + i * width + j]! += product;
            if (i !== j) target[at + j * width + i]! += product;
          }
        }
        for (let i = 0; i < width; i++) study.means[start + i]! += share * scores[i]!;
      }
    }
    if (own) sumOwn();
  };

  return (stream: RandomStream): DrawnStudy => {
    setSizes(stream);
    study.products.fill(0);
    study.ownProducts.fill(0);
    if (!study.whole) return study;
    if (normal) drawNormal(stream);
    else drawScores(stream);
    return study;
  };
}
