// The list of shots: kept in the order they came, drawn newest first, and only the part that
// is in sight, so that a long night stays light.
import { $, el } from "./dom.js";
import { kind } from "./marks.js";
import { natural } from "./natural.js";

const height = 30;
const signs = { good: "", flagged: "▲", stale: "◆", bad: "✕" };
const tail = 12; // letters at the end of a name that stay in sight

// endsDiffer says that the ends of long names tell shots apart, and not their beginnings only.
function endsDiffer(names) {
  const kinds = (cut) => new Set(names.map((n) => cut([...n]).join(""))).size;
  return kinds((n) => n.slice(-tail)) >= kinds((n) => n.slice(0, tail));
}

// parts cuts a long name in two where its end tells shots apart and its beginning may give way.
function parts(name, ends) {
  const letters = [...name], at = Math.max(0, letters.length - tail);
  const cut = at < 4 || !ends ? 0 : at;
  return [
    cut ? el("span", { class: "head" }, letters.slice(0, cut).join("")) : null,
    el("span", { class: cut ? "tail" : "head" }, letters.slice(cut).join("")),
  ];
}

export class Shots {
  constructor(choose) {
    this.rows = [];
    this.came = new Map(); // when each shot came
    this.current = null;
    this.choose = choose;
    $("list").addEventListener("scroll", () => this.draw());
    new ResizeObserver(() => this.draw()).observe($("list"));
  }

  reset(rows) {
    this.rows = rows;
    this.came = new Map(rows.map((r) => [r.shot, r.at]));
    this.draw();
  }

  // place returns where a shot is, or belongs that came at a time; natural order decides
  // between those of the same time.
  place(shot, at = this.came.get(shot) ?? 0) {
    let low = 0, high = this.rows.length;
    while (low < high) {
      const mid = (low + high) >> 1, row = this.rows[mid];
      if ((row.at - at || natural(row.shot, shot)) < 0) low = mid + 1;
      else high = mid;
    }
    return low;
  }

  has(shot) {
    return this.came.has(shot);
  }

  // put takes in what the list shows of a row; all of it would make a long night heavy.
  put({ shot, at, model, flags, bad, failed, atoms }) {
    const list = $("list"), had = this.has(shot);
    if (had) this.rows.splice(this.place(shot), 1);
    this.came.set(shot, at);
    this.rows.splice(this.place(shot), 0, { shot, at, model, flags, bad, failed, atoms });
    this.draw();
    if (!had && this.top(shot) < list.scrollTop) list.scrollTop += height; // what a person looks at stays
  }

  // top is how far down a shot is drawn.
  top(shot) {
    return (this.rows.length - 1 - this.place(shot)) * height;
  }

  // select marks the shot that is shown, and brings another than before into sight.
  select(shot) {
    const other = shot !== this.current;
    this.current = shot;
    if (other) this.reveal(shot);
    this.draw();
  }

  // reveal brings a shot into sight.
  reveal(shot) {
    const list = $("list"), top = this.top(shot);
    if (top < list.scrollTop) list.scrollTop = top;
    if (top + height > list.scrollTop + list.clientHeight) list.scrollTop = top + height - list.clientHeight;
  }

  // beside returns the shot so many steps newer than the current one, if there is one.
  beside(step) {
    const i = this.place(this.current ?? "") + step;
    return this.rows[i]?.shot;
  }

  last() {
    return this.rows[this.rows.length - 1]?.shot;
  }

  draw() {
    $("count").textContent = this.rows.length;
    const list = $("list"), all = $("list-all"), n = this.rows.length;
    all.style.height = n * height + "px";
    const from = Math.min(n, Math.max(0, Math.floor(list.scrollTop / height) - 4));
    const to = Math.min(n, from + Math.ceil(list.clientHeight / height) + 8);
    const seen = this.rows.slice(n - to, n - from).reverse(), ends = endsDiffer(seen.map((r) => r.shot));
    const items = seen.map((row, i) => this.item(row, (from + i) * height, ends));
    all.replaceChildren(...items);
  }

  item(row, top, ends) {
    const flags = (row.flags || []).filter((f) => f !== "provisional");
    const node = el("button", {
      class: "item" + (row.bad ? " bad" : "") + (row.failed ? " failed" : ""),
      title: [row.shot, row.bad, ...flags].filter(Boolean).join("\n"),
      "aria-current": row.shot === this.current,
    },
    el("span", { class: "dot" }, row.failed ? signs.bad : signs[kind(row)]),
    el("span", { class: "name" }, ...parts(row.shot, ends)),
    el("span", { class: "what" }, row.failed ? "failed" : row.model === "none" ? "none" : row.atoms || ""));
    node.style.top = top + "px";
    node.addEventListener("click", () => this.choose(row.shot));
    return node;
  }
}
