export { type DrawnPicture, drawPicture, inlineSvg, paperSvg } from "./drawing.ts";
export { columnWidths, type PictureWidth } from "./look.ts";
export { describePicture, pictureCaption } from "./words.ts";
