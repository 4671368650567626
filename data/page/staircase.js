// The staircase of counts: every certified count, what lies between them, and shifts added by hand.

import { el, svg, facts, table, announce } from "./dom.js";
import { AxisChart, tick_step } from "./axis_chart.js";
import { backing, certificate_in_words, count_sentence, exact, grouped, rounded } from "./words.js";

/// Counts from several answers as one list by ascending shift; of two at one shift the better backed stays.
export function merge_counts(lists) {
  const rank = { none: 0, statistical: 1, proved: 2 };
  const at = new Map();
  for (const list of lists) {
    for (const count of list) {
      const known = at.get(count.shift);
      if (!known || rank[count.level] > rank[known.level]) at.set(count.shift, count);
    }
  }
  return [...at.values()].sort((a, b) => a.shift - b.shift);
}

/// Neighbouring known counts as steps {low, high, from, to}; level where from = to.
export function steps_of(counts) {
  const known = counts.filter((count) => count.below !== null && count.below !== undefined);
  const steps = [];
  for (let k = 1; k < known.length; k += 1) {
    steps.push({ low: known[k - 1].shift, high: known[k].shift, from: known[k - 1].below, to: known[k].below });
  }
  return steps;
}

/// Neighbours on one side of zero that cannot both be true where counts cannot fall as |shift| grows. A count that
/// says nothing about shifts near its own is held to what lies beyond those.
export function falls_of(counts, meaning) {
  if (!/^critical factors/.test(meaning ?? "")) return [];
  const known = counts.filter((count) => count.below !== null && count.below !== undefined && count.level !== "none");
  const falls = [];
  for (let k = 1; k < known.length; k += 1) {
    const [a, b] = [known[k - 1], known[k]];
    if ((a.holds_outside?.[1] ?? a.shift) > (b.holds_outside?.[0] ?? b.shift)) continue;
    if ((a.shift >= 0 && b.below < a.below) || (b.shift <= 0 && b.below > a.below)) {
      falls.push({ low: a.shift, high: b.shift, from: a.below, to: b.below });
    }
  }
  return falls;
}

function range_of(counts, pending) {
  const at = [...counts.map((count) => count.shift), ...pending];
  let low = Math.min(...at), high = Math.max(...at);
  if (!(high > low)) { low -= Math.abs(low) * 0.1 || 1; high += Math.abs(high) * 0.1 || 1; }
  const rim = (high - low) * 0.04;
  return [low - rim, high + rim];
}

function point(x, y, count, chosen) {
  const shape = count.below === null || count.below === undefined || count.level === "none"
    ? svg("rect", { class: "dot open-dot", x: x - 4, y: y - 4, width: 8, height: 8 })
    : count.level === "proved" ? svg("circle", { class: "dot", cx: x, cy: y, r: 4.5 })
      : svg("path", { class: "dot", d: `M${x} ${y - 6}l6 6l-6 6l-6-6z` });
  return [count.added ? svg("circle", { class: "added", cx: x, cy: y, r: 8.5 }) : null,
    chosen ? svg("circle", { class: "chosen", cx: x, cy: y, r: 12 }) : null, shape];
}

export class Staircase {
  /// on_add(shift): somebody asks for a count there; null where none can be asked.
  constructor(counts, { axis, meaning, on_add }) {
    this.own = counts;
    this.added = [];
    this.pending = new Set();
    this.meaning = meaning;
    this.counts = counts;
    this.chart = new AxisChart({
      label: `Staircase of counts: ${meaning}`, axis, all: range_of(counts, []),
      items: () => this.items(), draw: (chart) => this.draw(chart), card: (item) => this.card(item.count),
      on_axis_click: on_add ? (shift) => this.ask(shift) : null,
    });
    this.on_add = on_add;
    this.waiting = el("p", { class: "soft waiting", role: "status" });
    this.warning = el("div");
    this.rows = el("div");
    this.element = el("figure", { class: "figure" }, this.chart.element, this.legend(), on_add ? this.form() : null,
      this.waiting, this.warning, el("details", null, el("summary", null, "The counts as a table"), this.rows));
    this.update();
  }

  form() {
    this.field = el("input", { type: "text", inputmode: "decimal", size: 12, autocomplete: "off", id: "add-shift" });
    return el("form", { class: "inline", onsubmit: (event) => {
      event.preventDefault();
      const shift = Number(this.field.value.trim().replace(",", "."));
      const bad = this.field.value.trim() === "" || !Number.isFinite(shift);
      this.field.setAttribute("aria-invalid", bad);
      if (bad) { announce("That is no number."); this.field.focus(); return; }
      this.field.value = "";
      this.ask(shift);
    } }, el("label", { for: "add-shift" }, "Count at another shift"), this.field,
    el("button", { type: "submit" }, "Count there"),
    el("span", { class: "soft" }, "or click on the axis below the steps"));
  }

  legend() {
    const entry = (shape, text) => el("span", null, svg("svg", { class: "key", viewBox: "0 0 26 26", "aria-hidden": "true" }, shape), text);
    return el("figcaption", { class: "legend" },
      entry(point(13, 13, { below: 1, level: "proved" }), "proved"),
      entry(point(13, 13, { below: 1, level: "statistical" }), "statistical"),
      entry(point(13, 13, { below: null, level: "none" }), "only a range is known"),
      entry(point(13, 13, { below: 1, level: "proved", added: true }), "added"),
      entry(svg("rect", { class: "jump", x: 3, y: 5, width: 20, height: 16 }), "the count jumps somewhere in there"));
  }

  ask(shift) {
    if (this.counts.some((count) => count.shift === shift) || this.pending.has(shift)) {
      announce("This shift is there already.");
      return;
    }
    this.pending.add(shift);
    this.update();
    announce(`A count at ${exact(shift)} is asked for.`);
    this.on_add(shift);
  }

  /// Counts that another answer brought.
  join(counts, aloud = true) {
    this.added.push(...counts.map((count) => ({ ...count, added: true })));
    for (const count of counts) {
      this.pending.delete(count.shift);
      if (aloud) announce(`Added: ${count_sentence(count)}`);
    }
    this.update();
    if (aloud && counts.length) {
      this.chart.choose(this.counts.findIndex((count) => count.shift === counts[0].shift), false);
    }
  }

  drop(shift) {
    this.pending.delete(shift);
    this.update();
  }

  update() {
    this.counts = merge_counts([this.own, this.added]);
    this.chart.set_all(range_of(this.counts, [...this.pending]));
    const waiting = [...this.pending].map(exact).join(", ");
    this.waiting.textContent = waiting ? `Being counted: ${waiting}` : "";
    const falls = falls_of(this.counts, this.meaning);
    this.warning.replaceChildren(...falls.map((step) => el("p", { class: "problem" },
      `Contradiction: ${step.from} at ${exact(step.low)} but ${step.to} at ${exact(step.high)}. Counts of a definite K cannot fall; report this.`)));
    this.rows.replaceChildren(table("Counts by shift", ["shift", "count", "backed by", "means"], this.counts.map((count) => [
      exact(count.shift), count.below ?? `${count.below_range[0]} to ${count.below_range[1]}`,
      backing(count.level, count.failure_probability), count.meaning + (count.added ? " (added)" : "")]), 2));
  }

  items() {
    return this.counts.map((count) => ({ at: count.shift, count, say: () => count_sentence(count), y: () => this.y(count) }));
  }

  get most() { return Math.max(1, ...this.counts.map((count) => count.below ?? count.below_range[1])); }
  height_of(value) { return this.chart.base - value / this.most * (this.chart.base - this.chart.top - 14); }
  y(count) { return this.height_of(count.below ?? count.below_range[0]); }

  card(count) {
    return el("div", { class: "card" },
      el("p", { class: "card-title" }, el("strong", null, count.below ?? `${count.below_range[0]} to ${count.below_range[1]}`), ` at ${exact(count.shift)}`),
      facts([["means", count.meaning],
        ...certificate_in_words(count.certificate ?? count),
        count.holds_outside ? ["says nothing about", `shifts between ${exact(count.holds_outside[0])} and ${exact(count.holds_outside[1])}`] : null,
        count.no_eigenvalue_within ? ["no value within", `${rounded(count.no_eigenvalue_within)} of the shift`] : null]));
  }

  draw(chart) {
    const parts = [];
    const right = chart.width - chart.right;
    const step = Math.max(1, tick_step(this.most, 6));
    for (let level = 0; level <= this.most; level += step) {
      const y = this.height_of(level);
      parts.push(chart.path(`M${chart.left} ${y}H${right}`, "grid"), chart.text(chart.left - 8, y + 4, grouped(level), { "text-anchor": "end" }));
    }
    parts.push(chart.text(chart.left - 8, 12, "count", { "text-anchor": "end", class: "small-text" }));
    const inner = [];
    for (const one of steps_of(this.counts)) {
      const a = chart.x(one.low), b = chart.x(one.high);
      if (b < chart.left - 20 || a > right + 20) continue;
      if (one.from === one.to) { inner.push(chart.path(`M${a} ${this.height_of(one.from)}H${b}`, "step")); continue; }
      const y = this.height_of(Math.max(one.from, one.to));
      inner.push(svg("rect", { class: "jump", x: a, y, width: Math.max(1.5, b - a), height: this.height_of(Math.min(one.from, one.to)) - y }));
    }
    for (const shift of this.pending) inner.push(chart.path(`M${chart.x(shift)} ${chart.top}V${chart.base}`, "pending"));
    this.counts.forEach((count, k) => {
      const x = chart.x(count.shift);
      if (x < chart.left - 14 || x > right + 14) return;
      if (count.below === null || count.below === undefined) {
        inner.push(chart.path(`M${x} ${this.height_of(count.below_range[0])}V${this.height_of(count.below_range[1])}`, "span"));
      }
      inner.push(point(x, this.y(count), count, k === chart.chosen));
    });
    parts.push(svg("svg", { x: chart.left - 14, y: 0, width: right - chart.left + 28, height: chart.height,
      viewBox: `${chart.left - 14} 0 ${right - chart.left + 28} ${chart.height}` }, inner.flat(Infinity).filter(Boolean)));
    return parts;
  }
}
