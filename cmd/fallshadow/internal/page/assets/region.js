// Drawing the region of interest on the whole frame.
import { $ } from "./dom.js";
import { post } from "./api.js";

export class RegionTool {
  constructor(pictures, say) {
    this.pictures = pictures;
    this.say = say;
    this.on = false;
    const stage = $("density");
    stage.addEventListener("pointerdown", (e) => this.down(e));
    stage.addEventListener("pointermove", (e) => this.move(e));
    stage.addEventListener("pointerup", (e) => { this.move(e); this.from = null; });
    stage.addEventListener("pointercancel", () => { this.from = null; });
    $("drawing-take").addEventListener("click", () => this.take());
    $("drawing-whole").addEventListener("click", () => {
      if (!this.draws) return;
      const [w, h] = this.pictures.view.frame;
      this.set([0, 0, w, h]);
    });
    $("drawing-undo").addEventListener("click", () => this.undo());
    $("drawing-cancel").addEventListener("click", () => this.end());
  }

  // framed reports whether there is a frame to draw on; a shot that comes meanwhile may have none.
  get framed() { return this.pictures.view?.frame[0] > 0; }

  get draws() { return this.on && this.framed; }

  begin() {
    if (!this.framed) return;
    this.on = true;
    this.before = this.pictures.part;
    this.pictures.part = "frame";
    $("drawing").hidden = false;
    $("density").classList.add("draws");
    this.set(null);
    $("eye").classList.add("draws");
    reveal($("eye"));
  }

  end() {
    this.on = false;
    this.from = null;
    this.pictures.drag = null;
    $("drawing").hidden = true;
    $("density").classList.remove("draws");
    $("eye").classList.remove("draws");
    this.pictures.choose(this.before);
  }

  set(region) {
    this.pictures.drag = region;
    const usable = region && region[2] - region[0] >= 16 && region[3] - region[1] >= 16;
    $("drawing-take").disabled = !usable;
    $("drawing-text").textContent = region
      ? `x ${region[0]} to ${region[2]}, y ${region[1]} to ${region[3]}`
      : "draw a rectangle on the frame";
    this.pictures.draw();
  }

  // point returns the saved pixel under the pointer.
  point(e) {
    const stage = $("density"), [w, h] = this.pictures.view.frame;
    const p = new DOMPoint(e.clientX, e.clientY).matrixTransform(stage.getScreenCTM().inverse());
    return [Math.min(Math.max(Math.round(p.x), 0), w), Math.min(Math.max(Math.round(p.y), 0), h)];
  }

  down(e) {
    if (!this.draws) return;
    e.preventDefault();
    $("density").setPointerCapture(e.pointerId);
    this.from = this.point(e);
  }

  move(e) {
    if (!this.draws || !this.from) return;
    const [x, y] = this.point(e), [a, b] = this.from;
    this.set([Math.min(a, x), Math.min(b, y), Math.max(a, x), Math.max(b, y)]);
  }

  take() {
    if (this.on && !$("drawing-take").disabled) this.ask({ region: this.pictures.drag });
  }

  // undo takes back the region that waits for the next shot.
  undo() { this.ask({}); }

  async ask(change) {
    try {
      await post("/api/region", change);
      this.end();
    } catch (error) {
      this.say(error.message);
    }
  }
}

// reveal scrolls a part of the page into sight that is not all there, below the header where
// that stays.
function reveal(part) {
  const header = document.querySelector("header"), stays = getComputedStyle(header).position === "sticky";
  const top = stays ? header.offsetHeight : 0, box = part.getBoundingClientRect();
  if (box.top >= top && box.bottom <= innerHeight) return;
  part.style.scrollMarginTop = top + "px";
  part.scrollIntoView({ block: "start" });
}
