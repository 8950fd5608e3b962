import type { OmnibusMethod, OmnibusStatement } from "../ast.ts";
import { seedClause, seedOf } from "../clause-parts.ts";
import { clauseText, nameText, onOneLine } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { choice, clauses, either, list, name, number, part, repeat, sequence, words } from "../syntax.ts";

export const omnibus = defineStatement<OmnibusStatement>({
  verb: "omnibus",
  group: "analyse",
  help: "Tests whether the means differ at all, factor by factor, in the model that the design calls for.",
  details: [
    "It is never required before compare: a family holds its own error.",
    "Cells weigh equally, so that omnibus and comparisons ask about the same means.",
  ],
  example: "omnibus of glove, glove with shift",
  syntax: sequence(
    repeat(
      either(
        sequence(
          words("by"),
          choice(
            "a method for the omnibus test",
            part(
              "The model with the factor against the same model without it; subjects as random.",
              words("multilevel model", "method"),
            ),
            part(
              "The classical analysis, with corrections for sphericity within subjects.",
              words("variance analysis", "method"),
            ),
            part("Welch's test, for unequal spread.", words("welch", "method")),
            part("The Brown-Forsythe test of means, for unequal spread.", words("brown-forsythe", "method")),
            part("Kruskal-Wallis between, Friedman within.", words("ranks", "method")),
            part("By permutation, as the design allows.", words("resampling", "method")),
            part("Pillai, Wilks, Hotelling-Lawley and Roy, within subjects.", words("multivariate", "method")),
          ),
        ),
        part(
          "Only these effects; with joins the factors of an interaction.",
          words("of", "of"),
          list(
            "effects",
            sequence(
              name("factor", "a factor", "factors"),
              repeat(words("with"), name("factor", "a factor", "factors")),
            ),
          ),
        ),
        part(
          "Adjusts each effect only for those that do not contain it.",
          words("respecting marginality", "marginality"),
        ),
        part(
          "How the multilevel model counts degrees of freedom.",
          words("degrees by"),
          either(words("kenward-roger", "degrees"), words("satterthwaite", "degrees")),
        ),
      ),
    ),
    clauses(
      part(
        "A parametric bootstrap of the likelihood ratio, or the number of resamples.",
        words("with"),
        either(
          sequence(number("bootstrap", "a number of studies"), words("bootstrap studies")),
          sequence(number("resamples", "a number of resamples"), words("resamples")),
        ),
      ),
      seedClause(),
    ),
  ),
  build: (read) => ({
    kind: "omnibus",
    method: read.word<OmnibusMethod>("method"),
    effects: read.word("of") !== null ? read.groups("effects").map((each) => each.names("factor")) : null,
    marginality: read.word("marginality") !== null,
    degrees: read.word<"kenward-roger" | "satterthwaite">("degrees"),
    bootstrap: read.wholeOrNull("bootstrap", "The number of bootstrap studies"),
    resamples: read.wholeOrNull("resamples", "The number of resamples"),
    seed: seedOf(read),
    span: read.span,
  }),
  print: (it) =>
    onOneLine(
      [
        "omnibus",
        ...(it.method === null ? [] : [`by ${it.method}`]),
        ...(it.effects === null
          ? []
          : [`of ${it.effects.map((each) => each.map(nameText).join(" with ")).join(", ")}`]),
        ...(it.marginality ? ["respecting marginality"] : []),
        ...(it.degrees === null ? [] : [`degrees by ${it.degrees}`]),
      ].join(" "),
    ).concat(
      clauseText("with", it.bootstrap, " bootstrap studies"),
      clauseText("with", it.resamples, " resamples"),
      clauseText("seed", it.seed),
    ),
});
