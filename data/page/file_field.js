// One input of a question: a path under the roots, typed or browsed, or a file dropped and sent to the server.

import { el, announce, fresh_id, replace } from "./dom.js";
import { problem_box } from "./problem.js";
import { bytes } from "./words.js";

/// A dialog that walks through the folders under the roots; settles with a path, or null.
export function browse(api, from) {
  return new Promise((settle) => {
    let chosen = null;
    const place = el("p", { class: "soft place" });
    const list = el("ul", { class: "files", "aria-label": "Files and folders" });
    const dialog = el("dialog", { "aria-label": "Choose a file on the server" }, el("h2", null, "Choose a file on the server"), place, list,
      el("p", { class: "actions" }, el("button", { type: "button", onclick: () => dialog.close() }, "Cancel")));
    const go = async (path, focus) => {
      try {
        const folder = await api.files(path);
        place.textContent = folder.path ? `In ${folder.path}` : "The roots that the server was given";
        const entry = (one, act) => el("li", null, el("button", { type: "button", class: "file", onclick: act },
          el("span", { class: "file-kind", "aria-hidden": "true" }, one.kind === "folder" ? "\u25b8" : "\u00b7"), el("span", null, one.name, one.kind === "folder" ? el("span", { class: "unseen" }, ", folder") : ""),
          el("span", { class: "soft" }, one.bytes !== null && one.bytes !== undefined ? bytes(one.bytes) : "")));
        const rows = folder.entries.map((one) => entry(one, () => {
          if (one.kind === "folder") { go(one.path, true); return; }
          chosen = one.path;
          dialog.close();
        }));
        if (folder.path) rows.unshift(entry({ name: "one folder up", kind: "folder" }, () => go(folder.parent ?? "", true)));
        if (rows.length === 0) rows.push(el("li", { class: "soft" }, folder.path ? "This folder is empty." : "The server was given no roots: send the file instead."));
        if (folder.truncated) rows.push(el("li", { class: "soft" }, "More than 5,000 entries: type the path instead."));
        replace(list, rows);
        if (focus) list.querySelector("button")?.focus();
      } catch (problem) {
        replace(list, el("li", null, problem_box(problem)));
      }
    };
    dialog.addEventListener("close", () => { dialog.remove(); settle(chosen); });
    document.body.append(dialog);
    dialog.showModal();
    const folder = from.includes("/") && !from.startsWith("sha256:") ? from.slice(0, from.lastIndexOf("/")) : "";
    go(folder, true);
  });
}

export class FileField {
  constructor(api, { key, label, help, required, changed }) {
    Object.assign(this, { api, key, label, changed });
    const id = fresh_id(`input-${key}`);
    this.field = el("input", { type: "text", id, autocomplete: "off", spellcheck: "false", required, "aria-describedby": `${id}-help`, oninput: () => { this.name = null; this.say(""); changed(); } });
    this.status = el("p", { class: "soft status", role: "status" });
    this.picker = el("input", { type: "file", class: "unseen", tabindex: -1, "aria-hidden": "true", onchange: () => { if (this.picker.files[0]) this.send(this.picker.files[0]); this.picker.value = ""; } });
    this.box = el("div", { class: "file-field" },
      el("label", { for: id }, label, required ? el("span", { class: "soft" }, " (needed)") : ""),
      el("div", { class: "file-line" }, this.field,
        el("button", { type: "button", "aria-label": `${label}: browse on the server`, onclick: () => this.look() }, "Browse"),
        el("button", { type: "button", "aria-label": `${label}: send a file from here`, onclick: () => this.picker.click() }, "Send a file"), this.picker),
      el("p", { class: "soft small-print", id: `${id}-help` }, help), this.status);
    this.element = this.box;
    for (const kind of ["dragenter", "dragover"]) {
      this.box.addEventListener(kind, (event) => { event.preventDefault(); event.stopPropagation(); this.box.classList.add("dropping"); });
    }
    this.box.addEventListener("dragleave", () => this.box.classList.remove("dropping"));
    this.box.addEventListener("drop", (event) => {
      event.preventDefault();
      event.stopPropagation();
      this.box.classList.remove("dropping");
      const file = event.dataTransfer.files[0];
      if (file) this.send(file);
    });
  }

  get value() { return this.field.value.trim(); }
  set value(text) { this.field.value = text; this.changed(); }

  say(...content) { replace(this.status, content); }

  async look() {
    const path = await browse(this.api, this.value);
    if (path) { this.value = path; this.say(""); }
    this.field.focus();
  }

  async send(file) {
    this.sending?.stop();
    const bar = el("progress", { max: 1, value: 0, "aria-label": `Sending ${file.name}` });
    const part = el("span", null, " 0 %");
    const handle = this.api.upload(file, (fraction) => { bar.value = fraction; part.textContent = ` ${Math.round(100 * fraction)} %`; });
    this.sending = handle;
    this.say(`Sending ${file.name} `, bar, part, " ", el("button", { type: "button", class: "small", onclick: () => handle.stop() }, "Stop"));
    try {
      const input = await handle.done;
      if (this.sending !== handle) return;
      this.sending = null;
      this.value = input.digest.startsWith("sha256:") ? input.digest : `sha256:${input.digest}`;
      this.name = input.name ?? file.name;
      this.say(`${this.name}, ${bytes(input.bytes)}: ${input.known ? "the server had it already" : "sent"}`);
      announce(`${this.name} is on the server.`);
    } catch (problem) {
      if (this.sending !== handle) return;
      this.sending = null;
      this.say(problem_box(problem));
    }
  }
}
