import type { HelpStatement } from "../ast.ts";
import { nameText } from "../print.ts";
import { joinSpans } from "../span.ts";
import { defineStatement } from "../statement.ts";
import { group, mark, name, optional, repeat, sequence } from "../syntax.ts";

/** Words that stand as they are, spaced or hyphenated. */
const plainTopic = /^[\p{L}_][\p{L}\p{M}\p{N}_]*(?:[ -][\p{L}_][\p{L}\p{M}\p{N}_]*)*$/u;

export const help = defineStatement<HelpStatement>({
  verb: "help",
  group: "record",
  help: "Explains a statement, a correction or a method; alone it lists the statements.",
  details: ["A correction's help says what it holds, what it assumes, when it fits, and its source."],
  example: "help single-step",
  syntax: sequence(
    optional(
      name("topic", "a topic", "topics"),
      repeat(group("more", optional(mark("-", "hyphen")), name("topic", "a topic", "topics"))),
    ),
  ),
  build: (read) => {
    const first = read.nameOrNull("topic");
    if (first === null) return { kind: "help", topic: null, span: read.span };
    let { text, span } = first;
    for (const each of read.groups("more")) {
      const next = each.name("topic");
      text += `${each.has("hyphen") ? "-" : " "}${next.text}`;
      span = joinSpans(span, next.span);
    }
    return { kind: "help", topic: { text, span, quoted: !plainTopic.test(text) }, span: read.span };
  },
  print: (it) => [it.topic === null ? "help" : `help ${nameText(it.topic)}`],
});
