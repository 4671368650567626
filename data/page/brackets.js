// Proved intervals as bars over the axis: as high as their multiplicity, as wide as the interval once that can be seen.

import { el, svg, facts, table } from "./dom.js";
import { AxisChart } from "./axis_chart.js";
import { backing, exact, rounded } from "./words.js";

const short = (number) => exact(Number(number.toPrecision(11)));

export function bracket_sentence(value, hertz = false) {
  const { low, high } = hertz ? value.hertz : value;
  return `${value.multiplicity === 1 ? "One value" : `${value.multiplicity} values`} between ${exact(low)} and ${exact(high)}${hertz ? " hertz" : ""}`;
}

function relative_width(value) {
  const size = Math.max(Math.abs(value.low), Math.abs(value.high));
  return size > 0 ? (value.high - value.low) / size : value.high - value.low;
}

/// Frequencies where hertz were asked, values of the pencil otherwise: {value, low, high} as they are drawn.
function drawn(value, hertz) {
  return hertz ? value.hertz : value;
}

export class Brackets {
  constructor(critical, complete, axis) {
    this.critical = critical;
    this.hertz = critical.length > 0 && critical.every((value) => value.hertz);
    const hertz_of = (s) => Math.sign(s) * Math.sqrt(Math.abs(s)) / (2 * Math.PI);
    this.complete = complete && this.hertz ? { from: hertz_of(complete.from), to: hertz_of(complete.to) } : complete;
    const ends = critical.flatMap((value) => [drawn(value, this.hertz).low, drawn(value, this.hertz).high]);
    if (this.complete) ends.push(this.complete.from, this.complete.to);
    let low = Math.min(...ends), high = Math.max(...ends);
    if (!(high > low)) { low -= 1; high += 1; }
    const rim = (high - low) * 0.04;
    this.most = Math.max(1, ...critical.map((value) => value.multiplicity));
    this.chart = new AxisChart({
      label: `Brackets: ${critical.length} intervals`, axis: this.hertz ? "frequency in hertz" : axis, all: [low - rim, high + rim], height: 250,
      items: () => critical.map((value) => ({ at: drawn(value, this.hertz).value, value, say: () => bracket_sentence(value, this.hertz) })),
      draw: (chart) => this.draw(chart), card: (item) => this.card(item.value), on_axis_click: null,
    });
    this.element = el("figure", { class: "figure" }, this.chart.element,
      el("figcaption", { class: "legend" }, "Each bar is a proved interval, as high as the number of values in it. Zoom in to see its width.",
        complete ? " The line below the bars is the range in which no other value exists." : ""),
      el("details", { open: critical.length <= 24 }, el("summary", null, "The brackets as a table"), this.table()));
  }

  table() {
    const head = this.hertz ? ["hertz", "low", "high", "times", "s", "backed by"] : ["value", "low", "high", "times", "backed by"];
    return table("Brackets", head, this.critical.map((value) => {
      const { value: middle, low, high } = drawn(value, this.hertz);
      const backed = backing(value.level, value.failure_probability) + (value.rigid_body ? "; rigid body" : "");
      const row = [short(middle), exact(low), exact(high), value.multiplicity];
      return this.hertz ? [...row, short(value.value), backed] : [...row, backed];
    }), head.length - 1);
  }

  card(value) {
    const { value: middle, low, high } = drawn(value, this.hertz);
    return el("div", { class: "card" },
      el("p", { class: "card-title" }, el("strong", null, `${short(middle)}${this.hertz ? " Hz" : ""}`), value.multiplicity > 1 ? `, ${value.multiplicity} times` : ""),
      facts([["certainly in", `[${exact(low)}, ${exact(high)}]`], this.hertz ? ["s in", `[${exact(value.low)}, ${exact(value.high)}]`] : null,
        ["relative width", rounded(relative_width(value))],
        ["backed by", `${backing(value.level, value.failure_probability)}, from ${value.proof === "residual" ? "residuals and counts" : "counts"}`]]));
  }

  draw(chart) {
    const right = chart.width - chart.right, floor = chart.base - 14;
    const parts = [];
    if (this.complete) {
      const a = Math.max(chart.left, chart.x(this.complete.from)), b = Math.min(right, chart.x(this.complete.to));
      if (b > a) parts.push(chart.path(`M${a} ${chart.base - 9}v6M${a} ${chart.base - 6}H${b}M${b} ${chart.base - 9}v6`, "complete"));
    }
    this.critical.forEach((value, k) => {
      const ends = drawn(value, this.hertz);
      const low = chart.x(ends.low), high = chart.x(ends.high);
      if (high < chart.left || low > right) return;
      const width = Math.max(5, high - low), middle = (low + high) / 2;
      const tall = value.multiplicity / this.most * (floor - chart.top - 18);
      parts.push(svg("rect", { class: `bar ${value.level === "proved" ? "" : "bar-statistical"}`, x: middle - width / 2, y: floor - tall, width, height: tall }));
      if (k === chart.chosen) parts.push(svg("rect", { class: "chosen", x: middle - width / 2 - 4, y: floor - tall - 4, width: width + 8, height: tall + 8, rx: 3 }));
      if (value.multiplicity > 1) parts.push(chart.text(middle, floor - tall - 6, `${value.multiplicity}\u00d7`, { "text-anchor": "middle", class: "small-text" }));
    });
    return parts;
  }
}
