import type { Study } from "../study.ts";

/** Used where nobody set a seed: results then repeat, and the seed stands in the record like any other. */
const defaultSeed = 20_260_101;

export const seedOf = (study: Study): number => study.settings.seed ?? defaultSeed;
