// Elements made by name. Text is always set as text, never parsed as markup.

const SVG = "http://www.w3.org/2000/svg";

function fill(element, attributes, children) {
  for (const [name, value] of Object.entries(attributes ?? {})) {
    if (value === null || value === undefined || value === false) continue;
    if (name.startsWith("on")) element.addEventListener(name.slice(2), value);
    else if (value === true) element.setAttribute(name, "");
    else element.setAttribute(name, String(value));
  }
  add(element, children);
  return element;
}

export function add(element, children) {
  for (const child of children.flat(Infinity)) {
    if (child === null || child === undefined || child === false) continue;
    element.append(child instanceof Node ? child : document.createTextNode(String(child)));
  }
  return element;
}

/// el("a", {href: "#/", onclick: f}, "text", other elements)
export function el(tag, attributes, ...children) {
  return fill(document.createElement(tag), attributes, children);
}

export function svg(tag, attributes, ...children) {
  return fill(document.createElementNS(SVG, tag), attributes, children);
}

export function replace(element, ...children) {
  element.replaceChildren();
  return add(element, children);
}

let used = 0;
/// An id that nothing else on the page has.
export function fresh_id(stem) {
  used += 1;
  return `${stem}-${used}`;
}

/// A table with a caption; cells are texts or elements, `right` the number of leading columns set to the right.
export function table(caption, head, rows, right = 0) {
  const side = (k) => (k < right ? { class: "right" } : {});
  return el("div", { class: "scroll", tabindex: 0, role: "group", "aria-label": caption },
    el("table", null, el("caption", { class: "unseen" }, caption),
      el("thead", null, el("tr", null, head.map((text, k) => el("th", { scope: "col", ...side(k) }, text)))),
      el("tbody", null, rows.map((row) => el("tr", null, row.map((cell, k) => el("td", side(k), cell)))))));
}

/// Label and text, one below the other.
export function facts(rows) {
  return el("dl", null, rows.filter(Boolean).map(([label, ...text]) => [el("dt", null, label), el("dd", null, text)]));
}

/// A titled part of a job's view; nothing when there is nothing to show.
export function band(title, ...body) {
  const content = body.flat(Infinity).filter(Boolean);
  if (content.length === 0) return null;
  const id = fresh_id("band");
  return el("section", { class: "band", role: "group", "aria-labelledby": id }, el("h2", { id }, title), el("div", { class: "inside" }, content));
}

/// Says it to screen readers without moving anything on the screen.
export function announce(text) {
  const place = document.getElementById("announce");
  place.textContent = "";
  setTimeout(() => { place.textContent = text; }, 30);
}

export const reduced_motion = () => matchMedia("(prefers-reduced-motion: reduce)").matches;
