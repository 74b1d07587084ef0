// Time of the sound to the angle the disc has turned, and back. Time 0 is when the disc begins to move.
// `table` holds pairs (seconds, degrees), rising; empty means the stated speed from the first moment on.
export function turningOf(table, movement) {
  const rows = table.length > 1 ? table : [[0, 0], [movement.revolution_s, 360]];
  const last = rows.at(-1);
  return {
    end_s: last[0],
    angleAt: (time_s) => between(rows, 0, 1, time_s),
    timeAt: (turned_deg) => between(rows, 1, 0, turned_deg),
  };
}

function between(rows, from, to, value) {
  if (value <= rows[0][from]) return rows[0][to];
  if (value >= rows.at(-1)[from]) return rows.at(-1)[to];
  let low = 0;
  let high = rows.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (rows[middle][from] <= value) low = middle;
    else high = middle;
  }
  const span = rows[high][from] - rows[low][from];
  return rows[low][to] + ((value - rows[low][from]) / span) * (rows[high][to] - rows[low][to]);
}
