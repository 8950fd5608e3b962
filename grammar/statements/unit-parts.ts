import type { BlocksStatement, ItemsStatement, SubjectsStatement } from "../ast.ts";
import { nameText, namesText } from "../print.ts";
import type { Read } from "../reader.ts";
import { clauses, list, name, optional, part, repeat, sequence, type Syntax, words } from "../syntax.ts";

/** What `subjects`, `items` and `blocks` share. */
export const unitSyntax = (): Syntax =>
  sequence(
    name("name", "a column", "columns"),
    optional(
      words("nested in"),
      name("nestedIn", "a column", "columns"),
      repeat(words("in"), name("nestedIn", "a column", "columns")),
    ),
    clauses(
      part(
        "Covariates that vary within the unit and whose slope may differ from one to the next.",
        words("slopes", "slopes"),
        list("slope", name("covariate", "a covariate", "columns")),
      ),
    ),
  );

export const unitPartsOf = (read: Read) => {
  read.word("slopes");
  return {
    name: read.name("name"),
    nestedIn: read.names("nestedIn"),
    slopes: read.groups("slope").map((each) => each.name("covariate")),
  };
};

export const unitPrint = (it: SubjectsStatement | ItemsStatement | BlocksStatement): readonly string[] => [
  [
    `${it.kind} ${nameText(it.name)}`,
    ...(it.nestedIn.length === 0 ? [] : [`nested in ${it.nestedIn.map(nameText).join(" in ")}`]),
  ].join(" "),
  ...(it.slopes.length === 0 ? [] : [`slopes ${namesText(it.slopes)}`]),
];
