// What a spreadsheet copies: rows of cells apart by tabs (text/tab-separated-values of RFC 4180's kin, without quoting).
const plain = (words) => words.trim().toLowerCase();

// The rows, the fields their columns stand for (those that the first row names, or the shown ones from a column on), and
// how many columns found no field.
export function pasted(copied, { fields, shown, from, wordsOf }) {
  const rows = copied.replace(/\r\n?/g, "\n").replace(/\n+$/, "").split("\n").map((row) => row.split("\t"));
  const named = rows[0].map((cell) => fields.find((field) => [plain(field.name), plain(wordsOf(field.name))].includes(plain(cell))));
  if (rows.length > 1 && named.every((field) => field !== undefined)) return { rows: rows.slice(1), columns: named, lost: 0 };
  const begins = shown.findIndex((field) => field.name === from);
  const widest = Math.max(...rows.map((row) => row.length));
  const columns = shown.slice(begins, begins + widest);
  return { rows, columns, lost: widest - columns.length };
}
