import type { AuditStatement } from "../ast.ts";
import { quoted } from "../print.ts";
import { defineStatement } from "../statement.ts";
import { optional, part, sequence, text, words } from "../syntax.ts";

export const audit = defineStatement<AuditStatement>({
  verb: "audit",
  group: "record",
  help: "Shows the ledger and says whether the record is whole.",
  details: ["A head digest that somebody kept finds even a ledger that was rewritten as a whole."],
  example: "audit",
  syntax: sequence(
    optional(
      part(
        "The digest of the last entry, as somebody kept it.",
        words("with head"),
        text("head", "a digest in quotes"),
      ),
    ),
  ),
  build: (read) => ({ kind: "audit", head: read.nameOrNull("head"), span: read.span }),
  print: (it) => [it.head === null ? "audit" : `audit with head ${quoted(it.head.text)}`],
});
