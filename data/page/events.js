// Server-sent events over fetch, so that a token can go along; keeps the connection, and says when it is lost.

/// Feed it text as it comes; hands out whole events.
export class EventParser {
  constructor(emit) {
    this.emit = emit;
    this.rest = "";
    this.last_id = "";
    this.clear();
  }

  clear() { this.type = "message"; this.data = []; }

  feed(text) {
    this.rest += text;
    let end;
    while ((end = this.rest.search(/\r\n|\n|\r(?=.)/s)) >= 0) {
      const line = this.rest.slice(0, end);
      this.rest = this.rest.slice(end + (this.rest.startsWith("\r\n", end) ? 2 : 1));
      this.line(line);
    }
  }

  line(line) {
    if (line === "") {
      if (this.data.length) this.emit({ type: this.type, data: this.data.join("\n"), id: this.last_id });
      this.clear();
      return;
    }
    if (line.startsWith(":")) return;
    const colon = line.indexOf(":");
    const field = colon < 0 ? line : line.slice(0, colon);
    const value = colon < 0 ? "" : line.slice(colon + 1).replace(/^ /, "");
    if (field === "event") this.type = value;
    if (field === "data") this.data.push(value);
    if (field === "id" && !value.includes("\0")) this.last_id = value;
  }
}

const SILENCE = 45000;  // three heartbeats
const LONGEST_PAUSE = 15000;

export class EventStream {
  /// handlers: event({type, data, id}), state("live" | "lost" | "waiting for a token", seconds until the next try)
  constructor(api, handlers) {
    this.api = api;
    this.handlers = handlers;
    this.pause = 500;
    this.last_id = "";
    this.attempt = 0;
  }

  /// Begins, or begins anew without waiting for the pause to end.
  again() {
    clearTimeout(this.timer);
    this.abort?.abort();
    this.pause = 500;
    this.run();
  }

  watch(abort) {
    clearTimeout(this.watchdog);
    this.watchdog = setTimeout(() => abort.abort(), SILENCE);
  }

  async run() {
    const attempt = ++this.attempt;
    const abort = new AbortController();
    this.abort = abort;
    let retry = true;
    try {
      const headers = { Accept: "text/event-stream" };
      if (this.last_id) headers["Last-Event-ID"] = this.last_id;
      this.watch(abort);
      const response = await this.api.fetch("/v1/events", { headers, signal: abort.signal });
      this.pause = 500;
      this.handlers.state("live", 0);
      const parser = new EventParser((event) => {
        this.last_id = event.id;
        this.handlers.event(event);
      });
      const reader = response.body.pipeThrough(new TextDecoderStream()).getReader();
      for (;;) {
        const { value, done } = await reader.read();
        if (done) break;
        this.watch(abort);
        parser.feed(value);
      }
    } catch (failure) {
      if (failure.status === 401 || failure.status === 403) {
        retry = false;
        if (attempt === this.attempt) this.handlers.state("waiting for a token", 0);
      }
    }
    clearTimeout(this.watchdog);
    if (attempt !== this.attempt || !retry) return;
    const wait = this.pause;
    this.pause = Math.min(LONGEST_PAUSE, this.pause * 2);
    this.handlers.state("lost", wait / 1000);
    this.timer = setTimeout(() => this.run(), wait);
  }
}
