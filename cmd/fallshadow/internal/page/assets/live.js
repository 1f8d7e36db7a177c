// The stream of events, which finds its way back after the connection or the program was
// lost.

export class Live {
  constructor(handlers, state) {
    this.handlers = handlers;
    this.state = state;
  }

  // open listens to what comes after an event.
  open(after) {
    this.close();
    const source = new EventSource("/events?" + new URLSearchParams({ after }));
    this.source = source;
    source.onopen = () => this.state(true);
    source.onerror = () => {
      this.state(false);
      if (source.readyState === EventSource.CLOSED) this.retry();
    };
    for (const [kind, handle] of Object.entries(this.handlers)) {
      source.addEventListener(kind, (e) => {
        this.after = e.lastEventId;
        handle(JSON.parse(e.data));
      });
    }
    this.after = after;
  }

  retry() {
    this.close();
    this.timer = setTimeout(() => this.open(this.after), 1000);
  }

  close() {
    clearTimeout(this.timer);
    this.source?.close();
  }
}
