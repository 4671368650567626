// The model as a cloud of nodes with links: turned, moved and zoomed by mouse, touch and keyboard; a located motion
// drawn on it and set moving on demand.

import { el, svg, announce, reduced_motion, replace, table } from "./dom.js";
import { best_angles, displace, fit, nearest, project, step_of, view_axes } from "./node_scene.js";
import { CAUSES, exact, grouped } from "./words.js";

const LENGTH = 0.11;  // of the model's size: the drawn length of the largest motion
const TURN = Math.PI / 24;

export class NodeView {
  constructor(view, { title = "The model", alarm = 12 } = {}) {
    this.view = view;
    this.top = Math.max(alarm, 1);
    this.place = Float64Array.from(view.place);
    this.moved = new Float64Array(this.place.length);
    this.flat_rest = new Float64Array(this.place.length);
    this.flat_moved = new Float64Array(this.place.length);
    this.length = LENGTH * view.size;
    this.motion = null;
    this.amount = 1;
    this.playing = false;
    this.mode = view.motions.some((motion) => motion.nodes.length) || !view.digits ? "motion" : "digits";
    this.camera = { azimuth: -1, elevation: 0.4, scale: 1, x: 0, y: 0 };
    this.canvas = el("canvas", { class: "scene", tabindex: 0, role: "application", "aria-roledescription": "model view",
      "aria-label": `${title}: ${grouped(view.nodes)} nodes. Arrow keys turn it, shift and arrow keys move it, plus and minus zoom, 0 shows all, space sets the motion going or stops it.` });
    this.tip = el("p", { class: "tip soft", "aria-hidden": "true" }, "\u00a0");
    this.summary = el("p", { class: "soft", role: "status" });
    this.element = el("div", { class: "node-view" }, this.choice(), this.canvas, this.tip, this.controls(), this.summary,
      this.scale = this.scale_of(), this.note = el("p", { class: "soft small-print" }), this.equivalent = el("details", null, el("summary", null, "What moves, as a table"), this.rows = el("div")));
    this.listen();
    this.observer = new ResizeObserver(() => { this.refit(); });
    this.observer.observe(this.canvas);
    this.scheme = matchMedia("(prefers-color-scheme: dark)");
    this.on_scheme = () => { this.colours = null; this.draw(); };
    this.scheme.addEventListener("change", this.on_scheme);
    this.show(Math.max(0, view.motions.findIndex((motion) => motion.nodes.length || motion.marks.length)), false);
  }

  close() {
    this.stop();
    this.observer.disconnect();
    this.scheme.removeEventListener("change", this.on_scheme);
  }

  caption() {
    const { view } = this;
    const parts = this.mode === "digits" ? [] : ["Blue: what moves. Orange and dashed: where it goes; its true size is open. Rings: the nodes ranked first."];
    if (view.cell) parts.push(`Of ${grouped(view.nodes)} nodes ${grouped(view.node.length)} are drawn: all that are named, many of those that move, and one in each cube of ${Number(view.cell.toPrecision(3))}.`);
    if (view.links_left_out) parts.push(`${grouped(view.links_left_out)} links are left out.`);
    return parts.join(" ");
  }

  scale_of() {
    const step = (k) => (this.top * k / 6).toFixed(0);
    return el("p", { class: "scale soft small-print", hidden: true }, [0, 1, 2, 3, 4, 5].map((k) => el("span", null,
      svg("svg", { class: "swatch", viewBox: "0 0 16 12", "aria-hidden": "true" }, svg("rect", { class: `f-${k}`, x: 1, y: 1, width: 14, height: 10 })), `${step(k)} to ${step(k + 1)}`)));
  }

  choice() {
    const options = this.view.motions.map((motion, k) => el("option", { value: k }, `${k + 1}. ${CAUSES[motion.kind] ?? motion.kind}`));
    if (this.view.digits) options.push(el("option", { value: "digits" }, "Decimal digits lost"));
    this.select = el("select", { id: "shown-motion", onchange: () => {
      if (this.select.value === "digits") this.show_digits(); else this.show(Number(this.select.value), true);
    } }, options);
    return options.length ? el("p", { class: "inline" }, el("label", { for: "shown-motion" }, "Shown"), this.select) : null;
  }

  controls() {
    const button = (text, name, act) => el("button", { type: "button", class: "small", "aria-label": name, title: name, onclick: act }, text);
    this.play_button = el("button", { type: "button", class: "small", "aria-pressed": "false", onclick: () => this.toggle() }, "Set it moving");
    this.slider = el("input", { type: "range", min: -100, max: 100, value: 100, id: "amount", "aria-valuetext": "fully out",
      oninput: () => { this.stop(); this.amount = this.slider.value / 100; this.slider.setAttribute("aria-valuetext", `${this.slider.value} %`); this.draw(); } });
    return el("div", { class: "controls" },
      el("div", { class: "tools", role: "group", "aria-label": "Turn and zoom" },
        button("\u2190", "Turn to the left", () => this.turn(-TURN, 0)), button("\u2192", "Turn to the right", () => this.turn(TURN, 0)),
        button("\u2191", "Turn up", () => this.turn(0, TURN)), button("\u2193", "Turn down", () => this.turn(0, -TURN)),
        button("+", "Zoom in", () => this.zoom(1.25)), button("\u2212", "Zoom out", () => this.zoom(0.8)), button("All", "Show all", () => this.home())),
      this.motion_controls = el("div", { class: "tools" }, this.play_button, el("label", { for: "amount" }, "How far it has moved"), this.slider));
  }

  show(k, aloud) {
    this.mode = "motion";
    this.index = k;
    this.motion = this.view.motions[k] ?? null;
    if (!this.motion && this.view.digits) { this.show_digits(); return; }
    if (this.motion) this.select.value = String(k);
    this.motion_controls.hidden = !this.motion?.nodes.length;
    this.scale.hidden = true;
    this.note.textContent = this.caption();
    this.stop();
    this.home();
    this.say_motion(aloud);
  }

  show_digits() {
    this.mode = "digits";
    this.motion = null;
    if (this.select) this.select.value = "digits";
    this.motion_controls.hidden = true;
    this.scale.hidden = false;
    this.note.textContent = this.caption();
    this.stop();
    this.home();
    this.equivalent.hidden = true;
    this.summary.textContent = `Colour: decimal digits lost at each node, in six steps; larger dots lose more.`;
  }

  say_motion(aloud) {
    const { motion, view } = this;
    this.equivalent.hidden = !motion;
    if (!motion) { this.summary.textContent = "Nothing moves here."; return; }
    const name = CAUSES[motion.kind] ?? motion.kind;
    const text = motion.nodes.length ? `${name}: ${grouped(motion.nodes.length)} of the nodes drawn move.`
      : `${name}: no translation of a node belongs to it; rings mark its nodes.`;
    this.summary.textContent = text;
    if (aloud) announce(text);
    const ranked = motion.nodes.map((node, k) => ({ node, u: motion.moved.slice(3 * k, 3 * k + 3) }))
      .sort((a, b) => Math.hypot(...b.u) - Math.hypot(...a.u)).slice(0, 30);
    replace(this.rows, table("Motion of the nodes that move most", ["node", "x", "y", "z"],
      ranked.map(({ node, u }) => [view.node[node], ...u.map(exact)]), 4));
  }

  get width() { return this.canvas.clientWidth || 640; }
  get height() { return this.canvas.clientHeight || 400; }

  /// Everything in sight, from where the motion shows best.
  home() {
    Object.assign(this.camera, best_angles(this.place, this.motion?.moved));
    this.refit();
  }

  refit() {
    const far = displace(this.place, this.motion, this.length, 1, this.moved);
    const both = new Float64Array(2 * far.length);
    both.set(this.place);
    both.set(far, far.length);
    Object.assign(this.camera, fit(both, this.camera, this.width, this.height, Math.min(48, this.width / 9)));
    this.draw();
  }

  turn(azimuth, elevation) {
    this.camera.azimuth += azimuth;
    this.camera.elevation = Math.min(Math.PI / 2, Math.max(-Math.PI / 2, this.camera.elevation + elevation));
    this.draw();
  }

  zoom(factor, x = this.width / 2, y = this.height / 2) {
    const { camera } = this;
    const fx = x - this.width / 2, fy = y - this.height / 2;
    camera.x = fx + (camera.x - fx) * factor;
    camera.y = fy + (camera.y - fy) * factor;
    camera.scale *= factor;
    this.draw();
  }

  shift(x, y) {
    this.camera.x += x;
    this.camera.y += y;
    this.draw();
  }

  listen() {
    const { canvas } = this;
    const pointers = new Map();
    canvas.addEventListener("pointerdown", (event) => {
      canvas.setPointerCapture(event.pointerId);
      pointers.set(event.pointerId, { x: event.offsetX, y: event.offsetY });
    });
    canvas.addEventListener("pointermove", (event) => {
      const last = pointers.get(event.pointerId);
      if (!last) { this.point_at(event.offsetX, event.offsetY); return; }
      const dx = event.offsetX - last.x, dy = event.offsetY - last.y;
      if (pointers.size === 2) {
        const other = [...pointers].find(([id]) => id !== event.pointerId)[1];
        const before = Math.hypot(last.x - other.x, last.y - other.y), after = Math.hypot(event.offsetX - other.x, event.offsetY - other.y);
        this.shift(dx / 2, dy / 2);
        if (before > 0) this.zoom(after / before, (event.offsetX + other.x) / 2, (event.offsetY + other.y) / 2);
      } else if (event.shiftKey || event.buttons === 4) this.shift(dx, dy);
      else this.turn(-dx * 0.008, dy * 0.008);
      pointers.set(event.pointerId, { x: event.offsetX, y: event.offsetY });
    });
    for (const end of ["pointerup", "pointercancel"]) canvas.addEventListener(end, (event) => pointers.delete(event.pointerId));
    canvas.addEventListener("wheel", (event) => {
      event.preventDefault();
      this.zoom(event.deltaY > 0 ? 0.88 : 1.14, event.offsetX, event.offsetY);
    }, { passive: false });
    canvas.addEventListener("keydown", (event) => this.key(event));
  }

  key(event) {
    if (event.ctrlKey || event.metaKey || event.altKey) return;
    const arrows = { ArrowLeft: [-1, 0], ArrowRight: [1, 0], ArrowUp: [0, 1], ArrowDown: [0, -1] };
    const arrow = arrows[event.key];
    if (arrow && event.shiftKey) this.shift(30 * arrow[0], -30 * arrow[1]);
    else if (arrow) this.turn(TURN * arrow[0], TURN * arrow[1]);
    else if (event.key === "+" || event.key === "=") this.zoom(1.25);
    else if (event.key === "-") this.zoom(0.8);
    else if (event.key === "0") this.home();
    else if (event.key === " ") this.toggle();
    else return;
    event.preventDefault();
  }

  point_at(x, y) {
    const k = nearest(this.flat_rest, x, y, 12);
    if (k < 0) { this.tip.textContent = "\u00a0"; return; }
    const place = [0, 1, 2].map((d) => Number((this.view.place[3 * k + d] + this.view.centre[d]).toPrecision(7)));
    const digits = this.view.digits?.[k];
    this.tip.textContent = `Node ${this.view.node[k]} at (${place.join(", ")})`
      + (digits !== null && digits !== undefined ? `, ${digits.toFixed(1)} digits lost` : "");
  }

  toggle() {
    if (!this.motion?.nodes.length) return;
    if (this.playing) { this.stop(); return; }
    if (reduced_motion()) {  // a still picture of the other end instead
      this.amount = this.amount > 0 ? -1 : 1;
      this.slider.value = 100 * this.amount;
      announce(this.amount > 0 ? "Drawn at the one end of the motion." : "Drawn at the other end of the motion.");
      this.draw();
      return;
    }
    this.playing = true;
    this.play_button.textContent = "Stop";
    this.play_button.setAttribute("aria-pressed", "true");
    const begin = performance.now();
    const frame = (now) => {
      if (!this.playing) return;
      if (!this.canvas.isConnected) { this.stop(); return; }
      this.amount = Math.cos((now - begin) / 1000 * 2 * Math.PI / 2.4);
      this.slider.value = 100 * this.amount;
      this.draw();
      this.frames = (this.frames ?? 0) + 1;
      requestAnimationFrame(frame);
    };
    requestAnimationFrame(frame);
  }

  stop() {
    this.playing = false;
    this.play_button.textContent = "Set it moving";
    this.play_button.setAttribute("aria-pressed", "false");
  }

  look() {
    if (this.colours) return this.colours;
    const style = getComputedStyle(this.canvas);
    const of = (name) => style.getPropertyValue(`--${name}`).trim();
    this.colours = { ink: of("ink"), soft: of("soft"), blue: of("blue"), orange: of("orange"), ring: of("ring"), tint: of("tint"),
      steps: [0, 1, 2, 3, 4, 5].map((k) => of(`f${k}`)) };
    return this.colours;
  }

  draw() {
    if (this.queued) return;
    this.queued = true;
    requestAnimationFrame(() => { this.queued = false; this.paint(); });
  }

  paint() {
    const { canvas, view, motion } = this;
    const sharp = Math.min(2, devicePixelRatio || 1), width = this.width, height = this.height;
    if (canvas.width !== Math.round(width * sharp) || canvas.height !== Math.round(height * sharp)) {
      canvas.width = Math.round(width * sharp);
      canvas.height = Math.round(height * sharp);
    }
    const pen = canvas.getContext("2d");
    pen.setTransform(sharp, 0, 0, sharp, 0, 0);
    pen.clearRect(0, 0, width, height);
    const look = this.look();
    const rest = project(this.place, this.camera, width, height, this.flat_rest);
    const many = view.node.length > 4000;
    this.paint_links(pen, rest, look, many);
    if (this.mode === "digits") this.paint_digits(pen, rest, look);
    else this.paint_nodes(pen, rest, look, many);
    if (motion) this.paint_motion(pen, rest, look, width, height);
    this.paint_axes(pen, look, height);
  }

  paint_links(pen, flat, look, many) {
    const { links } = this.view;
    pen.strokeStyle = look.soft;
    pen.lineWidth = many ? 0.6 : 0.9;
    const half = this.view.size / 4;
    for (const [low, high, strength] of [[-Infinity, -half, 0.3], [-half, half, 0.5], [half, Infinity, 0.75]]) {
      pen.globalAlpha = strength;
      pen.beginPath();
      for (let k = 0; k < links.length; k += 2) {
        const a = 3 * links[k], b = 3 * links[k + 1];
        const depth = (flat[a + 2] + flat[b + 2]) / 2;
        if (depth < low || depth >= high) continue;
        pen.moveTo(flat[a], flat[a + 1]);
        pen.lineTo(flat[b], flat[b + 1]);
      }
      pen.stroke();
    }
    pen.globalAlpha = 1;
  }

  paint_nodes(pen, flat, look, many) {
    const size = many ? 1.6 : 2.6, linked = this.view.links.length > 0;
    pen.fillStyle = look.soft;
    const reach = this.view.size / 2;
    for (let k = 0; k < flat.length; k += 3) {
      pen.globalAlpha = (linked ? 0.5 : 0.75) * (0.45 + 0.55 * Math.min(1, Math.max(0, 0.5 + flat[k + 2] / (2 * reach))));
      pen.fillRect(flat[k] - size / 2, flat[k + 1] - size / 2, size, size);
    }
    pen.globalAlpha = 1;
  }

  paint_digits(pen, flat, look) {
    pen.strokeStyle = look.soft;
    pen.lineWidth = 0.7;
    this.view.digits.forEach((digits, k) => {
      if (digits === null) return;
      const step = step_of(digits, this.top), size = (this.view.node.length > 4000 ? 2.2 : 4.6) + step;
      const x = flat[3 * k] - size / 2, y = flat[3 * k + 1] - size / 2;
      pen.fillStyle = look.steps[step];
      pen.fillRect(x, y, size, size);
      if (step < 2) pen.strokeRect(x, y, size, size);
    });
  }

  paint_motion(pen, rest, look, width, height) {
    const { motion, view } = this;
    const out = project(displace(this.place, motion, this.length, this.amount, this.moved), this.camera, width, height, this.flat_moved);
    if (!this.moving || this.moving_of !== motion) {
      this.moving = new Uint8Array(view.node.length);
      for (const node of motion.nodes) this.moving[node] = 1;
      this.moving_of = motion;
    }
    pen.strokeStyle = look.orange;
    pen.lineWidth = 1.2;
    pen.setLineDash([5, 3]);
    pen.beginPath();
    for (let k = 0; k < view.links.length; k += 2) {
      const i = view.links[k], j = view.links[k + 1];
      if (!this.moving[i] && !this.moving[j]) continue;
      pen.moveTo(out[3 * i], out[3 * i + 1]);
      pen.lineTo(out[3 * j], out[3 * j + 1]);
    }
    pen.stroke();
    pen.setLineDash([]);
    const size = motion.nodes.length > 3000 ? 2.2 : 4;
    pen.fillStyle = look.blue;
    for (const node of motion.nodes) pen.fillRect(rest[3 * node] - size / 2, rest[3 * node + 1] - size / 2, size, size);
    pen.fillStyle = look.orange;
    for (const node of motion.nodes) {
      pen.beginPath();
      pen.arc(out[3 * node], out[3 * node + 1], size * 0.55, 0, 2 * Math.PI);
      pen.fill();
    }
    this.paint_paths(pen, rest, out, look);
    this.paint_marks(pen, rest, look, width);
  }

  /// A few lines from where a node rests to where it is, spread over the picture.
  paint_paths(pen, rest, out, look) {
    const taken = [];
    pen.strokeStyle = look.orange;
    pen.lineWidth = 1.8;
    pen.beginPath();
    for (const node of this.motion.nodes) {
      const x = rest[3 * node], y = rest[3 * node + 1];
      if (taken.some(([a, b]) => Math.hypot(a - x, b - y) < 44)) continue;
      taken.push([x, y]);
      pen.moveTo(x, y);
      pen.lineTo(out[3 * node], out[3 * node + 1]);
      if (taken.length === 26) break;
    }
    pen.stroke();
  }

  paint_marks(pen, flat, look, width) {
    pen.font = "600 13px system-ui, 'DejaVu Sans', sans-serif";
    pen.textBaseline = "middle";
    let last = -100;
    for (const node of this.motion.marks.filter((one, k, all) => all.indexOf(one) === k).slice(0, 2)) {
      const x = flat[3 * node], y = flat[3 * node + 1], right = x < width * 0.62;
      let line = y - 16;
      if (Math.abs(line - last) < 16) line = last + 17;
      last = line;
      pen.strokeStyle = look.ring;
      pen.lineWidth = 2.2;
      pen.beginPath();
      pen.arc(x, y, 7, 0, 2 * Math.PI);
      pen.stroke();
      pen.textAlign = right ? "left" : "right";
      pen.lineWidth = 4;
      pen.strokeStyle = look.tint;
      pen.strokeText(String(this.view.node[node]), right ? x + 13 : x - 13, line);
      pen.fillStyle = look.ring;
      pen.fillText(String(this.view.node[node]), right ? x + 13 : x - 13, line);
    }
  }

  paint_axes(pen, look, height) {
    const { right, up } = view_axes(this.camera.azimuth, this.camera.elevation);
    pen.strokeStyle = look.soft;
    pen.fillStyle = look.soft;
    pen.lineWidth = 1.4;
    pen.font = "12px system-ui, 'DejaVu Sans', sans-serif";
    pen.textAlign = "center";
    pen.textBaseline = "middle";
    ["x", "y", "z"].forEach((name, d) => {
      const x = right[d], y = up[d];
      if (Math.hypot(x, y) < 0.12) return;
      pen.beginPath();
      pen.moveTo(34, height - 34);
      pen.lineTo(34 + 20 * x, height - 34 - 20 * y);
      pen.stroke();
      pen.fillText(name, 34 + 28 * x, height - 34 - 28 * y);
    });
  }
}
