// A document as text: what fits on a line stands on a line, as people write such documents.
const WIDEST = 160;

export function written(value, depth = 0) {
  const flat = inOneLine(value);
  if (value === null || typeof value !== "object" || (depth > 0 && flat.length + 2 * depth <= WIDEST)) return flat;
  const inner = "  ".repeat(depth + 1);
  const isList = Array.isArray(value);
  const rows = isList
    ? value.map((one) => inner + written(one, depth + 1))
    : Object.entries(value).map(([name, one]) => `${inner}${JSON.stringify(name)}: ${written(one, depth + 1)}`);
  if (!rows.length) return flat;
  const [open, close] = isList ? "[]" : "{}";
  return `${open}\n${rows.join(",\n")}\n${"  ".repeat(depth)}${close}`;
}

function inOneLine(value) {
  if (Array.isArray(value)) return `[${value.map(inOneLine).join(", ")}]`;
  if (value === null || typeof value !== "object") return JSON.stringify(value);
  return `{${Object.entries(value).map(([name, one]) => `${JSON.stringify(name)}: ${inOneLine(one)}`).join(", ")}}`;
}
