/** The door of the grammar room: text of a cell in, typed statements with places out. Knows nothing of statistics, data or files. */
export type * from "./ast.ts";
export { parseCell } from "./cell.ts";
export { type CompletionItem, type CompletionKind, type Completions, complete } from "./complete.ts";
export { formatCell, formatStatement } from "./format.ts";
export {
  classifyTokens,
  codeMirror5Mode,
  codeMirror6Mode,
  type HighlightKind,
  type HighlightToken,
} from "./highlight/index.ts";
export { formsOf, type Hover, hover } from "./hover.ts";
export { type Completeness, isComplete } from "./is-complete.ts";
export type { Known } from "./known.ts";
export { nearest } from "./nearest.ts";
export { conditionText, contrastText, expressionText, memberText, writtenName } from "./print.ts";
export { type ProblemCode, problem } from "./problems.ts";
export { type HelpSection, type HelpTopic, helpTopics, referencePage, statementsByGroup } from "./reference.ts";
export { methodWords } from "./rules.ts";
export type { Span } from "./span.ts";
export { languageWords } from "./tokens.ts";
export { sameUnit } from "./units.ts";
