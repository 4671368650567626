// The list of jobs: only the rows in sight are in the page, however many there are.

import { el, announce } from "./dom.js";
import { mark } from "./mark.js";
import { ago, bytes, forecast_in_words, fraction_of, grouped, phase_in_words, standing_of, STANDING, seconds } from "./words.js";

const ROW = 76, SPARE = 6;

function second_line(job, now) {
  const parts = [job.command];
  if (job.title) parts.push(job.title);
  const standing = standing_of(job);
  if (standing === "queued" || standing === "running") {
    const words = forecast_in_words(job.forecast);
    if (words) parts.push(words);
    if (job.started && standing === "running") parts.push(`running ${seconds((now - Date.parse(job.started)) / 1000)}`);
  } else if (job.started && job.finished) {
    parts.push(`took ${seconds(Math.max(0, (Date.parse(job.finished) - Date.parse(job.started)) / 1000))}`);
  }
  parts.push(ago(Date.parse(job.created), now));
  return parts.join(" \u00b7 ");
}

function first_line(job) {
  if (job.cancelling) return "Being stopped";
  if (job.state === "running") {
    const fraction = fraction_of(job.progress);
    return `Running: ${phase_in_words(job.progress?.phase)}${fraction === null ? "" : `, ${Math.round(100 * fraction)} %`}`;
  }
  if (job.state === "queued") {
    return job.memory_bytes ? `Waiting for a place and ${bytes(job.memory_bytes)} of memory` : "Waiting";
  }
  return job.headline ?? job.problem?.detail ?? (job.state === "cancelled" ? "Cancelled" : STANDING[standing_of(job)]);
}

export class JobList {
  constructor(book, { open, older }) {
    this.book = book;
    this.open = open;
    this.older = older;
    this.active = 0;
    this.current = null;
    this.body = el("div", { class: "rows", role: "presentation" });
    this.grid = el("div", { class: "job-grid", role: "grid", tabindex: 0, "aria-label": "Jobs, the newest first. Up and down go through them, Enter opens one." }, this.body);
    this.grid.addEventListener("scroll", () => this.soon());
    this.grid.addEventListener("keydown", (event) => this.key(event));
    this.grid.addEventListener("focus", () => { this.focused = true; this.soon(); });
    this.grid.addEventListener("blur", () => { this.focused = false; this.soon(); });
    this.tally = el("p", { class: "soft tally", role: "status" });
    this.element = el("div", { class: "job-list" }, el("h1", { class: "unseen" }, "Jobs"), this.filter_form(), this.tally, this.grid);
    this.rows = new Map();
    new ResizeObserver(() => this.soon()).observe(this.grid);
    book.listen(() => this.soon());
    this.clock = setInterval(() => this.soon(), 5000);
  }

  filter_form() {
    const filter = () => this.book.set_filter({ text: this.text.value.trim(), standing: this.standing.value, command: this.command.value });
    this.text = el("input", { type: "search", id: "find", placeholder: "words, title or id", autocomplete: "off", oninput: filter });
    const option = (value, text) => el("option", { value }, text);
    this.standing = el("select", { id: "find-standing", onchange: filter }, option("", "any"), Object.entries(STANDING).map(([value, text]) => option(value, text)));
    this.command = el("select", { id: "find-command", onchange: filter }, option("", "any"),
      ["check", "count", "sweep", "bracket", "audit", "locate", "forecast"].map((name) => option(name, name)));
    return el("form", { class: "filter", role: "search", onsubmit: (event) => event.preventDefault() },
      el("div", { class: "wide" }, el("label", { for: "find" }, "Find"), this.text),
      el("div", null, el("label", { for: "find-standing" }, "Outcome"), this.standing),
      el("div", null, el("label", { for: "find-command" }, "Question"), this.command));
  }

  soon() {
    if (this.queued) return;
    this.queued = true;
    requestAnimationFrame(() => { this.queued = false; this.draw(); });
  }

  set_current(id) {
    this.current = id;
    const at = this.book.shown.findIndex((job) => job.id === id);
    if (at >= 0) this.active = at;
    this.soon();
  }

  draw() {
    const { shown } = this.book;
    this.active = Math.min(this.active, Math.max(0, shown.length - 1));
    const known = this.book.order.length, all = Math.max(this.book.total, known);
    const text = this.book.failed ? "The list could not be read." : !this.book.loaded ? "Reading the list \u2026" : shown.length === known
      ? `${grouped(all)} ${all === 1 ? "job" : "jobs"}${known < all ? `, the newest ${grouped(known)} are here` : ""}`
      : `${grouped(shown.length)} of ${grouped(known)} jobs pass the filter`;
    if (this.tally.textContent !== text) this.tally.textContent = text;
    this.grid.setAttribute("aria-rowcount", shown.length);
    this.body.style.height = `${shown.length * ROW}px`;
    const first = Math.max(0, Math.floor(this.grid.scrollTop / ROW) - SPARE);
    const last = Math.min(shown.length, Math.ceil((this.grid.scrollTop + this.grid.clientHeight) / ROW) + SPARE);
    const now = Date.now();
    const kept = new Set();
    for (let k = first; k < last; k += 1) {
      kept.add(shown[k].id);
      this.row(shown[k], k, now);
    }
    for (const [id, row] of this.rows) {
      if (kept.has(id)) continue;
      row.element.remove();
      this.rows.delete(id);
    }
    // Read in the order in which they are seen.
    let before = null;
    for (let k = last - 1; k >= first; k -= 1) {
      const { element } = this.rows.get(shown[k].id);
      if (element.nextSibling !== before) this.body.insertBefore(element, before);
      before = element;
    }
    const active = shown[this.active];
    if (active && kept.has(active.id)) this.grid.setAttribute("aria-activedescendant", `job-row-${active.id}`);
    else this.grid.removeAttribute("aria-activedescendant");
    if (last === shown.length && this.book.next && this.book.loaded) this.older();
  }

  row(job, k, now) {
    let row = this.rows.get(job.id);
    const standing = standing_of(job);
    const lines = [first_line(job), second_line(job, now)];
    const fraction = job.state === "running" ? fraction_of(job.progress) : null;
    const state = JSON.stringify([k, standing, lines, fraction, job.id === this.current, k === this.active && this.focused, job.continues]);
    if (!row) {
      const element = el("div", { class: "job-row", role: "row", id: `job-row-${job.id}`, onclick: () => { this.active = this.book.shown.findIndex((one) => one.id === job.id); this.open(job.id); } });
      this.body.append(element);
      row = { element, state: "" };
      this.rows.set(job.id, row);
    }
    if (row.state === state) return;
    row.state = state;
    const { element } = row;
    element.setAttribute("aria-rowindex", k + 1);
    element.setAttribute("aria-selected", job.id === this.current);
    element.style.transform = `translateY(${k * ROW}px)`;
    element.classList.toggle("current", job.id === this.current);
    element.classList.toggle("active", k === this.active && Boolean(this.focused));
    const bar = fraction === null ? null : el("span", { class: "thin-bar" }, el("span", { class: "thin-fill" }));
    if (bar) bar.firstChild.style.width = `${100 * fraction}%`;
    element.replaceChildren(
      el("span", { class: "cell-mark", role: "gridcell" }, mark(standing), el("span", { class: "mark-word" }, STANDING[standing])),
      el("span", { class: "cell-text", role: "gridcell" }, el("span", { class: "line-one" }, lines[0]),
        el("span", { class: "line-two" }, job.continues ? "added shift \u00b7 " : "", lines[1]), bar));
  }

  key(event) {
    const { shown } = this.book;
    const page = Math.max(1, Math.floor(this.grid.clientHeight / ROW) - 1);
    const steps = { ArrowDown: 1, ArrowUp: -1, PageDown: page, PageUp: -page, Home: -Infinity, End: Infinity };
    if (event.key in steps) {
      this.active = Math.min(shown.length - 1, Math.max(0, this.active + steps[event.key]));
      const top = this.active * ROW;
      if (top < this.grid.scrollTop) this.grid.scrollTop = top;
      if (top + ROW > this.grid.scrollTop + this.grid.clientHeight) this.grid.scrollTop = top + ROW - this.grid.clientHeight;
    } else if (event.key === "Enter" && shown[this.active]) {
      this.open(shown[this.active].id);
      announce("Job opened.");
    } else return;
    event.preventDefault();
    this.soon();
  }
}
