import type { SetStatement } from "../ast.ts";
import { numberText } from "../print.ts";
import { seedOf } from "../clause-parts.ts";
import { defineStatement } from "../statement.ts";
import { choice, number, part, words } from "../syntax.ts";

type Standardiser = "pooled spread" | "average spread" | "control spread" | "difference spread" | "default";

export const set = defineStatement<SetStatement>({
  verb: "set",
  group: "record",
  help: "Changes how results are shown, the seed, the interval or the effect size's standardiser.",
  details: ["show settings tells what stands."],
  example: "set interval 95%",
  syntax: choice(
    "a setting",
    part("Digits after the point in tables.", words("digits", "digits"), number("digits_", "a number of digits")),
    part("The seed of everything random that follows.", words("seed", "seeded"), number("seed", "a seed")),
    part("How sure single intervals are.", words("interval", "interval"), number("interval_", "a percentage")),
    part(
      "How many resamples a test by resampling takes.",
      words("resamples", "resamples"),
      number("resamples_", "a number of resamples"),
    ),
    part(
      "How many studies planning simulates.",
      words("studies", "studies"),
      number("studies_", "a number of studies"),
    ),
    part(
      "Which reading of each decision tables show.",
      words("show"),
      choice(
        "adjusted p, thresholds or both",
        words("adjusted p", "show"),
        words("thresholds", "show"),
        words("both", "show"),
      ),
    ),
    part(
      "What effect sizes are measured in.",
      words("standardiser"),
      choice(
        "a standardiser",
        part("The pooled standard deviation, between subjects.", words("pooled spread", "standardiser")),
        part("The root of the mean variance of the cells, within subjects.", words("average spread", "standardiser")),
        part("The standard deviation of the control.", words("control spread", "standardiser")),
        part("The standard deviation of the differences.", words("difference spread", "standardiser")),
        part("What the design calls for.", words("default", "standardiser")),
      ),
    ),
  ),
  build: (read) => {
    const { span } = read;
    if (read.has("digits")) {
      return {
        kind: "set",
        setting: { name: "digits", value: read.whole("digits_", "The number of digits", 0, 15) },
        span,
      };
    }
    if (read.has("seeded")) return { kind: "set", setting: { name: "seed", value: seedOf(read)! }, span };
    if (read.has("interval")) {
      return { kind: "set", setting: { name: "interval", value: read.share("interval_", "The interval") }, span };
    }
    if (read.has("resamples")) {
      return {
        kind: "set",
        setting: { name: "resamples", value: read.whole("resamples_", "The number of resamples") },
        span,
      };
    }
    if (read.has("studies")) {
      return {
        kind: "set",
        setting: { name: "studies", value: read.whole("studies_", "The number of studies") },
        span,
      };
    }
    const what = read.word<"adjusted p" | "thresholds" | "both">("show");
    if (what !== null) return { kind: "set", setting: { name: "show", what }, span };
    return { kind: "set", setting: { name: "standardiser", value: read.word<Standardiser>("standardiser")! }, span };
  },
  print: ({ setting }) => {
    switch (setting.name) {
      case "show":
        return [`set show ${setting.what}`];
      case "standardiser":
        return [`set standardiser ${setting.value}`];
      default:
        return [`set ${setting.name} ${numberText(setting.value)}`];
    }
  },
});
