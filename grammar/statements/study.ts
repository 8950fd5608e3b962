import type { StudyStatement } from "../ast.ts";
import { problem } from "../problems.ts";
import { quoted } from "../print.ts";
import { BuildProblem } from "../reader.ts";
import { defineStatement } from "../statement.ts";
import { clauses, part, sequence, text, words } from "../syntax.ts";

export const study = defineStatement<StudyStatement>({
  verb: "study",
  group: "declare",
  help: "Names the study; the report carries the title.",
  details: ["A caution is printed wherever conclusions could be taken for advice."],
  example: `study "Glove type and assembly time"
  caution "Findings inform glove choice; they do not replace the site's hand-protection rules."`,
  syntax: sequence(
    text("title", "a title in quotes"),
    clauses(
      part("A sentence of caution that the report carries.", words("caution"), text("caution", "a caution in quotes")),
    ),
  ),
  build: (read) => {
    const title = read.name("title");
    if (title.text.trim() === "") throw new BuildProblem(problem("name-empty", title.span, { what: "The title" }));
    return { kind: "study", title, caution: read.nameOrNull("caution"), span: read.span };
  },
  print: (it) => [
    `study ${quoted(it.title.text)}`,
    ...(it.caution === null ? [] : [`caution ${quoted(it.caution.text)}`]),
  ],
});
