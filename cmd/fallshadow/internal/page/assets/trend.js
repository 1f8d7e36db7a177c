// The trend of one column over the shots or against a scan variable.
import { $, css, el } from "./dom.js";
import { get } from "./api.js";
import { colours, kind, mark } from "./marks.js";
import { reading, readingOf, written } from "./reading.js";

/* global uPlot */

const first = ["atoms", "fraction", "T_nK", "mu_nK", "condensate", "t_reduced", "chi2_cloud"];
const order = "order of arrival";

export class Trend {
  constructor(shots, choose) {
    this.shots = shots;
    this.choose = choose;
    this.values = { x: new Map(), y: new Map() };
    this.shown = "";  // the columns that are drawn
    this.loads = 0;   // counts readings of the columns
    this.late = null; // rows that came since the last one was asked for, as long as it is on its way
    this.points = [];
    $("trend-y").addEventListener("change", () => this.reload());
    $("trend-x").addEventListener("change", () => this.reload());
    $("trend-all").addEventListener("click", () => this.zoomOut());
    new ResizeObserver(() => this.fit()).observe($("trend-plot"));
  }

  get y() { return $("trend-y").value; }
  get x() { return $("trend-x").value; }

  offer(columns, scan) {
    this.columns = new Map(columns.map((c) => [c.name, c]));
    const rest = columns.map((c) => c.name).filter((n) => !first.includes(n));
    fill($("trend-y"), [...first.filter((n) => this.columns.has(n)), ...rest], this.columns);
    fill($("trend-x"), [order, ...scan], new Map());
  }

  // load reads both columns for all shots. The answer may be older than a row that comes
  // while it is on its way, and than what is read after it.
  async load() {
    const [x, y] = [this.x, this.y];
    if (!y) return;
    const mine = ++this.loads, meanwhile = this.late = [];
    const [ys, xs] = await Promise.all([get("/api/column", { name: y }), x === order ? null : get("/api/column", { name: x })])
      .finally(() => { if (mine === this.loads) this.late = null; });
    if (mine !== this.loads) return;
    this.values = {
      y: new Map(ys.shots.map((n, i) => [n, reading(ys.values[i], ys.errors[i], ys.lows[i], ys.highs[i])])),
      x: new Map(xs?.shots.map((n, i) => [n, xs.values[i]])),
    };
    for (const row of meanwhile) this.take(row);
    const same = this.shown === x + "/" + y;
    this.shown = x + "/" + y;
    if (same) this.refresh();
    else this.build();
  }

  // reload reads columns that a person chose, until that succeeds or another begins; others
  // are not drawn in their place.
  reload() {
    const mine = this.loads + 1;
    this.load().catch(() => {
      if (mine !== this.loads) return;
      this.values = { x: new Map(), y: new Map() };
      this.build();
      setTimeout(() => mine === this.loads && this.reload(), 1000);
    });
  }

  // put takes in the numbers of one shot, and draws them.
  put(row) {
    this.late?.push(row);
    this.take(row);
    this.refresh();
  }

  take(row) {
    this.values.y.set(row.shot, readingOf(row, this.y));
    if (this.x !== order) this.values.x.set(row.shot, row.numbers[this.x] ?? null);
  }

  data() {
    this.points = [];
    this.shots.rows.forEach((row, i) => {
      const y = this.values.y.get(row.shot) ?? null;
      const x = this.x === order ? i + 1 : this.values.x.get(row.shot) ?? null;
      if (x !== null && y !== null) this.points.push({ x, row, kind: kind(row), ...y });
    });
    this.points.sort((a, b) => a.x - b.x);
    this.explain();
    return [this.points.map((p) => p.x), this.points.map((p) => p.y)];
  }

  // explain shows the legend of the marks that there are, if there are others than good ones.
  explain() {
    const kinds = new Set(this.points.map((p) => p.kind));
    $("trend-legend").hidden = !kinds.size || kinds.size === 1 && kinds.has("good");
    for (const k of Object.keys(colours)) $("trend-" + k).hidden = !kinds.has(k);
  }

  refresh() {
    if (!this.plot) return this.build();
    const zoomed = !$("trend-all").hidden;
    this.plot.setData(this.data(), !zoomed);
    if (zoomed) this.plot.redraw(false);
  }

  fit() {
    const { clientWidth: width, clientHeight: height } = $("trend-plot");
    if (this.plot && width && height) this.plot.setSize({ width, height });
    else this.build();
  }

  build() {
    const box = $("trend-plot"), { clientWidth: width, clientHeight: height } = box;
    if (!width || !height || !this.columns) return;
    this.plot?.destroy();
    $("trend-all").hidden = true;
    const axis = { stroke: css("--muted"), grid: { stroke: css("--line"), width: 1 }, ticks: { show: false }, font: "12px system-ui", values: (u, list) => list.map((v) => tick(v, list)) };
    this.plot = new uPlot({
      width, height, padding: [8, 14, 0, 0],
      scales: { x: { time: false, range: (u, a, b) => roomy(a, b, .02) }, y: { range: (u, a, b) => this.span(a, b) } },
      legend: { show: false },
      cursor: { y: false, points: { show: false }, drag: { x: true, y: false } },
      axes: [{ ...axis, size: 24, ...(this.x === order ? { incrs: [1, 2, 5, 10, 20, 50, 100, 200, 500, 1000] } : {}) }, { ...axis, size: 62 }],
      series: [{}, { paths: () => null, points: { show: false } }],
      hooks: {
        draw: [(u) => this.drawPoints(u)],
        setCursor: [(u) => this.read(u.cursor.idx)],
        setScale: [(u, key) => { if (key === "x") this.noteZoom(u); }],
      },
    }, this.data(), box);
    this.plot.over.addEventListener("click", () => this.click()); // none comes after a drag
  }

  // span leaves room for the errors of usual size: a shot with a huge one would hide the rest.
  span(low, high) {
    if (low === null) return [0, 1];
    const errors = this.points.map((p) => p.high - p.low).filter((e) => e > 0).sort((a, b) => a - b);
    const usual = 1.5 * (errors[errors.length >> 1] ?? 0);
    for (const p of this.points) {
      low = Math.min(low, Math.max(p.low ?? p.y, p.y - usual));
      high = Math.max(high, Math.min(p.high ?? p.y, p.y + usual));
    }
    return roomy(low, high, this.points.some((p) => p.limit) ? .16 : .06); // arrows need more
  }

  drawPoints(u) {
    const c = u.ctx, dot = devicePixelRatio, size = (this.points.length > 300 ? 2 : 3.5) * dot;
    const theme = Object.fromEntries(Object.entries(colours).map(([k, name]) => [k, css(name)]));
    c.save();
    c.beginPath();
    c.rect(u.bbox.left, u.bbox.top, u.bbox.width, u.bbox.height);
    c.clip();
    c.lineWidth = dot * 1.3;
    for (const p of this.points) {
      const x = u.valToPos(p.x, "x", true), y = u.valToPos(p.y, "y", true);
      mark(c, p.kind, x, y, size, theme[p.kind], p.limit);
      if (p.kind === "bad") continue;
      c.beginPath();
      if (p.limit) arrow(c, x, y, p.limit === "<" ? 1 : -1);
      if (p.low !== undefined) {
        c.moveTo(x, u.valToPos(p.low, "y", true));
        c.lineTo(x, u.valToPos(p.high, "y", true));
      }
      c.stroke();
    }
    c.restore();
    this.ring(u);
  }

  // ring draws that about the shot shown; it may reach over the frame, its middle may not.
  ring(u) {
    const c = u.ctx, dot = devicePixelRatio, { x, y } = u.scales, inside = (v, s) => v >= s.min && v <= s.max;
    const now = this.points.find((p) => p.row.shot === this.shots.current);
    if (now && inside(now.x, x) && inside(now.y, y)) {
      c.save();
      c.strokeStyle = css("--ink");
      c.lineWidth = dot * 2;
      c.beginPath();
      c.arc(u.valToPos(now.x, "x", true), u.valToPos(now.y, "y", true), 8 * dot, 0, 7);
      c.stroke();
      c.restore();
    }
  }

  noteZoom(u) {
    const xs = u.data[0], { min, max } = u.scales.x;
    $("trend-all").hidden = !xs.length || (min <= xs[0] && max >= xs[xs.length - 1]);
  }

  zoomOut() {
    this.plot?.setData(this.plot.data, true);
  }

  // read says what is under the cursor.
  read(i) {
    const p = this.points[i];
    this.under = p;
    const unit = this.columns.get(this.y)?.unit ?? "";
    $("trend-read").textContent = p
      ? `${p.row.shot}: ${written(p)} ${unit}`
        + (this.x === order ? "" : ` at ${this.x} ${p.x}`) + (p.row.bad ? `, bad: ${p.row.bad}` : p.kind === "good" ? "" : ", " + p.kind)
      : "";
  }

  click() {
    if (this.under) this.choose(this.under.row.shot);
  }
}

// arrow points from a limit to where the value is.
function arrow(c, x, y, down) {
  const size = 5 * devicePixelRatio, end = y + 4 * size * down;
  c.moveTo(x, y);
  c.lineTo(x, end);
  c.moveTo(x - size, end - size * down);
  c.lineTo(x, end);
  c.lineTo(x + size, end - size * down);
}

function fill(select, names, columns) {
  const before = select.value;
  select.replaceChildren(...names.map((n) => el("option", { value: n, title: columns.get(n)?.meaning }, n)));
  if (names.includes(before)) select.value = before;
}

// tick writes a value of an axis, in powers of ten where it would be long.
function tick(v, all) {
  const most = Math.max(...all.map(Math.abs));
  if (v === 0 || most === 0) return "0";
  const step = all.length > 1 ? Math.abs(all[1] - all[0]) : most;
  const power = Math.floor(Math.log10(most) + 1e-9);
  if (power > 5 || power < -3) return tidy((v / 10 ** power).toFixed(places(step / 10 ** power))) + "e" + power;
  return tidy(v.toFixed(places(step)));
}

// places is how many decimals a number has.
function places(x) {
  let n = 0;
  while (n < 9 && Math.abs(x * 10 ** n - Math.round(x * 10 ** n)) > 1e-6 * x * 10 ** n) n++;
  return n;
}

function tidy(text) {
  const [whole, part] = text.replace("-", "\u2212").split(".");
  return whole.replace(/\B(?=(\d{3})+$)/g, "\u2009") + (part ? "." + part : "");
}

function roomy(low, high, part) {
  if (low === null || low === undefined) return [0, 1];
  const d = (high - low) * part || Math.abs(high) * part || 1;
  return [low - d, high + d];
}
