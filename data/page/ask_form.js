// A new question: the command, its files, its settings; what it will take; and off it goes. Which inputs and settings
// a command has comes from the server.

import { el, add, announce, facts, fresh_id, replace } from "./dom.js";
import { FileField } from "./file_field.js";
import { problem_box } from "./problem.js";
import { bytes, COMMANDS, grouped, INPUTS, seconds } from "./words.js";

/// What is in sight from the start; the rest opens on demand.
const FIRST_INPUTS = {
  check: ["stiffness", "dofs"], count: ["stiffness", "geometric", "mass", "dofs"], sweep: ["stiffness", "geometric", "mass", "dofs"],
  bracket: ["stiffness", "geometric", "mass", "dofs"], audit: ["stiffness", "geometric", "mass", "values", "dofs"],
  locate: ["stiffness", "dofs", "nodes", "mass"], forecast: ["stiffness", "geometric", "mass", "dofs"],
};
const FIRST_OPTIONS = {
  check: ["title", "expect"], count: ["at", "title"], sweep: ["from", "to", "points", "refine", "title"],
  bracket: ["first", "below", "from", "to", "title"], audit: ["unit", "title"], locate: ["title"], forecast: ["title"],
};

/// The text of a field as the request wants it; throws with words for the reader.
export function value_of(option, text) {
  const number = (part) => {
    const value = Number(part.trim());
    if (part.trim() === "" || !Number.isFinite(value)) throw new Error(`${option.key}: "${part.trim()}" is no number`);
    return value;
  };
  if (option.kind === "real") return number(text);
  if (option.kind === "whole") {
    const value = number(text);
    if (!Number.isInteger(value)) throw new Error(`${option.key}: "${text}" is no whole number`);
    return value;
  }
  if (option.kind === "numbers") return text.split(/[\s,;]+/).filter(Boolean).map(number);
  if (option.kind === "texts") return text.split(/\n/).map((line) => line.trim()).filter(Boolean);
  return text;
}

/// A request from what was filled in. inputs: {key: text}; settings: [{option, text or true}]
export function request_of(command, inputs, settings) {
  const request = { command, inputs: {}, options: {} };
  for (const [key, text] of Object.entries(inputs)) {
    if (!text) continue;
    if (key === "added") {
      request.inputs.added = text.split(/\n/).map((line) => line.trim()).filter(Boolean).map((line) => {
        const at = line.lastIndexOf(" ");
        const factor = Number(line.slice(at + 1));
        if (at < 0 || !Number.isFinite(factor)) throw new Error(`added: write the path, a blank and the factor, not "${line}"`);
        return { path: line.slice(0, at).trim(), factor };
      });
    } else if (key === "steps") request.inputs.steps = text.split(/\n/).map((line) => line.trim()).filter(Boolean);
    else request.inputs[key] = text;
  }
  for (const { option, text } of settings) {
    if (text === true) request.options[option.key] = true;
    else if (text !== "" && text !== false) request.options[option.key] = value_of(option, text);
  }
  return request;
}

export class AskForm {
  constructor(api, commands, { submitted }) {
    this.api = api;
    this.commands = new Map(commands.map((command) => [command.name, command]));
    this.submitted = submitted;
    this.kept = {};
    this.choices = el("fieldset", { class: "commands" }, el("legend", null, el("h2", null, "What do you ask?")),
      commands.map((command) => {
        const id = fresh_id("command");
        return el("div", { class: "command" }, el("input", { type: "radio", name: "command", id, value: command.name, checked: command.name === "check", onchange: () => this.choose(command.name) }),
          el("label", { for: id }, el("strong", null, command.name), el("span", { class: "soft" }, COMMANDS[command.name] ?? command.summary)));
      }));
    this.parts = el("div");
    this.answer = el("div", { class: "outcome" });
    this.forecast_button = el("button", { type: "button", onclick: () => this.forecast() }, "Forecast first");
    this.element = el("form", { class: "ask", novalidate: true, onsubmit: (event) => { event.preventDefault(); this.submit(); } },
      el("h1", { tabindex: -1 }, "New question"), this.choices, this.parts,
      el("p", { class: "actions" }, el("button", { type: "submit", class: "main" }, "Ask"), this.forecast_button,
        el("span", { class: "soft" }, "A forecast reads and orders the matrix; nothing is factored.")),
      this.answer);
    for (const kind of ["dragover", "drop"]) this.element.addEventListener(kind, (event) => {
      event.preventDefault();
      if (kind === "drop" && event.dataTransfer.files[0]) {  // beside every field: it is the next one without a file
        const free = Object.values(this.fields).find((field) => field instanceof FileField && !field.value);
        free?.send(event.dataTransfer.files[0]);
      }
    });
    this.choose("check");
  }

  /// Fills the form with a request that was asked before.
  fill(request) {
    for (const radio of this.choices.querySelectorAll("input")) radio.checked = radio.value === request.command;
    const inputs = Object.entries(request.inputs ?? {}).map(([key, value]) => [key, key === "added"
      ? value.map((one) => `${one.path} ${one.factor}`).join("\n") : Array.isArray(value) ? value.join("\n") : value]);
    const options = Object.entries(request.options ?? {}).map(([key, value]) => [key, Array.isArray(value) ? value.join(", ") : value]);
    this.kept = Object.fromEntries([...inputs, ...options]);
    this.choose(request.command);
  }

  keep() {
    for (const [key, field] of Object.entries(this.fields ?? {})) this.kept[key] = field.type === "checkbox" ? field.checked : field.value;
  }

  choose(name) {
    this.keep();
    this.command = this.commands.get(name);
    this.fields = {};
    const field_of = (input) => this.input_field(input);
    const first = new Set(FIRST_INPUTS[name] ?? ["stiffness"]);
    const first_options = FIRST_OPTIONS[name] ?? [];
    const inputs = this.command.inputs, options = this.command.options;
    const more = [...inputs.filter((one) => !first.has(one.key)).map(field_of)];
    const groups = new Map();
    for (const option of options.filter((one) => !first_options.includes(one.key))) {
      groups.set(option.group, [...(groups.get(option.group) ?? []), this.option_field(option)]);
    }
    const hidden_filled = (list) => list.some((one) => this.kept[one.key]);
    replace(this.parts,
      el("fieldset", null, el("legend", null, el("h2", null, "Files")), inputs.filter((one) => first.has(one.key)).map(field_of),
        el("p", { class: "soft small-print" }, "Name a file under the server\u2019s roots, or drop one onto its field to send it."),
        more.length ? el("details", { open: hidden_filled(inputs.filter((one) => !first.has(one.key))) }, el("summary", null, "More files"), more) : null),
      el("fieldset", null, el("legend", null, el("h2", null, "Settings")),
        el("div", { class: "settings" }, first_options.map((key) => options.find((one) => one.key === key)).filter(Boolean).map((one) => this.option_field(one))),
        groups.size ? el("details", { open: hidden_filled(options.filter((one) => !first_options.includes(one.key))) }, el("summary", null, "More settings"),
          [...groups].map(([title, list]) => [el("h3", null, title), el("div", { class: "settings" }, list)])) : null));
    this.forecast_button.hidden = name === "forecast";
    replace(this.answer);
  }

  input_field(input) {
    if (input.kind === "texts" || input.kind === "files" || input.key === "added" || input.key === "steps") {
      const id = fresh_id(`input-${input.key}`);
      const area = el("textarea", { id, rows: 2, spellcheck: "false", "aria-describedby": `${id}-help` });
      area.value = this.kept[input.key] ?? "";
      this.fields[input.key] = area;
      return el("div", { class: "file-field" }, el("label", { for: id }, INPUTS[input.key] ?? input.key), area,
        el("p", { class: "soft small-print", id: `${id}-help` }, `${input.help}; one a line${input.key === "added" ? ": path, blank, factor" : ""}`));
    }
    const field = new FileField(this.api, { key: input.key, label: INPUTS[input.key] ?? input.key, help: input.help,
      required: input.required || input.key === "stiffness", changed: () => {} });
    field.field.value = this.kept[input.key] ?? "";
    this.fields[input.key] = field;
    return field.element;
  }

  option_field(option) {
    const id = fresh_id(`option-${option.key}`);
    const help = el("p", { class: "soft small-print", id: `${id}-help` }, option.help);
    const label = el("label", { for: id }, option.key.replaceAll("_", " "), option.value && option.kind !== "flag" && !option.choices?.length ? el("span", { class: "soft" }, ` ${option.value}`) : "");
    const described = { id, "aria-describedby": `${id}-help` };
    const kept = this.kept[option.key];
    let field;
    if (option.kind === "flag") {
      field = el("input", { type: "checkbox", ...described, checked: kept === true });
      this.fields[option.key] = field;
      return el("div", { class: "setting flag" }, field, label, help);
    }
    if (option.choices?.length) {
      field = el("select", described, el("option", { value: "" }, "as usual"), option.choices.map((value) => el("option", { value, selected: kept === value }, value)));
    } else if (option.kind === "texts") {
      field = el("textarea", { ...described, rows: 2 });
      field.value = kept ?? "";
    } else {
      field = el("input", { type: "text", ...described, autocomplete: "off", inputmode: option.kind === "real" || option.kind === "whole" ? "decimal" : null });
      field.value = kept === undefined || kept === false ? "" : kept;
    }
    this.fields[option.key] = field;
    return el("div", { class: "setting" }, label, field, help);
  }

  request() {
    const inputs = Object.fromEntries(this.command.inputs.map((one) => [one.key, this.fields[one.key].value.trim()]));
    const settings = this.command.options.map((option) => {
      const field = this.fields[option.key];
      return { option, text: option.kind === "flag" ? field.checked : field.value.trim() };
    });
    return request_of(this.command.name, inputs, settings);
  }

  checked_request() {
    replace(this.answer);
    const { stiffness } = this.fields;
    const missing = stiffness && !stiffness.value;
    stiffness?.field.setAttribute("aria-invalid", missing);
    if (missing) {
      stiffness.field.focus();
      add(this.answer, [problem_box({ title: "A file is missing", detail: "Every question needs the stiffness matrix K.", remedy: "Name a file under the roots, or drop one onto the field." })]);
      return null;
    }
    try {
      return this.request();
    } catch (failure) {
      add(this.answer, [problem_box({ title: "Not understood", detail: failure.message, remedy: "Correct the field and ask again." })]);
      return null;
    }
  }

  busy(on) {
    for (const button of this.element.querySelectorAll(".actions button")) button.disabled = on;
  }

  async submit() {
    const request = this.checked_request();
    if (!request) return;
    this.busy(true);
    // The same key when an answer was lost and the same is asked again: one job.
    const text = JSON.stringify(request);
    if (this.lost !== text) this.key = crypto.randomUUID();
    this.lost = text;
    try {
      const job = await this.api.submit(request, this.key);
      this.lost = null;
      this.submitted(job);
    } catch (problem) {
      if (problem.code !== "unreachable") this.lost = null;
      replace(this.answer, problem_box(problem));
    }
    this.busy(false);
  }

  /// Asks what the same inputs will take, and waits for the answer.
  async forecast() {
    const request = this.checked_request();
    if (!request) return;
    const table = this.commands.get("forecast");
    const known = (list) => new Set(list.map((one) => one.key));
    const inputs = known(table.inputs), options = known(table.options);
    const only = (object, keys) => Object.fromEntries(Object.entries(object).filter(([key]) => keys.has(key)));
    this.busy(true);
    replace(this.answer, el("p", { role: "status" }, "Forecasting \u2026"));
    try {
      let job = await this.api.submit({ command: "forecast", inputs: only(request.inputs, inputs), options: only(request.options, options) });
      while (job.state === "queued" || job.state === "running") {
        await new Promise((go) => { setTimeout(go, 250); });
        job = await this.api.job(job.id);
        if (!this.element.isConnected) return;
      }
      if (job.state !== "done") throw job.problem ?? { title: "The forecast has no answer", detail: `It was ${job.state}.`, remedy: null };
      const { forecast, rows_analysed } = await this.api.result(job.id);
      replace(this.answer, el("section", { class: "forecast", "aria-label": "Forecast" }, el("h2", null, `About ${seconds(forecast.seconds)} and ${bytes(forecast.peak_bytes_count)}`),
        facts([["equations", grouped(rows_analysed)], ["entries in the factor", grouped(forecast.factor_entries)],
          ["one factorization", `${seconds(forecast.factorization_seconds)}, ${Number((forecast.factor_flops / 1e9).toPrecision(3))} Gflop`],
          ["memory, factor kept", bytes(forecast.peak_bytes_solve)], ["memory to locate", bytes(forecast.peak_bytes_locate)], ["if that does not settle it", seconds(forecast.seconds_otherwise)], ["assuming", forecast.assumption]])));
      announce(`Forecast: about ${seconds(forecast.seconds)} and ${bytes(forecast.peak_bytes_count)}.`);
    } catch (problem) {
      replace(this.answer, problem_box(problem));
    }
    this.busy(false);
  }
}
