import type { DrawStatement } from "../ast.ts";
import { nameText, namesText, numberText } from "../print.ts";
import { problem } from "../problems.ts";
import { BuildProblem } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { choice, list, name, number, optional, part, rule, type Syntax, sequence, words } from "../syntax.ts";

const ofResponse = (): Syntax =>
  sequence(
    optional(words("of"), name("response", "the response", "response")),
    optional(words("by"), list("factors", name("factor", "a factor", "factors"))),
  );

export const draw = defineStatement<DrawStatement>({
  verb: "draw",
  group: "analyse",
  help: "Draws a picture: means, profiles, distributions, residuals, comparisons, power, passing or calibration.",
  details: ["Every picture comes with a description in words."],
  example: "draw means of seconds by glove, shift",
  syntax: choice(
    "what to draw",
    part("Means with their intervals and the values behind them.", words("means", "what"), ofResponse()),
    part("Each subject's own line across the levels.", words("profiles", "what"), ofResponse()),
    part("How the values of each cell are spread.", words("distributions", "what"), ofResponse()),
    part("Residuals against fitted values, and against normal quantiles.", words("residuals", "what"), ofResponse()),
    part(
      "Intervals of a family against zero or its margin.",
      words("comparisons", "what"),
      optional(name("family", "a family", "families")),
    ),
    part(
      "Power against the number of subjects.",
      words("power", "what"),
      words("of"),
      rule("aim", "aim"),
      optional(
        words("from"),
        number("from", "a number of subjects"),
        words("to"),
        number("to", "a number of subjects"),
        words("subjects"),
      ),
    ),
    part(
      "How error passes between comparisons and families.",
      words("passing", "what"),
      optional(words("of"), name("family", "a family", "families")),
    ),
    part(
      "The error, power and coverage that calibrate found.",
      words("calibration", "what"),
      optional(words("of"), rule("aim", "aim")),
    ),
  ),
  build: (read) => {
    const what = read.word<DrawStatement["what"]>("what")!;
    const aim = read.builtOrNull<{ family: DrawStatement["family"] }>("aim");
    const from = read.wholeOrNull("from", "The number of subjects", 2);
    const to = read.wholeOrNull("to", "The number of subjects", 2);
    if (from !== null && to !== null && from.value >= to.value) {
      throw new BuildProblem(
        problem("number-range", to.span, {
          what: "The last number of subjects",
          value: to.text,
          allowed: `more than ${from.text}`,
          percent: null,
        }),
      );
    }
    return {
      kind: "draw",
      what,
      response: read.nameOrNull("response"),
      by: read.groups("factors").map((each) => each.name("factor")),
      family: aim !== null ? aim.family : read.nameOrNull("family"),
      omnibus: aim !== null && aim.family === null,
      from,
      to,
      span: read.span,
    };
  },
  print: (it) => {
    const aim = it.omnibus ? "omnibus" : it.family === null ? null : nameText(it.family);
    return [
      [
        `draw ${it.what}`,
        ...(it.response === null ? [] : [`of ${nameText(it.response)}`]),
        ...(it.by.length === 0 ? [] : [`by ${namesText(it.by)}`]),
        ...(aim === null ? [] : [it.what === "comparisons" ? aim : `of ${aim}`]),
        ...(it.from === null || it.to === null ? [] : [`from ${numberText(it.from)} to ${numberText(it.to)} subjects`]),
      ].join(" "),
    ];
  },
});
