// Equations by the decimal digits that double precision loses at them.

import { el, svg, table } from "./dom.js";
import { counted, grouped } from "./words.js";

export function accuracy_verdict(accuracy) {
  if (accuracy.largest >= accuracy.alarm) return "in alarm";
  return accuracy.largest >= accuracy.attention ? "deserves attention" : "nothing to report";
}

export function histogram(accuracy) {
  const width = 640, height = 220, left = 14, base = 176, top = 30;
  const digits = Math.max(accuracy.alarm + 1, accuracy.largest + 0.5, 4);
  const unit = (width - 2 * left) / digits;
  const most = Math.max(1, ...accuracy.histogram.map((bin) => bin.equations));
  const parts = [];
  for (const bin of accuracy.histogram) {
    if (bin.equations === 0) continue;
    const tall = Math.max(2, (base - top) * bin.equations / most);
    const kind = bin.from >= accuracy.alarm ? "bar bar-alarm" : bin.from >= accuracy.attention ? "bar bar-heed" : "bar";
    const x = left + unit * bin.from + 1;
    parts.push(svg("rect", { class: kind, x, y: base - tall, width: Math.max(1, unit / 2 - 2), height: tall },
      svg("title", null, `${bin.from} to ${bin.from + 0.5} digits: ${counted(bin.equations, "equation")}`)),
    svg("text", { class: "small-text", x: left + unit * (bin.from + 0.25), y: base - tall - 4, "text-anchor": "middle" }, grouped(bin.equations)));
  }
  parts.push(svg("path", { class: "axis", d: `M${left} ${base}H${width - left}` }));
  for (let d = 0; d <= digits; d += 2) {
    parts.push(svg("text", { x: left + unit * d, y: base + 17, "text-anchor": "middle" }, d));
  }
  for (const [at, name] of [[accuracy.attention, "attention"], [accuracy.alarm, "alarm"]]) {
    parts.push(svg("path", { class: "level", d: `M${left + unit * at} ${base}V${top - 12}` }),
      svg("text", { class: "small-text", x: left + unit * at + 4, y: top - 4 }, name));
  }
  parts.push(svg("text", { class: "small-text", x: width / 2, y: base + 37, "text-anchor": "middle" }, "decimal digits lost, of 16"));
  return el("figure", { class: "figure" },
    el("p", null, `Typical ${accuracy.typical.toFixed(1)}, at most ${accuracy.largest.toFixed(1)} digits: ${accuracy_verdict(accuracy)}. `
      + `Attention from ${accuracy.attention}, alarm from ${accuracy.alarm} digits (common practice, no source).`),
    svg("svg", { class: "plot histogram", viewBox: `0 0 ${width} ${height}`, role: "img", "aria-label": "Equations by digits lost; the table below says the same" }, parts),
    el("details", null, el("summary", null, "The histogram and the weakest places as tables"),
      table("Equations by digits lost", ["from", "to", "equations"], accuracy.histogram.filter((bin) => bin.equations > 0)
        .map((bin) => [bin.from, bin.from + 0.5, grouped(bin.equations)]), 3),
      table("Where most digits are lost", ["node", "dof", "digits lost"], accuracy.worst.slice(0, 20)
        .map((one) => [one.node ?? "-", one.dof, one.digits.toFixed(1)]))));
}
