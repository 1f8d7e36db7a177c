// The page: what is shown, and what keys and buttons do.
import { $, el } from "./dom.js";
import { get, post } from "./api.js";
import { Shots } from "./shots.js";
import { showNumbers } from "./numbers.js";
import { Pictures, parts } from "./picture.js";
import { Cuts } from "./cuts.js";
import { Trend } from "./trend.js";
import { RegionTool } from "./region.js";
import { Live } from "./live.js";

const shots = new Shots((shot) => choose(shot));
const pictures = new Pictures();
const cuts = new Cuts();
const trend = new Trend(shots, (shot) => choose(shot));
const region = new RegionTool(pictures, (text) => say(text));

let columns = [], sentences = {};
let following = true, connected = false;
let loads = 0;          // counts readings of the night: the last one asked for stays
let late = null;        // rows that came since it was asked for, as long as it is on its way
let turn = 0;           // counts views: the last one asked for stays
let latestAt = null;    // when the last shot came
let wanted = null;      // the shot that is being shown
let detail = null;      // its row
let judged = null;      // the row that a person is asked about
let notes = [], trouble = ""; // what the program says, and what went wrong here

// load reads everything but the numbers of single shots. The answer may be older than a row
// that comes while it is on its way, and than what is read after it.
async function load() {
  const mine = ++loads, meanwhile = late = [];
  const night = await get("/api/night").finally(() => { if (mine === loads) late = null; });
  if (mine !== loads) return night.event;
  columns = night.columns;
  sentences = night.flags;
  document.title = night.night + " · fallshadow";
  $("night").textContent = night.night;
  $("settings-text").textContent = night.settings;
  showNotes(night.notes);
  showRegion(night.region, night.drawn);
  pictures.scales(night.scales);
  shots.reset(night.rows || []);
  for (const row of meanwhile) shots.put(row);
  trend.offer([...columns, ...(night.scan || []).map((name) => ({ name, meaning: "scan variable" }))], night.scan || []);
  const stays = wanted !== null && shots.has(wanted) && !following;
  const shot = stays ? wanted : shots.last();
  if (shot === undefined) {
    wanted = null;
    $("shot").textContent = "no shots yet";
    pictures.clear();
  } else {
    show(shot, night.last?.shot === shot ? night.last : undefined, true);
  }
  await trend.load();
  return night.event;
}

// reload is load until it succeeds, or another begins.
function reload() {
  const mine = loads + 1;
  load().catch(() => setTimeout(() => mine === loads && reload(), 1000));
}

// show shows a shot: its numbers, and its picture as soon as there is one. Where the row is
// at hand it is given; look says that the picture is there too.
async function show(shot, row, look = row === undefined) {
  wanted = shot;
  shots.select(shot);
  pictures.wait();
  trend.plot?.redraw(false);
  try {
    const view = look ? get("/api/view", { shot }) : null;
    view?.catch(() => {}); // the row says why
    showRow(row ?? await get("/api/row", { shot }), shot);
    say("");
    if (view) await showView(shot, await view);
    else if (row.failed) showNothing();
  } catch (error) {
    if (wanted !== shot) return;
    if (detail?.shot === shot && detail.failed) showNothing();
    else say(error.message);
  }
}

// showNothing stands for a picture that there is none of.
function showNothing() {
  pictures.clear();
  cuts.show(null);
}

function showRow(row, shot) {
  if (wanted !== shot) return;
  detail = row;
  showNumbers(row, columns, sentences);
  sayRegion();
  document.body.dataset.shown = shot;
  showStatus();
}

async function showView(shot, view) {
  if (wanted !== shot) return; // an answer that comes late must not take the turn of the shot shown
  const mine = ++turn;
  await pictures.load(shot, view);
  if (wanted !== shot || mine !== turn) return;
  pictures.show(shot, view);
  showCuts();
  document.body.dataset.seen = shot;
}

// choose shows a shot that a person asked for; that ends following, unless it is the last.
function choose(shot) {
  if (shot === undefined) return;
  following = shot === shots.last();
  show(shot);
}

function follow() {
  following = true;
  if (shots.last() !== undefined) show(shots.last());
}

const live = new Live({
  row(row) {
    late?.push(row);
    shots.put(row);
    trend.put(row);
    latestAt = Date.now();
    if (following && row.shot === shots.last() || wanted === row.shot) show(row.shot, row);
    showStatus();
  },
  picture(shot) {
    if (wanted === shot) get("/api/view", { shot }).then((view) => showView(shot, view)).catch((error) => say(error.message));
  },
  changed: reload,
  begin: reload,
  notes: showNotes,
}, (is) => { connected = is; showStatus(); });

function showStatus() {
  const age = latestAt === null ? "" : "last shot " + ago(Date.now() - latestAt);
  const status = $("status");
  status.className = !connected ? "lost" : following ? "" : "held";
  status.textContent = !connected ? "connection lost, trying again" : following ? age || "live" : "looking back" + (age && " · " + age);
  $("follow").hidden = following;
  $("mark").firstChild.textContent = detail?.bad ? "bad: change " : "bad ";
}

function ago(ms) {
  const s = Math.round(ms / 1000);
  return s < 100 ? s + " s ago" : s < 6000 ? Math.round(s / 60) + " min ago" : Math.round(s / 3600) + " h ago";
}

function showNotes(list) {
  notes = list || [];
  const lines = [...notes, trouble].filter(Boolean);
  $("notes").hidden = !lines.length;
  $("notes").textContent = lines.join("\n");
}

function showRegion(now, next) {
  pictures.region = { now, next };
  $("drawing-undo").hidden = !next;
  sayRegion();
  pictures.draw();
}

const regionWords = {
  used: "region drawn by hand",
  "left out": "fitted without the region drawn by hand",
  unknown: "region drawn by hand, numbers of other settings",
};

// sayRegion says what regions that a person drew have to do with the numbers shown.
function sayRegion() {
  $("region-now").textContent = pictures.region.next ? "a region waits for the next shot" : regionWords[detail?.region] ?? "";
}

function say(text) {
  trouble = text;
  showNotes(notes);
}

function askBad() {
  if (!detail) return;
  judged = detail; // another shot may be shown before the answer
  $("bad-shot").textContent = detail.shot;
  $("bad-word").value = detail.bad || "";
  $("bad-back").hidden = !detail.bad;
  $("bad-words").replaceChildren(...[...new Set(shots.rows.map((r) => r.bad).filter(Boolean))].map((value) => el("option", { value })));
  $("bad-dialog").returnValue = "";
  $("bad-dialog").showModal();
}

$("bad-dialog").addEventListener("close", async () => {
  const answer = $("bad-dialog").returnValue;
  if (answer !== "take" && answer !== "back") return;
  const word = answer === "back" ? "" : $("bad-word").value.trim() || "bad";
  try {
    await post("/api/verdict", { shot: judged.shot, word });
  } catch (error) {
    say(error.message);
  }
});

function toggleTheme() {
  const theme = document.documentElement.dataset.theme === "dark" ? "light" : "dark";
  document.documentElement.dataset.theme = theme;
  localStorage.setItem("theme", theme);
  cuts.recolour();
  trend.build();
}

function toggleFar() {
  far(!document.body.classList.contains("far"));
}

// far shows the numbers so large that they can be read from across the room.
function far(is) {
  document.body.classList.toggle("far", is);
  $("far").setAttribute("aria-pressed", is);
  localStorage.setItem("far", is ? "yes" : "");
}

function showCuts() {
  if (!pictures.view?.width) return cuts.show(null);
  const [, , width, height] = pictures.box();
  cuts.show(pictures.view, Math.hypot(width, height) / 2 * pictures.view.pixel_um);
}

function choosePart(part) {
  if (region.on) region.end();
  pictures.choose(part);
  showCuts();
}

const actions = {
  ArrowLeft: () => choose(shots.beside(-1)),
  ArrowDown: () => choose(shots.beside(-1)),
  ArrowRight: () => choose(shots.beside(1)),
  ArrowUp: () => choose(shots.beside(1)),
  End: follow,
  b: askBad,
  c: () => pictures.toggleScale(),
  l: toggleFar,
  f: () => choosePart(parts[(parts.indexOf(pictures.part) + 1) % parts.length]),
  r: () => (region.on ? region.end() : region.begin()),
  s: () => $("settings-dialog").showModal(),
  t: toggleTheme,
  "?": () => $("help-dialog").showModal(),
  Enter: () => region.on && region.take(),
  Escape: () => region.on && region.end(),
};

addEventListener("keydown", (e) => {
  const busy = e.target.closest("input, select, textarea, dialog") || e.ctrlKey || e.metaKey || e.altKey;
  const action = actions[e.key] ?? actions[e.key.toLowerCase()];
  if (busy || !action || e.key === "Enter" && !region.on) return;
  e.preventDefault();
  action();
});

for (const [id, action] of Object.entries({
  scale: actions.c, older: actions.ArrowLeft, newer: actions.ArrowRight, follow, mark: askBad, draw: actions.r,
  settings: actions.s, far: toggleFar, theme: toggleTheme, help: actions["?"],
})) $(id).addEventListener("click", action);
for (const part of parts) $("tab-" + part).addEventListener("click", () => choosePart(part));

for (const select of document.querySelectorAll("select")) freeKeys(select);

// freeKeys gives the keys back to the page once a choice was made with a pointer.
function freeKeys(select) {
  let pointed = false;
  select.addEventListener("pointerdown", () => { pointed = true; });
  select.addEventListener("keydown", () => { pointed = false; });
  select.addEventListener("change", () => pointed && select.blur());
}

far(localStorage.getItem("far") === "yes");
setInterval(showStatus, 1000);
load().then((event) => live.open(event)).catch(() => live.open(""));
