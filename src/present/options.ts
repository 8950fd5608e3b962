export interface PresentOptions {
  /** Decimal places of estimates; null: as many as show the standard error with two digits. */
  readonly digits: number | null;
  readonly showAdjustedP: boolean;
  readonly showThresholds: boolean;
}

export const defaultOptions: PresentOptions = { digits: null, showAdjustedP: true, showThresholds: true };
