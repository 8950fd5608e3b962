import type { FactorStatement } from "../ast.ts";
import { nameText, namesText, numbersText } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { clauses, either, level, list, mark, name, number, optional, part, sequence, words } from "../syntax.ts";

export const factor = defineStatement<FactorStatement>({
  verb: "factor",
  group: "declare",
  help: "Declares a factor, the unit it varies within or between, and its levels in order.",
  details: [
    "Within: each unit has every level. Between: each unit has one. Both may stand: within reader between passages.",
    'Levels match the data exactly; quote those with blanks: "dark roast".',
  ],
  example: `factor dose between tanks: none, low, mid, high
  at 0, 10, 40, 100
  ordered
  reference none`,
  syntax: sequence(
    name("name", "a name for the factor", "columns"),
    either(
      sequence(
        words("within", "within"),
        name("unit", "a unit", "units"),
        optional(words("between"), name("betweenUnit", "a unit", "units")),
      ),
      sequence(words("between", "between"), name("unit", "a unit", "units")),
    ),
    mark(":"),
    list("levels", level("level")),
    clauses(
      part(
        "Numeric positions of the levels, one for each, for trends.",
        words("at", "at"),
        list("positions", number("position", "a position")),
      ),
      part("The levels have an order that the analysis may use.", words("ordered", "ordered")),
      part("The level that the others are usually held against.", words("reference"), level("reference")),
      part(
        "An attribute that nobody assigned, such as sex; generalised eta squared needs to know.",
        words("measured", "measured"),
      ),
    ),
  ),
  build: (read) => ({
    kind: "factor",
    name: read.name("name"),
    varies: read.has("within") ? "within" : "between",
    unit: read.name("unit"),
    betweenUnit: read.nameOrNull("betweenUnit"),
    levels: read.groups("levels").map((each) => each.name("level")),
    ordered: read.word("ordered") !== null,
    measured: read.word("measured") !== null,
    positions: read.word("at") === null ? null : read.groups("positions").map((each) => each.number("position")),
    reference: read.nameOrNull("reference"),
    span: read.span,
  }),
  print: (it) => [
    `factor ${nameText(it.name)} ${it.varies} ${nameText(it.unit)}${it.betweenUnit === null ? "" : ` between ${nameText(it.betweenUnit)}`}: ${namesText(it.levels)}`,
    ...(it.positions === null ? [] : [`at ${numbersText(it.positions)}`]),
    ...(it.ordered ? ["ordered"] : []),
    ...(it.reference === null ? [] : [`reference ${nameText(it.reference)}`]),
    ...(it.measured ? ["measured"] : []),
  ],
});
