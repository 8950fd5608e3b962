import type { ShowStatement } from "../ast.ts";
import { defineStatement } from "../statement.ts";
import { choice, part, words } from "../syntax.ts";

export const show = defineStatement<ShowStatement>({
  verb: "show",
  group: "data",
  help: "Shows what the session holds.",
  details: [],
  example: "show plan",
  syntax: choice(
    "data, design, plan, families, ledger or settings",
    part("The rows read, after every step on them.", words("data", "what")),
    part("Units, factors and levels as declared.", words("design", "what")),
    part("The declarations as they would be sealed.", words("plan", "what")),
    part("The families, and how error passes between them.", words("families", "what")),
    part("What was declared, read, excluded and tested, in order.", words("ledger", "what")),
    part("What set has changed.", words("settings", "what")),
  ),
  build: (read) => ({ kind: "show", what: read.word<ShowStatement["what"]>("what")!, span: read.span }),
  print: (it) => [`show ${it.what}`],
});
