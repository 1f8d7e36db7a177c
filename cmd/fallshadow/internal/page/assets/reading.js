// What the cells of a number say, with the errors or limits that stand beside it.

// reading is what the cells of a column say: a value with the ends of its error, or a limit.
export function reading(value, error, low, high) {
  if (low === null && high !== null) return { y: high, limit: "<" };
  if (high === null && low !== null) return { y: low, limit: ">" };
  if (value === null) return null;
  if (low !== null && low <= value && value <= high && low < high) return { y: value, low, high };
  return error > 0 ? { y: value, low: value - error, high: value + error } : { y: value };
}

// readingOf reads a column of a whole row.
export function readingOf(row, column) {
  const cell = (end) => row.numbers[column + end] ?? null;
  return reading(cell(""), cell("_err"), cell("_low"), cell("_high"));
}

// written is a reading for people.
export function written({ y, low, high, limit }) {
  const two = (x) => Number(x.toPrecision(2)), up = high - y, down = y - low;
  if (limit) return limit + " " + two(y);
  const value = Number(y.toPrecision(5));
  if (low === undefined) return String(value);
  return Math.abs(up - down) <= 1e-6 * (up + down) ? `${value} ± ${two(up)}` : `${value} +${two(up)} −${two(down)}`;
}
