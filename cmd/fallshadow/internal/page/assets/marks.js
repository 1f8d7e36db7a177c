// The marks of shots in the trend: what is to be said against a shot is told by shape, so
// that no eye needs the colour.

// kind is what is to be said against a shot, the gravest: a person's word, numbers of other
// settings, or a flag.
export function kind(row) {
  if (row.bad) return "bad";
  const flags = (row.flags || []).filter((f) => f !== "provisional");
  return flags.includes("stale") ? "stale" : flags.length ? "flagged" : "good";
}

// colours are names of the theme.
export const colours = { good: "--data", flagged: "--warn", stale: "--muted", bad: "--muted" };

// mark draws around a point: a disc, a triangle, a diamond; a shot marked bad and a limit
// are hollow.
export function mark(c, kind, x, y, r, colour, hollow) {
  c.beginPath();
  if (kind === "flagged") polygon(c, [[x, y - 1.4 * r], [x + 1.3 * r, y + r], [x - 1.3 * r, y + r]]);
  else if (kind === "stale") polygon(c, [[x, y - 1.35 * r], [x + 1.35 * r, y], [x, y + 1.35 * r], [x - 1.35 * r, y]]);
  else c.arc(x, y, r, 0, 7);
  c.strokeStyle = c.fillStyle = colour;
  if (!hollow && kind !== "bad") c.fill();
  c.stroke();
}

function polygon(c, corners) {
  for (const [x, y] of corners) c.lineTo(x, y);
  c.closePath();
}
