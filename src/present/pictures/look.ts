/**
 * The look of every picture. Pictures stand on a transparent ground, on white paper and on dark screens alike: every hue keeps a contrast of
 * at least 3 to 1 against white and against near-black. Neighbouring hues differ in lightness too, so that they stay apart in grey and for
 * every common kind of colour blindness; shape, filling and dashes say the same once more.
 */
export const hues = ["#2b7bb9", "#d17f1f", "#945851", "#579e97", "#6a5cf5", "#9a8a1c"] as const;
export const shapes = ["circle", "square", "triangle-up", "diamond", "triangle-down", "cross"] as const;
export const dashes = [
  [1, 0],
  [7, 3],
  [2, 2],
  [9, 3, 2, 3],
  [4, 4],
  [12, 3],
] as const;
/** Mid grey for text, axes and rules: 4.2 to 1 against white and near-black. Inside a page it becomes the page's own text colour. */
export const ink = "#757d81";
export const font = "DejaVu Sans, Verdana, sans-serif";
/** Pixels at 96 to the inch: 8.25 points, as journals ask for in figures. */
export const labelSize = 11;
export const titleSize = 11.5;

export const hueOf = (index: number): string => hues[index % hues.length]!;
export const shapeOf = (index: number): string => shapes[index % shapes.length]!;
/** Every second group is drawn open, which grey print keeps. */
export const isOpen = (index: number): boolean => index % 2 === 1;

/** Widths in pixels at 96 to the inch: 85 mm and 180 mm, one column and two columns of a journal's page. */
export const columnWidths = { "one column": 321, "two columns": 680 } as const;
export type PictureWidth = keyof typeof columnWidths;

export const config = {
  background: null,
  font,
  padding: 4,
  lineBreak: "\n",
  // The library would build descriptions of marks from axis titles that it does not escape; the picture has a title and description of its own.
  aria: false,
  mark: { aria: false },
  view: { stroke: null },
  axis: {
    labelFontSize: labelSize,
    titleFontSize: titleSize,
    titleFontWeight: "normal",
    labelColor: ink,
    titleColor: ink,
    domainColor: ink,
    tickColor: ink,
    tickSize: 4,
    gridColor: ink,
    gridOpacity: 0.16,
    titlePadding: 8,
    labelLimit: 0,
    titleLimit: 0,
    labelOverlap: false,
    labelFlush: false,
  },
  legend: {
    labelFontSize: labelSize,
    titleFontSize: titleSize,
    titleFontWeight: "normal",
    labelColor: ink,
    titleColor: ink,
    labelLimit: 0,
    titleLimit: 0,
    symbolSize: 70,
    symbolStrokeWidth: 1.8,
    orient: "top",
    offset: 24,
    direction: "horizontal",
    padding: 0,
  },
  title: {
    color: ink,
    fontSize: titleSize,
    fontWeight: "normal",
    anchor: "start",
    frame: "bounds",
    offset: 8,
    limit: 0,
  },
  rule: { color: ink },
  text: { color: ink, font, fontSize: labelSize },
} as const;
