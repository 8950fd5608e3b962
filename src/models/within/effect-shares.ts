/**
 * Generalised eta squared of every effect: its share of the variation that a study with other manipulated factors would also
 * have had (subjects, and whatever measured factors bring), so that the same effect compares across designs.
 *
 * @param effects names of the factors of each effect, and its sum of squares
 * @param errorSum all error sums of squares of the design together (subjects within groups and their interactions)
 * @param measured names of the factors that nobody assigned
 * @returns one share per effect, 0 where there is no variation at all
 * @source olejnik-algina-2003 (Psychological Methods 8, 434-447), equation 5
 */
export function generalizedEtaSquared(
  effects: readonly { readonly factors: readonly string[]; readonly sumOfSquares: number }[],
  errorSum: number,
  measured: readonly string[],
): number[] {
  const isMeasured = (factors: readonly string[]) => factors.some((name) => measured.includes(name));
  const fromMeasured = effects.reduce(
    (sum, effect) => (isMeasured(effect.factors) ? sum + effect.sumOfSquares : sum),
    0,
  );
  return effects.map((effect) => {
    // A manipulated effect adds itself; one with a measured factor is already among the measured sums.
    const own = isMeasured(effect.factors) ? 0 : effect.sumOfSquares;
    const below = own + fromMeasured + errorSum;
    return below > 0 ? effect.sumOfSquares / below : 0;
  });
}
