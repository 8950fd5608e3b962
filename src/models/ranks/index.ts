/** Tests and comparisons by ranks, between and within subjects. */
export {
  friedmanAnalysis,
  friedmanContrasts,
  type ScoreTable,
  scoreTable,
} from "./friedman.ts";
export { kruskalWallisAnalysis, type RankAnalysis } from "./kruskal-wallis.ts";
export { midRanks } from "./mid-ranks.ts";
export { rankContrasts } from "./rank-contrasts.ts";
