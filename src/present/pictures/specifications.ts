import type { Picture } from "../../results/index.ts";
import type { Specification } from "./axes.ts";
import { comparisonsSpecification } from "./comparisons.ts";
import { columnWidths, type PictureWidth } from "./look.ts";
import { meansSpecification } from "./means.ts";
import { passingSpecification } from "./passing.ts";
import { calibrationSpecification, powerSpecification } from "./power.ts";
import { distributionsSpecification, profilesSpecification } from "./profiles.ts";
import { residualsSpecification } from "./residuals.ts";

/** One specification for each picture; a missing or surplus one does not compile. */
const specifications: {
  readonly [K in Picture["picture"]]: (picture: Extract<Picture, { picture: K }>, width: number) => Specification;
} = {
  means: meansSpecification,
  profiles: profilesSpecification,
  distributions: distributionsSpecification,
  residuals: residualsSpecification,
  comparisons: comparisonsSpecification,
  power: powerSpecification,
  passing: passingSpecification,
  calibration: calibrationSpecification,
};

/** Pixels that a picture needs to read well: few levels would look lost over two columns. */
function naturalWidth(picture: Picture): number {
  switch (picture.picture) {
    case "means": {
      const [first, second, ...further] = picture.factors;
      if (further.length > 0) return columnWidths["two columns"];
      return Math.min(680, Math.max(380, first!.levels.length * (70 + 34 * (second?.levels.length ?? 1)) + 60));
    }
    case "profiles":
      return picture.group !== null ? 680 : Math.min(680, Math.max(380, picture.factor.levels.length * 100 + 60));
    case "distributions":
      return Math.min(680, Math.max(380, picture.factor.levels.length * 110 + 60));
    case "power":
      return 520;
    case "comparisons":
    case "calibration":
    case "residuals":
    case "passing":
      return 640;
  }
}

/**
 * The Vega-Lite body of a picture: data inlined, no address of anything outside.
 *
 * @param width of the whole picture; left out, what its content needs
 */
export function specificationOf(picture: Picture, width?: PictureWidth): Specification {
  const specify = specifications[picture.picture] as (picture: Picture, width: number) => Specification;
  return specify(picture, width === undefined ? naturalWidth(picture) : columnWidths[width]);
}
