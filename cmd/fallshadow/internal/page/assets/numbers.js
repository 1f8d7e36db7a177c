// The numbers of a shot, its flags in plain words, and all cells of its row.
import { $, el } from "./dom.js";
import { readingOf, written } from "./reading.js";

const major = new Set(["atoms", "fraction", "T_nK", "mu_nK"]);
const calm = new Set(["provisional"]); // no reason to look up

export function showNumbers(row, columns, sentences) {
  $("shot").textContent = row.shot;
  const about = [row.flight && "flight " + row.flight, ...(row.scan || []).map((s) => s.name + " " + s.text)];
  if (row.model && row.model !== "none") about.push(row.model);
  about.push(...(row.flags || []).filter((f) => calm.has(f)));
  $("about").textContent = about.filter(Boolean).join(" · ");
  $("verdict").hidden = !row.bad;
  $("verdict").textContent = row.bad ? "marked bad: " + row.bad : "";
  $("cards").replaceChildren(...(row.cards || []).map(card));
  $("flags").replaceChildren(...flags(row, sentences));
  $("all").replaceChildren(...cells(row, columns));
}

function card(c) {
  const errors = el("div", { class: "errors" });
  if (c.err) errors.append(el("span", {}, el("b", {}, c.err), " stat"));
  if (c.cal) errors.append(el("span", {}, el("b", {}, c.cal), " cal"));
  const length = c.value.length, size = major.has(c.name) ? length <= 6 ? "" : length <= 7 ? " long" : " longer" : " minor";
  return el("div", { class: "card" + size, "data-name": c.name },
    el("div", { class: "label" }, c.label),
    el("div", { class: "value" }, c.value, c.unit ? el("span", { class: "unit" }, c.unit) : null),
    errors);
}

function flags(row, sentences) {
  const list = [];
  if (row.failed) list.push(el("li", { class: "failed" }, el("b", {}, "failed"), row.reason));
  for (const f of (row.flags || []).filter((f) => !calm.has(f))) {
    let text = sentences[f] || "";
    if (f === "duplicate" && row.same) text = "the same pixels as " + row.same;
    list.push(el("li", {}, el("b", {}, f.replaceAll("_", " ")), text));
  }
  return list;
}

function cells(row, columns) {
  const lines = [];
  for (const c of columns) {
    const r = readingOf(row, c.name);
    if (r) lines.push(el("tr", { title: c.meaning }, el("td", {}, c.name), el("td", {}, written(r))));
  }
  for (const [name, word] of Object.entries(row.words || {})) {
    lines.push(el("tr", {}, el("td", {}, name), el("td", {}, word)));
  }
  for (const file of row.files || []) lines.push(el("tr", {}, el("td", {}, "file"), el("td", {}, file)));
  return lines;
}
