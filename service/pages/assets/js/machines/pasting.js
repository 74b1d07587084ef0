// What a spreadsheet copies: rows of cells apart by tabs (text/tab-separated-values of RFC 4180's kin, without quoting).
const plain = (words) => words.trim().toLowerCase();

// The rows, and the fields their columns stand for: those that the first row names, or the shown ones from a column on.
export function pasted(copied, { fields, shown, from, wordsOf }) {
  const rows = copied.replace(/\r\n?/g, "\n").replace(/\n+$/, "").split("\n").map((row) => row.split("\t"));
  const named = rows[0].map((cell) => fields.find((field) => [plain(field.name), plain(wordsOf(field.name))].includes(plain(cell))));
  if (rows.length > 1 && named.every((field) => field !== undefined)) return { rows: rows.slice(1), columns: named };
  const begins = shown.findIndex((field) => field.name === from);
  const widest = Math.max(...rows.map((row) => row.length));
  return { rows, columns: shown.slice(begins, begins + widest) };
}
