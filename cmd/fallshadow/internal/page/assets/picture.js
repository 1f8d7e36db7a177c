// The pictures of a shot: density or the whole frame with what is drawn over it, residuals,
// and the colour bars.
import { $, svg } from "./dom.js";
import { pictureOf } from "./api.js";

export const parts = ["cloud", "fitted", "frame"];

export class Pictures {
  constructor() {
    this.view = null;
    this.root = localStorage.getItem("scale") !== "linear"; // colours by the root of the density
    this.part = "cloud"; // of the frame that is shown: cloud, fitted or frame
    this.region = { now: null, next: null };
    this.drag = null;
  }

  scales(scales) {
    for (const kind of ["density", "residual"]) {
      const context = $(kind + "-bar").getContext("2d");
      scales[kind].forEach((color, i) => {
        context.fillStyle = color;
        context.fillRect(i, 0, 1, 1);
      });
    }
  }

  wait() {
    $("density").classList.add("waits");
    $("residual").classList.add("waits");
  }

  // load fetches what will be in sight of a view, so that it takes its place at once.
  async load(shot, view) {
    const kinds = this.part === "frame" || !view.width ? ["frame"] : [this.kind];
    if (view.width) kinds.push("residual");
    await Promise.all(kinds.map((kind) => {
      const image = new Image();
      image.src = pictureOf(kind, shot, view.mark);
      return image.decode().catch(() => {}); // there may be none of this kind
    }));
  }

  // kind is that of the density: its colours go by the density or by its root.
  get kind() { return this.root ? "faint" : "density"; }

  show(shot, view) {
    Object.assign(this, { shot, view });
    for (const id of ["density", "residual"]) $(id).classList.remove("waits");
    this.draw();
  }

  clear() {
    this.show(null, null);
  }

  choose(part) {
    this.part = part;
    this.draw();
  }

  toggleScale() {
    this.root = !this.root;
    localStorage.setItem("scale", this.root ? "root" : "linear");
    this.draw();
  }

  draw() {
    $("scale").textContent = this.root ? "by root" : "linear";
    for (const part of parts) $("tab-" + part).setAttribute("aria-pressed", this.part === part);
    const v = this.view, frame = this.part === "frame" || !v?.width;
    $("density-scale").hidden = !v;
    $("residual-scale").hidden = !v?.width;
    $("scale").hidden = $("outlines").hidden = frame;
    $("fitted").hidden = !frame || !v?.width;
    for (const part of ["thermal", "condensate"]) $("outline-" + part).hidden = !v?.outlines?.some((o) => o.part === part);
    if (!v) $("density").replaceChildren();
    else if (frame) this.drawFrame(v);
    else this.drawDensity(v);
    this.drawResidual();
  }

  // box is what is shown of the fitted map: x, y, width, height.
  box() {
    const v = this.view, points = (v.outlines || []).flatMap((o) => o.line);
    if (this.part !== "cloud" || !points.length) return [0, 0, v.width, v.height];
    const span = (i, size) => {
      const low = Math.min(...points.map((p) => p[i])), high = Math.max(...points.map((p) => p[i]));
      return { mid: (low + high + 1) / 2, half: (high - low) / 2, size };
    };
    const x = span(0, v.width), y = span(1, v.height), half = Math.max(2.1 * x.half, 2.1 * y.half, 12);
    const range = (s) => [Math.max(0, s.mid - half), Math.min(s.size, s.mid + half)];
    const [x0, x1] = range(x), [y0, y1] = range(y);
    return [x0, y0, x1 - x0, y1 - y0];
  }

  drawDensity(v) {
    const stage = $("density"), drawn = [this.image(this.kind, v.width, v.height)];
    const box = this.box();
    (v.cuts || []).forEach((c, i) => drawn.push(...axis(c.line, box, i + 1)));
    for (const o of v.outlines || []) {
      const d = path(o.line);
      drawn.push(svg("path", { class: "halo", d }), svg("path", { class: o.part, d }));
    }
    drawn.push(...ruler(box, v.pixel_um));
    stage.setAttribute("viewBox", box.join(" "));
    stage.replaceChildren(...drawn);
    $("density-low").textContent = "σ₀n 0";
    $("density-middle").textContent = Number((this.root ? v.top / 4 : v.top / 2).toPrecision(3));
    $("density-high").textContent = Number(v.top.toPrecision(3));
  }

  drawFrame(v) {
    const stage = $("density"), [w, h] = v.frame, drawn = [this.image("frame", w, h)];
    const box = (r, name) => drawn.push(svg("rect", { class: name, x: r[0], y: r[1], width: r[2] - r[0], height: r[3] - r[1] }));
    if (v.width) box(v.region, "now");
    if (this.region.next) box(this.region.next, "next");
    if (this.drag) box(this.drag, "drag");
    stage.setAttribute("viewBox", `0 0 ${w} ${h}`);
    stage.replaceChildren(...drawn);
    $("density-low").textContent = "light missing: none";
    $("density-middle").textContent = "";
    $("density-high").textContent = "all";
  }

  drawResidual() {
    const v = this.view, stage = $("residual");
    if (!v?.width) return stage.replaceChildren();
    stage.setAttribute("viewBox", this.box().join(" "));
    const lines = (v.outlines || []).map((o) => svg("path", {
      class: "axis", fill: "none", d: path(o.line),
    }));
    stage.replaceChildren(this.image("residual", v.width, v.height), ...lines);
    $("residual-low").textContent = "−" + v.sigmas + "σ";
    $("residual-high").textContent = "+" + v.sigmas + "σ";
  }

  image(kind, width, height) {
    return svg("image", { href: pictureOf(kind, this.shot, this.view.mark), width, height, preserveAspectRatio: "none", "data-shot": this.shot });
  }
}

// path is a closed line through the centres of pixels.
function path(line) {
  return "M" + line.map(([x, y]) => (x + .5) + " " + (y + .5)).join("L") + "Z";
}

// axis is the line of a cut with its number where it leaves the box.
function axis(line, [left, top, width, height], number) {
  const [x1, y1, x2, y2] = line.map((p) => p + .5), size = Math.max(width, height) / 28;
  const cx = left + width / 2, cy = top + height / 2, length = Math.hypot(x2 - x1, y2 - y1);
  const dx = (x2 - x1) / length, dy = (y2 - y1) / length;
  const reach = Math.min(Math.abs((width / 2 - size) / dx), Math.abs((height / 2 - size) / dy));
  // from the point of the line next to the middle of the box
  const along = (cx - x1) * dx + (cy - y1) * dy;
  const x = x1 + (along + reach) * dx, y = y1 + (along + reach) * dy;
  return [
    svg("line", { class: "axis", x1, y1, x2, y2 }),
    svg("text", { class: "number", x, y, "font-size": size, "stroke-width": size / 8, "text-anchor": "middle", "dominant-baseline": "central" }, number),
  ];
}

// ruler is a bar of a round length.
function ruler([left, top, width, height], pixel) {
  const most = width * pixel / 3;
  const power = 10 ** Math.floor(Math.log10(most));
  const um = [5, 2, 1].map((k) => k * power).find((k) => k <= most) ?? power;
  const size = Math.max(width, height) / 24, x = left + size * .8, y = top + height - size * .8;
  const label = um >= 1000 ? um / 1000 + " mm" : um + " µm";
  return [
    svg("line", { class: "ruler", x1: x, y1: y, x2: x + um / pixel, y2: y }),
    svg("text", { x, y: y - size * .4, "font-size": size, "stroke-width": size / 8 }, label),
  ];
}
