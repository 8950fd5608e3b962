import type { AmendStatement, AuditStatement, ExportStatement, HelpStatement, Name, OpenStatement, ReportStatement, SealStatement, SetStatement } from "../ast.ts";
import { BuildProblem } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { either, name, number, optional, repeat, sequence, text, words } from "../syntax.ts";

export const seal = defineStatement<SealStatement>({
  verb: "seal",
  group: "record",
  help: "Writes the plan with its digest and time; from then on it can be opened, amended with a reason, and never changed.",
  details: ["Deposit the file, or its digest, where your lab registers plans."],
  example: 'seal plan as "glove"',
  syntax: sequence(words("plan as"), text("name", "a name in quotes", "plans")),
  build: (read) => ({ kind: "seal", name: read.name("name"), span: read.span }),
});

export const open = defineStatement<OpenStatement>({
  verb: "open",
  group: "record",
  help: "Opens a sealed plan, checks its digest, and fixes its declarations.",
  details: ["Comparisons of a plan that was opened before data were read are marked planned."],
  example: 'open plan "glove"',
  syntax: sequence(words("plan"), text("name", "a plan in quotes", "plans")),
  build: (read) => ({ kind: "open", name: read.name("name"), span: read.span }),
});

export const amend = defineStatement<AmendStatement>({
  verb: "amend",
  group: "record",
  help: "Changes a declaration of a sealed plan, with the reason; kept beside the original and marked everywhere.",
  details: ["amend DECLARATION because ...; amend drop contrast NAME because ...", "An amendment after results were seen makes its comparisons exploratory."],
  example: 'amend family primary: all pairs of glove\n  hold error 5% by holm\n  because "the reviewers asked for all pairs"',
  syntax: null,
  form: 'amend DECLARATION because "the reason" | amend drop (contrast | family | covariate) NAME because "the reason"',
  build: () => {
    throw new Error("amend is read in its own way");
  },
});

export const report = defineStatement<ReportStatement>({
  verb: "report",
  group: "record",
  help: "Writes the report: text, tables and figures of everything above, with deviations from the plan.",
  details: ['to "x.html", "x.md" or "x.docx"; beside the notebook as .html when nothing is said.'],
  example: 'report to "glove-report.html"',
  syntax: optional(words("to"), text("path", "a file in quotes", "files")),
  build: (read) => ({ kind: "report", path: read.nameOrNull("path"), span: read.span }),
});

export const audit = defineStatement<AuditStatement>({
  verb: "audit",
  group: "record",
  help: "Checks the ledger: what was declared, sealed, read, excluded and tested, in order, and whether the record is whole.",
  details: ['against head "..." also looks for a head digest that was published.'],
  example: "audit",
  syntax: optional(words("against head"), text("head", "a digest in quotes")),
  build: (read) => ({ kind: "audit", head: read.nameOrNull("head"), span: read.span }),
});

const exported = ["comparisons", "omnibus", "describe", "check", "data", "picture", "power", "size", "calibration", "ledger", "plan"] as const;

export const exportTo = defineStatement<ExportStatement>({
  verb: "export",
  group: "record",
  help: "Writes a result as .csv, .json or .parquet, or a picture as .svg or .png: the latest of its kind.",
  details: ['export comparisons primary to "primary.csv"; export picture to "means.png"'],
  example: 'export comparisons primary to "primary.csv"',
  syntax: sequence(either(...exported.map((what) => words(what, what))), optional(name("name", "a family", "families")), words("to"), text("path", "a file in quotes", "files")),
  build: (read) => ({ kind: "export", what: exported.find((what) => read.has(what))!, name: read.nameOrNull("name"), path: read.name("path"), span: read.span }),
});

const standardisers = ["pooled spread", "average spread", "control spread", "difference spread"] as const;

export const set = defineStatement<SetStatement>({
  verb: "set",
  group: "record",
  help: "Settings: digits, seed, interval, what to show, the standardiser of effect sizes.",
  details: ["set digits 3; set seed 7; set interval 95%; set show adjusted p, show thresholds or show both; set standardiser pooled spread, average spread, control spread or difference spread."],
  example: "set interval 95%",
  syntax: either(
    sequence(words("digits", "digits"), number("value", "a number of digits")),
    sequence(words("seed", "seed"), number("value", "a seed")),
    sequence(words("interval", "interval"), number("value", "a level")),
    sequence(words("show", "show"), either(words("adjusted p", "adjusted p"), words("thresholds", "thresholds"), words("both", "both"))),
    sequence(words("standardiser", "standardiser"), either(...standardisers.map((value) => sequence(words(value, value))))),
  ),
  build: (read): SetStatement => {
    const span = read.span;
    if (read.has("digits")) {
      const value = read.number("value");
      if (!Number.isInteger(value.value) || value.value < 1 || value.value > 15) {
        throw new BuildProblem("number-range", `digits is ${value.text}; it is a whole number from 1 to 15.`, "Write, for instance, set digits 3.", value.span);
      }
      return { kind: "set", setting: { name: "digits", value }, span };
    }
    if (read.has("seed")) {
      const value = read.number("value");
      if (!Number.isInteger(value.value) || value.value < 0 || value.value > 0xffffffff) {
        throw new BuildProblem("number-range", `seed is ${value.text}; it is a whole number from 0 to 4294967295.`, "Write, for instance, set seed 7.", value.span);
      }
      return { kind: "set", setting: { name: "seed", value }, span };
    }
    if (read.has("interval")) {
      const value = read.number("value");
      if (!(value.value > 0 && value.value < 1)) {
        throw new BuildProblem("number-range", `interval is ${value.text}; it lies above 0 and below 100%.`, "Write, for instance, set interval 95%.", value.span);
      }
      return { kind: "set", setting: { name: "interval", value }, span };
    }
    if (read.has("show")) {
      const what = read.has("both") ? "both" : read.has("thresholds") ? "thresholds" : "adjusted p";
      return { kind: "set", setting: { name: "show", what }, span };
    }
    return { kind: "set", setting: { name: "standardiser", value: standardisers.find((value) => read.has(value))! }, span };
  },
});

export const help = defineStatement<HelpStatement>({
  verb: "help",
  group: "record",
  help: "Explains a statement, a method or a topic; alone it lists them.",
  details: ["help compare; help holm; help single-step"],
  example: "help compare",
  syntax: optional(name("topic", "a topic", "topics"), repeat(either(name("topic", "a word", "topics"), sequence(words("-"), name("hyphened", "a word", "topics"))))),
  form: "[TOPIC]",
  build: (read) => {
    const parts: Name[] = [...read.names("topic"), ...read.names("hyphened")].sort((left, right) => left.span.start - right.span.start);
    const hyphened = new Set(read.names("hyphened"));
    const topic = parts.reduce((all, part) => (all === "" ? part.text : `${all}${hyphened.has(part) ? "-" : " "}${part.text}`), "");
    return { kind: "help", topic: topic === "" ? null : topic, span: read.span };
  },
});
