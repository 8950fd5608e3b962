import { formsOf } from "./hover.ts";
import { clauseForms } from "./printed-form.ts";
import { methodWords, ruleSyntax } from "./rules.ts";
import type { StatementGroup } from "./statement.ts";
import { catalogue } from "./statements/index.ts";

export interface HelpSection {
  readonly heading: string;
  readonly lines: readonly string[];
  readonly example: string | null;
}

export interface HelpTopic {
  readonly topic: string;
  readonly sections: readonly HelpSection[];
}

const groups: Readonly<Record<StatementGroup, string>> = {
  declare: "Declaring the study",
  plan: "Planning",
  data: "Data",
  analyse: "Analyses",
  record: "Record, report and settings",
};

/** The shape of the language, which no single statement tells. */
const general: readonly HelpTopic[] = [
  {
    topic: "shape",
    sections: [
      {
        heading: "Statements",
        lines: [
          "A statement begins at the left margin with its verb; indented lines continue it; # starts a comment.",
          "After a list every further clause stands on its own indented line. Elsewhere it may follow after a comma.",
        ],
        example: catalogue.get("family")!.example,
      },
    ],
  },
  {
    topic: "names",
    sections: [
      {
        heading: "Names",
        lines: [
          "Letters of any alphabet, digits and _, not beginning with a digit. Any other name is quoted.",
          "Every word may be a name where a name is expected; quote one that would be read as a clause.",
          "Levels of digits may stand bare in lists of levels and after against.",
        ],
        example: 'factor roast between cups: light, "dark roast"',
      },
    ],
  },
  {
    topic: "numbers",
    sections: [
      {
        heading: "Numbers",
        lines: ["41.2, 1e-3, 5% (0.05), 1/3. The decimal sign is a point."],
        example: "size omnibus for 90% power",
      },
    ],
  },
  {
    topic: "members",
    sections: [
      {
        heading: "Members of a family",
        lines: [
          "Names of contrasts.",
          "each F against L: every other level against one.",
          "each F against mean: every level against the equally weighted mean of all.",
          "all pairs of F; neighbours of F; trend of F: linear, quadratic.",
          "Any of them at LEVEL, at LEVEL of FACTOR, or at each FACTOR.",
        ],
        example: "explore each diet against hay at each age by holm",
      },
    ],
  },
  {
    topic: "conditions",
    sections: [
      {
        heading: "Conditions and arithmetic",
        lines: [
          "= != < <= > >=, among a, b, not among a, b, between x and y, is missing, is not missing; and, or, not, parentheses.",
          "+ - * / ^, log of x, log10 of x, root of x, abs of x, exp of x, round of x; if CONDITION then VALUE else VALUE.",
        ],
        example: 'exclude where seconds > 300 or operator among 3, 7 because "interrupted"',
      },
    ],
  },
];

function statementTopic(verb: string): HelpTopic {
  const { syntax, help, details, example } = catalogue.get(verb)!;
  const clauses = clauseForms(syntax, ruleSyntax);
  return {
    topic: verb,
    sections: [
      { heading: verb, lines: [help, ...details], example: null },
      { heading: "Form", lines: formsOf(verb), example },
      ...(clauses.length === 0
        ? []
        : [{ heading: "Clauses", lines: clauses.map((clause) => `${clause.form}: ${clause.help}`), example: null }]),
    ],
  };
}

/** What `help` says about the language; corrections and methods explain themselves in their own room. */
export function helpTopics(): ReadonlyMap<string, HelpTopic> {
  const topics = [...general, ...[...catalogue.keys()].map(statementTopic)];
  return new Map(topics.map((topic) => [topic.topic, topic]));
}

/** The statements by group, each with its line: what `help` alone shows. */
export function statementsByGroup(): readonly HelpSection[] {
  return Object.entries(groups).map(([group, heading]) => ({
    heading,
    lines: [...catalogue].filter(([, each]) => each.group === group).map(([verb, { help }]) => `${verb}: ${help}`),
    example: null,
  }));
}

/** The whole language as one Markdown page. */
export function referencePage(): string {
  const out = ["# The language", "", "Generated from the statement catalogue; do not edit.", ""];
  for (const { sections } of general) {
    for (const { heading, lines, example } of sections) {
      out.push(`## ${heading}`, "", ...lines.map((line) => `- ${line}`), "");
      if (example !== null) out.push("```meanwise", example, "```", "");
    }
  }
  out.push(
    "## Corrections",
    "",
    `${methodWords.map((each) => `\`${each}\``).join(", ")}. \`help METHOD\` explains each.`,
    "",
  );
  for (const [group, heading] of Object.entries(groups)) {
    out.push(`## ${heading}`, "");
    for (const [verb, { group: own, help, details, example, syntax }] of catalogue) {
      if (own !== group) continue;
      out.push(`### ${verb}`, "", help, "", "```text", ...formsOf(verb), "```", "");
      for (const clause of clauseForms(syntax, ruleSyntax)) out.push(`- \`${clause.form}\`: ${clause.help}`);
      if (clauseForms(syntax, ruleSyntax).length > 0) out.push("");
      for (const line of details) out.push(line, "");
      out.push("```meanwise", example, "```", "");
    }
  }
  return out.join("\n");
}
