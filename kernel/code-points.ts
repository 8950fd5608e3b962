/** The protocol counts code points, JavaScript UTF-16 units; both are converted here and nowhere else. */

/** UTF-16 offset of a position counted in code points, kept inside the text. */
export function utf16Offset(text: string, codePoints: number): number {
  let offset = 0;
  for (let count = 0; count < codePoints && offset < text.length; count++) {
    offset += text.codePointAt(offset)! > 0xffff ? 2 : 1;
  }
  return offset;
}

/** Position in code points of a UTF-16 offset, kept inside the text. */
export function codePointOffset(text: string, utf16: number): number {
  let count = 0;
  for (let offset = 0; offset < Math.min(utf16, text.length); count++) {
    offset += text.codePointAt(offset)! > 0xffff ? 2 : 1;
  }
  return count;
}
