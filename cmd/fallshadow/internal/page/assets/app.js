// The page: what is shown, and what keys and buttons do.
import { $, el } from "./dom.js";
import { get, giveUp, post } from "./api.js";
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
let late = null;        // rows and notes that came since the night was asked for, as long as it is on its way
let reading = false, changed = false; // the night is being read again; it is to be after that
let asked = 0;          // counts showings: the row of the last one stays
let passed = new AbortController(); // ends what is asked for the shot shown, once another is
let turn = 0;           // counts views: the last one asked for stays
let skew = 0;           // of the clock here against that of the program, ms
let latestAt = null;    // when the last shot came
let wanted = null;      // the shot that is being shown
let detail = null;      // its row
let judged = null;      // the row that a person is asked about
let notes = [], trouble = ""; // what the program says, and what went wrong here

// load reads everything but the numbers of single shots. The answer may be older than what
// comes while it is on its way.
async function load() {
  const meanwhile = late = { rows: [], notes: null };
  const night = await get("/api/night").finally(() => { late = null; });
  columns = night.columns;
  sentences = night.flags;
  skew = Date.now() - night.now;
  if (night.told) latestAt = night.told + skew;
  document.title = night.night + " · fallshadow";
  $("night").textContent = night.night;
  $("settings-text").textContent = night.settings;
  showNotes(meanwhile.notes ?? night.notes);
  showRegion(night.region, night.drawn);
  pictures.scales(night.scales);
  shots.reset(night.rows || []);
  for (const row of meanwhile.rows) shots.put(row);
  trend.offer([...columns, ...(night.scan || []).map((name) => ({ name, meaning: "scan variable" }))], night.scan || []);
  following ||= !shots.has(wanted);
  const shot = following ? shots.last() : wanted;
  if (shot === undefined) showNoShot();
  else show(shot, [night.last, ...meanwhile.rows].findLast((row) => row?.shot === shot), true);
  await trend.load();
  return night.event;
}

// reload reads the night until that succeeds. What changes while it is on its way is read
// after it, once.
async function reload() {
  changed = true;
  if (reading) return;
  reading = true;
  while (changed) {
    changed = false;
    try {
      await load();
    } catch {
      changed = true;
      await new Promise((done) => setTimeout(done, 1000));
    }
  }
  reading = false;
}

// show shows a shot: its numbers, and its picture as soon as there is one. Where the row is
// at hand it is given; look says that the picture is there too.
async function show(shot, row, look = row === undefined) {
  const mine = ++asked, seen = look ? ++turn : 0;
  passed.abort();
  passed = new AbortController();
  wanted = shot;
  shots.select(shot);
  pictures.wait();
  trend.plot?.redraw(false);
  try {
    const view = look ? get("/api/view", { shot }, passed.signal) : null;
    view?.catch(() => {}); // the row says why
    row ??= await get("/api/row", { shot });
    if (mine !== asked) return;
    showRow(row);
    if (view) await showView(shot, await view, seen);
    else if (row.failed) showNothing();
    if (mine === asked) say("");
  } catch (error) {
    if (mine !== asked) return;
    if (detail?.shot === shot && detail.failed) {
      showNothing();
      return say("");
    }
    say(error.message);
    setTimeout(() => mine === asked && show(shot), 3000); // a file may be half written, or away for a moment
  }
}

// showNothing stands for a picture that there is none of.
function showNothing() {
  turn++;
  pictures.clear();
  sayRegion();
  cuts.show(null);
}

function showNoShot() {
  asked++;
  wanted = detail = null;
  showNumbers({ shot: "no shots yet", numbers: {} }, columns, sentences);
  showNothing();
  showStatus();
  say("");
}

function showRow(row) {
  detail = row;
  showNumbers(row, columns, sentences);
  sayRegion();
  document.body.dataset.shown = row.shot;
  showStatus();
}

async function showView(shot, view, seen) {
  if (wanted !== shot || seen !== turn) return;
  await pictures.load(shot, view);
  if (wanted !== shot || seen !== turn) return;
  pictures.show(shot, view);
  sayRegion();
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
  if (shots.last() === undefined) return;
  show(shots.last());
  shots.reveal(shots.last());
}

const live = new Live({
  row(row) {
    late?.rows.push(row);
    shots.put(row);
    trend.put(row);
    latestAt = row.told + skew;
    if (following && row.shot === shots.last() || wanted === row.shot) show(row.shot, row);
    showStatus();
  },
  picture(shot) {
    if (wanted !== shot) return;
    const seen = ++turn;
    get("/api/view", { shot }).then((view) => showView(shot, view, seen)).catch(() => seen === turn && wanted === shot && show(shot));
  },
  changed: reload,
  begin: reload,
  notes(list) {
    if (late) late.notes = list ?? [];
    showNotes(list);
  },
}, (is, why) => {
  if (!is) giveUp();
  connected = is;
  if (why) say(why);
  showStatus();
});

function showStatus() {
  const age = latestAt === null ? "" : "last shot " + ago(Math.max(0, Date.now() - latestAt));
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

// sayRegion says what regions that a person drew, and other settings, have to do with the
// numbers shown.
function sayRegion() {
  const region = pictures.region.next ? "a region waits for the next shot" : regionWords[detail?.region];
  const other = pictures.view?.stale && "picture by the settings of now";
  $("region-now").textContent = [region, other].filter(Boolean).join(" · ");
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
