import type { IToken } from "chevrotain";
import { clauseOptions, mayBeginClause } from "./first.ts";
import type { PlaceMap } from "./span.ts";
import { Break, emptyToken, endOf, marks, wordTokens } from "./tokens.ts";

/** After these a line goes on, whatever the next one begins with. */
const opening = new Set(
  [":", ",", "(", "+", "-", "*", "/", "^", "=", "!=", "<", "<=", ">", ">="].map((each) => marks.get(each)!),
);
/** A line that begins with one of these goes on from the line before. */
const continuing = new Set(
  [",", ")", "+", "-", "*", "/", "^", "=", "!=", "<", "<=", ">", ">="].map((each) => marks.get(each)!),
);

/**
 * Puts a mark before each clause that begins on a line of its own. Other line ends inside a statement mean nothing, so a list may run over
 * several lines as long as its commas stand.
 * @param tokens the statement, its verb first
 */
export function withBreaks(verb: string, tokens: readonly IToken[], places: PlaceMap): IToken[] {
  const options = clauseOptions(verb, tokens);
  const because = wordTokens.get("because")!;
  const found: IToken[] = [];
  let depth = 0;
  for (const [index, token] of tokens.entries()) {
    const before = tokens[index - 1];
    if (
      before !== undefined &&
      depth === 0 &&
      places.lineOf(token.startOffset) !== places.lineOf(endOf(before) - 1) &&
      !opening.has(before.tokenType) &&
      !continuing.has(token.tokenType) &&
      (mayBeginClause(options, token) || (verb === "amend" && token.tokenType === because))
    ) {
      found.push(emptyToken(Break, token.startOffset));
    }
    if (token.tokenType === marks.get("(")) depth++;
    if (token.tokenType === marks.get(")")) depth = Math.max(0, depth - 1);
    found.push(token);
  }
  return found;
}
