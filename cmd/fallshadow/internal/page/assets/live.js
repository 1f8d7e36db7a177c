// The stream of events, which finds its way back after the connection or the program was
// lost.

const silence = 35000; // ms without a beat after which a connection is dead: three beats of the program

export class Live {
  constructor(handlers, state) {
    this.handlers = handlers;
    this.state = state;
    setInterval(() => this.listen(), 1000);
  }

  // open listens to what comes after an event.
  open(after) {
    this.close();
    const source = new EventSource("/events?" + new URLSearchParams({ after }));
    this.source = source;
    this.heard = Date.now();
    source.onopen = () => this.state(true);
    source.onerror = () => {
      this.state(false);
      if (source.readyState === EventSource.CLOSED) this.retry();
    };
    for (const [kind, handle] of Object.entries(this.handlers)) {
      source.addEventListener(kind, (e) => {
        this.after = e.lastEventId;
        this.heard = Date.now();
        handle(JSON.parse(e.data));
      });
    }
    source.addEventListener("beat", () => { this.heard = Date.now(); });
    this.after = after;
  }

  // listen opens a connection anew that died without a word, as that of a phone that slept.
  listen() {
    if (!this.source || Date.now() - this.heard < silence) return;
    this.state(false);
    this.open(this.after);
  }

  // retry comes back later to a program that refused, and asks it why.
  retry() {
    this.close();
    this.timer = setTimeout(() => this.open(this.after), 1000);
    fetch("/icon.svg").then(async (r) => r.ok || this.state(false, (await r.text()).trim())).catch(() => {});
  }

  close() {
    clearTimeout(this.timer);
    this.source?.close();
  }
}
