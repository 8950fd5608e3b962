import type { Syntax } from "./syntax.ts";

/** Deeper than this a rule is named instead of written out. */
const spelledOut = new Set(["aim", "goal", "sides"]);

const capitals = (what: string): string =>
  what
    .replace(/^(an?|the|one) /, "")
    .replace(/ in quotes$/, "")
    .replace(/^name for .*/, "name")
    .toUpperCase()
    .replace(/ /g, "_");

/**
 * The printed form of a syntax, for help and the reference page: NAMES in capitals, [optional], (one | other), repeated ...
 * Clauses are left out here; `clauseForms` lists them.
 */
export function printedForm(syntax: Syntax, ruleSyntax: (rule: string) => Syntax): string {
  const form = (inner: Syntax): string => printedForm(inner, ruleSyntax);
  switch (syntax.type) {
    case "phrase":
      return syntax.text;
    case "name":
      return capitals(syntax.what);
    case "text":
      return `"${syntax.what.replace(/^(an?|the) /, "").replace(/ in quotes$/, "")}"`;
    case "number":
      return capitals(syntax.what);
    case "sequence":
      return syntax.parts
        .map(form)
        .filter((piece) => piece !== "")
        .join(" ")
        .replace(/ ([:,)])/g, "$1")
        .replace(/\( /g, "(");
    case "optional":
      return `[${form(syntax.part)}]`;
    case "either":
      if (syntax.what?.startsWith("a")) return capitals(syntax.what.replace(/,.*/, ""));
      return `(${syntax.options.map(form).join(" | ")})`;
    case "list":
      return `${form(syntax.item)}, ...`;
    case "repeat":
      return syntax.atLeastOne ? `${form(syntax.part)} ...` : `[${form(syntax.part)} ...]`;
    case "group":
    case "part":
      return form(syntax.part);
    case "rule":
      return spelledOut.has(syntax.rule)
        ? form(ruleSyntax(syntax.rule))
        : capitals(syntax.rule.replace(/([A-Z])/g, " $1"));
    case "statement":
      return `${syntax.verb} ...`;
    case "clauses":
    case "break":
      return "";
  }
}

/** The clauses of a syntax, each with its printed form and its line of help. */
export function clauseForms(
  syntax: Syntax,
  ruleSyntax: (rule: string) => Syntax,
): readonly { readonly form: string; readonly help: string }[] {
  if (syntax.type === "clauses") {
    return syntax.options.map((option) => ({
      form: printedForm(option, ruleSyntax),
      help: option.type === "part" ? option.help : "",
    }));
  }
  if (syntax.type === "sequence") return syntax.parts.flatMap((inner) => clauseForms(inner, ruleSyntax));
  return [];
}
