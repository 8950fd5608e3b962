// Makes notebooks/*.ipynb from notebooks/*.mwise: a blank line before a comment or an analysing verb begins a new cell. Run it after editing a script.
import { readdirSync, readFileSync, writeFileSync } from "node:fs";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";

const folder = join(dirname(fileURLToPath(import.meta.url)), "..", "notebooks");
const alone =
  /^(size|power|detectable|draw|rehearse|check|describe|omnibus|compare|explore|calibrate|report|seal|open|read|audit|amend|exclude|average)\b/;

function cellsOf(text) {
  const statements = [];
  for (const line of text.split("\n")) {
    if (line.trim() === "") statements.push("");
    else if (/^\s/.test(line) && statements.length > 0) statements[statements.length - 1] += `\n${line}`;
    else statements.push(line);
  }
  const cells = [];
  let open = [];
  const close = () => {
    if (open.length > 0) cells.push({ type: "code", text: open.join("\n") });
    open = [];
  };
  for (const statement of statements) {
    if (statement === "") close();
    else if (statement.startsWith("#")) {
      const last = cells.at(-1);
      const text = statement.replace(/^#\s?/, "");
      if (open.length === 0 && last?.type === "markdown" && last.open) last.text += ` ${text}`;
      else {
        close();
        cells.push({ type: "markdown", text, open: true });
      }
      continue;
    } else if (alone.test(statement)) {
      close();
      cells.push({ type: "code", text: statement });
    } else open.push(statement);
    const last = cells.at(-1);
    if (last !== undefined) last.open = false;
  }
  close();
  return cells;
}

const lines = (text) => text.split("\n").map((line, index, all) => (index < all.length - 1 ? `${line}\n` : line));

for (const file of readdirSync(folder).filter((name) => name.endsWith(".mwise"))) {
  const name = file.replace(/\.mwise$/, "");
  const cells = cellsOf(readFileSync(join(folder, file), "utf8")).map((cell, index) => {
    const base = {
      cell_type: cell.type,
      id: `${name}-${index + 1}`.slice(0, 60),
      metadata: {},
      source: lines(cell.text),
    };
    return cell.type === "code" ? { ...base, execution_count: null, outputs: [] } : base;
  });
  const notebook = {
    cells,
    metadata: {
      kernelspec: { display_name: "Meanwise", language: "meanwise", name: "meanwise" },
      language_info: {
        file_extension: ".mwise",
        mimetype: "text/x-meanwise",
        name: "meanwise",
        pygments_lexer: "text",
      },
    },
    nbformat: 4,
    nbformat_minor: 5,
  };
  writeFileSync(join(folder, `${name}.ipynb`), `${JSON.stringify(notebook, null, 1)}\n`);
}
