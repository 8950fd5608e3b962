/**
 * The look of every picture. Three hues that stay apart for all common kinds of colour blindness and in grey (their lightness differs),
 * on a transparent ground: they keep a contrast of at least 3 to 1 against both white and near-black.
 */
export const hues = ["#2a7f9e", "#c8641b", "#7a6bb0", "#5c8a3a", "#a34a6f", "#7d7d2a"] as const;
export const shapes = ["circle", "square", "triangle-up", "diamond", "cross", "triangle-down"] as const;
/** Mid grey for text, axes and rules: readable on white and on near-black. */
export const ink = "#7a8286";
export const font = "DejaVu Sans, Verdana, sans-serif";

export const config = {
  background: null,
  font,
  padding: 8,
  view: { stroke: null },
  axis: {
    labelFontSize: 12,
    titleFontSize: 12.5,
    titleFontWeight: "normal",
    labelColor: ink,
    titleColor: ink,
    domainColor: ink,
    tickColor: ink,
    gridColor: ink,
    gridOpacity: 0.18,
    titlePadding: 10,
    labelLimit: 260,
    labelOverlap: false,
  },
  legend: {
    labelFontSize: 12,
    titleFontSize: 12.5,
    titleFontWeight: "normal",
    labelColor: ink,
    titleColor: ink,
    labelLimit: 320,
    symbolSize: 90,
    orient: "top",
    direction: "horizontal",
  },
  header: {
    labelFontSize: 12.5,
    titleFontSize: 12.5,
    titleFontWeight: "normal",
    labelColor: ink,
    titleColor: ink,
    labelLimit: 320,
  },
  title: { color: ink, fontSize: 13, fontWeight: "normal", anchor: "start", subtitleColor: ink },
  range: { category: hues, symbol: shapes },
  rule: { color: ink },
  text: { color: ink, font },
} as const;
