// Proved intervals as bars over the axis: as high as their multiplicity, as wide as the interval once that can be seen.

import { el, svg, facts, table } from "./dom.js";
import { AxisChart } from "./axis_chart.js";
import { backing, exact, rounded } from "./words.js";

export function bracket_sentence(value) {
  return `${value.multiplicity === 1 ? "One value" : `${value.multiplicity} values`} between ${exact(value.low)} and ${exact(value.high)}`;
}

function relative_width(value) {
  const size = Math.max(Math.abs(value.low), Math.abs(value.high));
  return size > 0 ? (value.high - value.low) / size : value.high - value.low;
}

export class Brackets {
  constructor(critical, complete, axis) {
    this.critical = critical;
    this.complete = complete;
    const ends = critical.flatMap((value) => [value.low, value.high]);
    if (complete) ends.push(complete.from, complete.to);
    let low = Math.min(...ends), high = Math.max(...ends);
    if (!(high > low)) { low -= 1; high += 1; }
    const rim = (high - low) * 0.04;
    this.most = Math.max(1, ...critical.map((value) => value.multiplicity));
    this.chart = new AxisChart({
      label: `Brackets: ${critical.length} intervals`, axis, all: [low - rim, high + rim], height: 250,
      items: () => critical.map((value) => ({ at: value.value, value, say: () => bracket_sentence(value) })),
      draw: (chart) => this.draw(chart), card: (item) => this.card(item.value), on_axis_click: null,
    });
    const hertz = critical.some((value) => value.hertz !== null && value.hertz !== undefined);
    const head = ["value", "low", "high", "times", "backed by"];
    if (hertz) head.splice(3, 0, "hertz");
    this.element = el("figure", { class: "figure" }, this.chart.element,
      el("figcaption", { class: "legend" }, "Each bar is a proved interval, as high as the number of values in it. Zoom in to see its width.",
        complete ? ` The line below the bars is the range in which no other value exists.` : ""),
      el("details", { open: critical.length <= 24 }, el("summary", null, "The brackets as a table"),
        table("Brackets", head, critical.map((value) => {
          const row = [exact(Number(value.value.toPrecision(11))), exact(value.low), exact(value.high), value.multiplicity,
            backing(value.level, value.failure_probability) + (value.rigid_body ? "; rigid body" : "")];
          if (hertz) row.splice(3, 0, this.hertz(value));
          return row;
        }), hertz ? 5 : 4)));
  }

  hertz(value) {
    return value.hertz ? exact(Number(value.hertz.value.toPrecision(10))) : "";
  }

  card(value) {
    return el("div", { class: "card" },
      el("p", { class: "card-title" }, el("strong", null, exact(Number(value.value.toPrecision(11)))), value.multiplicity > 1 ? `, ${value.multiplicity} times` : ""),
      facts([["certainly in", `[${exact(value.low)}, ${exact(value.high)}]`], ["relative width", rounded(relative_width(value))],
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
      const low = chart.x(value.low), high = chart.x(value.high);
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
