// A chart over one axis of shifts: zoom by wheel, drag and keys, ticks, a point in focus. What stands in it is drawn
// by whoever makes one.

import { el, svg, announce } from "./dom.js";
import { grouped } from "./words.js";

/// 1, 2 or 5 times a power of ten, so that about `many` of them span `range`.
export function tick_step(range, many) {
  const raw = range / many;
  const power = 10 ** Math.floor(Math.log10(raw));
  const part = raw / power;
  return power * (part <= 1 ? 1 : part <= 2 ? 2 : part <= 5 ? 5 : 10);
}

export function ticks(low, high, many) {
  const step = tick_step(high - low, many);
  const list = [];
  for (let k = Math.ceil(low / step - 1e-9); k * step <= high + step * 1e-9 && list.length < 100; k += 1) list.push(k * step);
  return { step, list };
}

/// `value` with as many digits as `step` has.
export function tick_text(value, step) {
  const digits = Math.max(0, -Math.floor(Math.log10(step) + 1e-9));
  if (digits > 8 || Math.abs(value) >= 1e7) return Number(value.toPrecision(6)).toString();
  if (digits === 0) return grouped(value).replace(/^-0$/, "0");
  return value.toFixed(digits).replace(/^-(0(\.0*)?)$/, "$1");
}

/// As many ticks as their labels leave room for over `pixels`, and on a wide axis not more than one in 110.
export function ticks_with_room(low, high, pixels) {
  const letter = 7.5, gap = 16;
  const most = Math.max(6, Math.floor(pixels / 110));
  for (let many = most; many > 2; many -= 1) {
    const found = ticks(low, high, many);
    const widest = Math.max(...found.list.map((at) => tick_text(at, found.step).length));
    if (found.step / (high - low) * pixels >= widest * letter + gap) return found;
  }
  return ticks(low, high, 2);
}

/// A number between the neighbouring pixels, as short as it can be.
export function short_value(value, pixel) {
  const step = tick_step(pixel, 1);
  const near = Math.round(value / step) * step;
  return Number(near.toPrecision(12));
}

/// Words in lines of at most `most` letters.
export function lines_of(text, most) {
  const lines = [""];
  for (const word of text.split(" ")) {
    const last = lines.length - 1;
    if (lines[last] && lines[last].length + 1 + word.length > most) lines.push(word);
    else lines[last] += (lines[last] ? " " : "") + word;
  }
  return lines;
}

/// Where a window [low, high] comes to lie, zoomed by `factor` about `at`, within `all`, no narrower than doubles tell apart.
export function zoomed([low, high], at, factor, [first, last]) {
  const least = Math.max(Math.abs(first), Math.abs(last), 1e-300) * 1e-13;
  const span = Math.min(last - first, Math.max(least, (high - low) * factor));
  const share = high > low ? (at - low) / (high - low) : 0.5;
  let start = at - share * span;
  start = Math.min(Math.max(start, first), last - span);
  return [start, start + span];
}

export class AxisChart {
  /// options: label, axis (text below), all [low, high], height, items() in order with {at, say()}, draw(chart), card(item) -> element,
  /// on_axis_click(value) or null
  constructor(options) {
    Object.assign(this, { height: 340, left: 58, right: 18, top: 18, bottom: 76 }, options);
    this.window = [...this.all];
    this.chosen = -1;
    this.canvas = svg("svg", { class: "plot", "aria-hidden": "true", focusable: "false" });
    this.place = el("div", { class: "chart", tabindex: 0, role: "application", "aria-roledescription": "chart",
      "aria-label": `${this.label}. Left and right arrow go through it, plus and minus zoom, 0 shows all.` }, this.canvas);
    this.note = el("div", { class: "card-place" }, el("p", { class: "soft small-print" }, "Point at it, or go through it with the arrow keys, to see what backs each. The wheel, a drag, plus and minus zoom and move."));
    const tool = (text, name, act) => el("button", { type: "button", class: "small", "aria-label": name, title: name, onclick: act }, text);
    this.tools = el("div", { class: "tools", role: "group", "aria-label": "Zoom" },
      tool("+", "Zoom in", () => this.zoom(0.5)), tool("\u2212", "Zoom out", () => this.zoom(2)),
      tool("All", "Show all", () => this.show_all()));
    this.element = el("div", { class: "chart-box" }, this.tools, this.place, this.note);
    this.listen();
    this.observer = new ResizeObserver(() => this.redraw());
    this.observer.observe(this.place);
  }

  get width() { return Math.max(240, this.place.clientWidth || 640); }
  x(value) { return this.left + (value - this.window[0]) / (this.window[1] - this.window[0]) * (this.width - this.left - this.right); }
  value(x) { return this.window[0] + (x - this.left) / (this.width - this.left - this.right) * (this.window[1] - this.window[0]); }
  get base() { return this.height - this.bottom; }
  get pixel() { return (this.window[1] - this.window[0]) / (this.width - this.left - this.right); }

  listen() {
    const at = (event) => event.clientX - this.place.getBoundingClientRect().left;
    const down_at = (event) => event.clientY - this.place.getBoundingClientRect().top;
    this.place.addEventListener("wheel", (event) => {
      if (!event.deltaY) return;
      event.preventDefault();
      this.zoom(event.deltaY > 0 ? 1.25 : 0.8, this.value(at(event)));
    }, { passive: false });
    let drag = null;
    this.place.addEventListener("pointerdown", (event) => {
      if (event.button !== 0) return;
      drag = { x: at(event), window: [...this.window], moved: false };
      this.place.setPointerCapture(event.pointerId);
    });
    this.place.addEventListener("pointermove", (event) => {
      if (drag && (drag.moved || Math.abs(at(event) - drag.x) > 4)) {
        drag.moved = true;
        this.place.classList.add("dragging");
        const move = (drag.x - at(event)) * (drag.window[1] - drag.window[0]) / (this.width - this.left - this.right);
        const span = drag.window[1] - drag.window[0];
        const start = Math.min(Math.max(drag.window[0] + move, this.all[0]), this.all[1] - span);
        this.window = [start, start + span];
        this.redraw();
        return;
      }
      this.hover(at(event), down_at(event));
    });
    this.place.addEventListener("pointerup", (event) => {
      this.place.classList.remove("dragging");
      const clicked = drag && !drag.moved;
      drag = null;
      if (clicked && this.on_axis_click && down_at(event) > this.base + 2) {
        this.on_axis_click(short_value(this.value(at(event)), this.pixel));
      }
    });
    this.place.addEventListener("pointercancel", () => { drag = null; });
    this.place.addEventListener("pointerleave", () => { this.ghost = null; this.redraw(); });
    this.place.addEventListener("keydown", (event) => this.key(event));
    this.place.addEventListener("focus", () => { if (this.chosen < 0 && this.items().length) this.choose(0, false); });
  }

  hover(x, y) {
    const ghost = this.on_axis_click && y > this.base + 2 && x >= this.left && x <= this.width - this.right
      ? short_value(this.value(x), this.pixel) : null;
    const list = this.items();
    let nearest = -1, distance = 14;
    if (ghost === null) {
      list.forEach((item, k) => {
        const off = Math.hypot(this.x(item.at) - x, Math.max(0, Math.abs((item.y?.() ?? y) - y) - 60));
        if (off < distance) { distance = off; nearest = k; }
      });
    }
    if (ghost === this.ghost && (nearest < 0 || nearest === this.chosen)) return;
    this.ghost = ghost;
    if (nearest >= 0) this.choose(nearest, false); else this.redraw();
  }

  key(event) {
    const list = this.items();
    const moves = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1 };
    let done = true;
    if (event.ctrlKey || event.metaKey || event.altKey) return;
    if (moves[event.key] && list.length) this.choose(Math.min(list.length - 1, Math.max(0, this.chosen + moves[event.key])), true);
    else if (event.key === "Home" && list.length) this.choose(0, true);
    else if (event.key === "End" && list.length) this.choose(list.length - 1, true);
    else if (event.key === "+" || event.key === "=") this.zoom(0.5);
    else if (event.key === "-") this.zoom(2);
    else if (event.key === "0") this.show_all();
    else done = false;
    if (done) event.preventDefault();
  }

  zoom(factor, about = null) {
    const chosen = this.items()[this.chosen];
    const inside = chosen && chosen.at >= this.window[0] && chosen.at <= this.window[1];
    const at = about ?? (inside ? chosen.at : (this.window[0] + this.window[1]) / 2);
    this.window = zoomed(this.window, at, factor, this.all);
    this.redraw();
  }

  show_all() {
    this.window = [...this.all];
    this.redraw();
  }

  /// The whole range has grown: a window that showed all of it goes on doing so.
  set_all(all) {
    const whole = this.window[0] === this.all[0] && this.window[1] === this.all[1];
    this.all = all;
    if (whole) this.window = [...all];
    this.redraw();
  }

  choose(k, aloud) {
    this.chosen = k;
    const item = this.items()[k];
    if (!item) return;
    if (item.at < this.window[0] || item.at > this.window[1]) {
      const span = this.window[1] - this.window[0];
      const start = Math.min(Math.max(item.at - span / 2, this.all[0]), this.all[1] - span);
      this.window = [start, start + span];
    }
    this.note.replaceChildren(this.card(item));
    if (aloud) announce(item.say());
    this.redraw();
  }

  text(x, y, words, attributes = {}) { return svg("text", { x, y, ...attributes }, words); }
  path(d, kind) { return svg("path", { d, class: kind }); }

  redraw() {
    this.canvas.setAttribute("viewBox", `0 0 ${this.width} ${this.height}`);
    this.canvas.setAttribute("width", this.width);
    this.canvas.setAttribute("height", this.height);
    const parts = [];
    const { step, list } = ticks_with_room(...this.window, this.width - this.left - this.right);
    parts.push(svg("rect", { class: "strip", x: this.left, y: this.base, width: this.width - this.left - this.right, height: 34 }));
    for (const at of list) {
      const x = this.x(at);
      parts.push(this.path(`M${x} ${this.base}v6`, "axis"), this.text(x, this.base + 22, tick_text(at, step), { "text-anchor": "middle" }));
    }
    lines_of(this.axis, (this.width - this.left - this.right) / 6.4).forEach((line, k) => parts.push(
      this.text((this.left + this.width - this.right) / 2, this.base + 52 + 16 * k, line, { "text-anchor": "middle", class: "small-text" })));
    parts.push(svg("svg", { x: 0, y: 0, width: this.width, height: this.height }, this.draw(this)));
    parts.push(this.path(`M${this.left} ${this.base}H${this.width - this.right}`, "axis"));
    if (this.ghost !== null && this.ghost !== undefined) {
      const x = this.x(this.ghost);
      const side = x > this.width - 140 ? "end" : "start";
      parts.push(this.path(`M${x} ${this.top}V${this.base + 8}`, "ghost"),
        this.text(x + (side === "end" ? -6 : 6), this.top + 10, `count at ${this.ghost}`, { "text-anchor": side, class: "ghost-text" }));
    }
    this.canvas.replaceChildren(...parts.flat(Infinity).filter(Boolean));
  }
}
