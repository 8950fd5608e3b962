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
  const closed = closedParentheses(tokens);
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
    if (closed.has(token)) depth += token.tokenType === marks.get("(") ? 1 : -1;
    found.push(token);
  }
  return found;
}

/** The parentheses that have a partner; one that was never closed must not swallow the clauses below it. */
function closedParentheses(tokens: readonly IToken[]): ReadonlySet<IToken> {
  const open: IToken[] = [];
  const found = new Set<IToken>();
  for (const token of tokens) {
    if (token.tokenType === marks.get("(")) open.push(token);
    if (token.tokenType !== marks.get(")")) continue;
    const partner = open.pop();
    if (partner !== undefined) found.add(partner).add(token);
  }
  return found;
}
