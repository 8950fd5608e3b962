import type { PictureWidth } from "./pictures/look.ts";

export interface PresentOptions {
  /** Decimal places of estimates; null: as many as show the standard error with two digits. */
  readonly digits: number | null;
  readonly showAdjustedP: boolean;
  readonly showThresholds: boolean;
  /** Width of pictures; left out, what their content needs. */
  readonly width?: PictureWidth;
}

export const defaultOptions: PresentOptions = { digits: null, showAdjustedP: true, showThresholds: true };
