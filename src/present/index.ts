/** The door of the present room: results to text, HTML, Markdown, LaTeX, table resources, pictures and reports. */
export { type Bundle, blocksOf, presentResult, presentText, tablesOf } from "./bundle.ts";
export { pictureFile, resultToCsv, resultToJson } from "./export.ts";
export { noteCodes, noteText } from "./notes.ts";
export { defaultOptions, type PresentOptions } from "./options.ts";
export { describePicture, drawPicture, inlineSvg, type PictureWidth, paperSvg } from "./pictures/index.ts";
export { presentProblems, problemText, type ShownProblem } from "./problems.ts";
export { references } from "./references.ts";
export { buildReport, standingCaution } from "./report/build.ts";
export type { ReportDocument, ReportFacts, ReportSection } from "./report/document.ts";
export { renderReport } from "./report/render.ts";
