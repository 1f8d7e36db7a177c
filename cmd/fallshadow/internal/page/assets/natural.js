// The order of shots: runs of digits by the number that they write, as the program sorts.

const parts = /(\d+|\D+)/g;

export function natural(a, b) {
  const x = a.match(parts) || [], y = b.match(parts) || [];
  for (let i = 0; i < Math.min(x.length, y.length); i++) {
    if (x[i] === y[i]) continue;
    if (/^\d/.test(x[i]) && /^\d/.test(y[i])) {
      const m = x[i].replace(/^0+/, ""), n = y[i].replace(/^0+/, "");
      if (m.length !== n.length) return m.length - n.length;
      if (m !== n) return m < n ? -1 : 1;
      continue;
    }
    return x[i] < y[i] ? -1 : 1;
  }
  return x.length - y.length || (a < b ? -1 : a > b ? 1 : 0);
}
