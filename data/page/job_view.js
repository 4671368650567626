// One job: while it runs, how far it is; then the verdict, what backs it, the drawings, and what was not checked.

import { el, band, facts, table, replace, announce, reduced_motion } from "./dom.js";
import { mark } from "./mark.js";
import { renew } from "./jobs.js";
import { problem_box } from "./problem.js";
import { Staircase } from "./staircase.js";
import { Brackets, bracket_sentence } from "./brackets.js";
import { histogram } from "./histogram.js";
import { NodeView } from "./node_view.js";
import { ago, backing, bytes, CAUSES, certificate_in_words, counted, COMMANDS, directions_in_words, exact, forecast_in_words, fraction_of,
  grouped, INPUTS, percent, phase_in_words, rounded, seconds, standing_of, standing_sentence, STANDING } from "./words.js";

const DOWNLOADS = {
  result: ["the answer", "JSON", "answer.json"], certificate: ["the certificate", "JSON", "certificate.json"], report: ["the report", "HTML", "report.html"],
  text: ["the report", "text", "report.txt"], csv: ["the numbers", "CSV", "numbers.csv"], junit: ["for build servers", "JUnit XML", "junit.xml"],
  svg: ["the staircase", "SVG", "staircase.svg"], vtu: ["the grid", "VTU", "grid.vtu"], view: ["the thinned model", "JSON", "view.json"],
  log: ["the log", "text", "job.log"],
};

/// "K", "K + f G", "K - s M": what the axis of shifts carries.
export function axis_of(result) {
  if (result.inputs?.geometric) return "load factor f";
  if (result.inputs?.mass) return "shift s (square of the circular frequency)";
  return "shift s, in the mixed units of K";
}

function level_table(certificate) {
  const rows = Object.entries(certificate).filter(([key]) => key !== "runs").map(([key, value]) => [key,
    value === null ? "does not apply" : Array.isArray(value) ? (value.length ? value.join("; ") : "none") : String(value)]);
  for (const [k, run] of (certificate.runs ?? []).entries()) {
    rows.push([`run ${k + 1}`, `offset ${exact(run.offset)}, ${grouped(run.negative)} negative pivots, error bound ${run.error_bound === null ? "none" : exact(run.error_bound)}`]);
  }
  return table("The certificate, every member", ["member", "value"], rows);
}

/// Words first, every member on demand.
function certificate_part(certificate, title = null) {
  return el("div", { class: "certificate" }, title ? el("h3", null, title) : null, facts(certificate_in_words(certificate)),
    el("details", null, el("summary", null, "In full"), level_table(certificate)));
}

function inertia_part(inertia) {
  if (!inertia) return null;
  return facts([["inertia", `${grouped(inertia.negative)} negative, ${grouped(inertia.zero)} zero, ${grouped(inertia.positive)} positive`
    + (inertia.undecided ? `, ${grouped(inertia.undecided)} undecided` : "")]]);
}

export class JobView {
  constructor(api, { commands, ask_again, removed, scopes }) {
    Object.assign(this, { api, commands, ask_again, removed, scopes });
    this.element = el("article", { class: "job" });
    this.head = el("header", { class: "job-head" });
    this.progress = el("div", { class: "progress" });
    this.body = el("div", { class: "job-body" });
    this.element.append(this.head, this.progress, this.body);
    this.turn = 0;
    setInterval(() => { if (this.job?.state === "running" && this.element.isConnected) this.draw_progress(); }, 1000);
  }

  /// Shows the job `id`; reads it, and its answer once there is one.
  async open(id) {
    const turn = ++this.turn;
    this.close();
    this.id = id;
    this.job = null;
    this.early = null;
    this.drawn = null;
    replace(this.head, el("h1", { tabindex: -1 }, "Reading \u2026"));
    replace(this.progress);
    replace(this.body);
    try {
      const job = await this.api.job(id);
      if (turn !== this.turn) return;
      this.job = job;
      if (this.early) this.take(this.early);  // came while the job was being read
      await this.update(turn);
    } catch (problem) {
      if (turn !== this.turn) return;
      replace(this.head, el("h1", { tabindex: -1 }, "This job cannot be shown"));
      replace(this.body, problem_box(problem, 2));
    }
  }

  close() {
    this.node_view?.close();
    this.node_view = null;
    this.staircase = null;
  }

  /// Something changed; other jobs can be shifts added to this one.
  take(job) {
    if (this.staircase && job.continues === this.id) { this.take_shift(job); return; }
    if (job.id !== this.id) return;
    if (!this.job) { this.early = job; return; }
    if (this.job.state !== "queued" && this.job.state !== "running" && (job.state === "queued" || job.state === "running")) return;
    renew(this.job, job);
    this.update(this.turn);
  }

  async update(turn) {
    this.draw_head(null);
    this.draw_progress();
    const standing = standing_of(this.job);
    if (standing === "queued" || standing === "running" || this.drawn === standing) return;
    this.drawn = standing;
    if (this.job.files.includes("result")) {
      try {
        const result = await this.api.result(this.id);
        if (turn !== this.turn) return;
        this.result = result;
        this.draw_head(result);
        await this.draw_result(result, turn);
      } catch (problem) {
        if (turn === this.turn) replace(this.body, problem_box(problem, 2), this.request_part(), this.downloads_part());
        if (problem.status === undefined) throw problem;
      }
      return;
    }
    replace(this.body, this.job.problem ? problem_box(this.job.problem, 2) : null, this.request_part(), this.downloads_part());
  }

  draw_head(result) {
    const { job } = this;
    const standing = standing_of(job);
    const words = result?.in_words ?? [];
    const lead = words[0] ?? job.headline ?? (standing === "failed" ? "This question has no answer" : standing === "cancelled" ? "Cancelled before there was an answer" : `${COMMANDS[job.command] ?? job.command}`);
    const key = JSON.stringify([standing, lead, words.length, job.cancelling]);
    if (this.head_key === `${job.id}${key}`) return;
    this.head_key = `${job.id}${key}`;
    const focused = this.head.contains(document.activeElement) && document.activeElement.tagName === "H1";
    const title = el("h1", { tabindex: -1, class: "lead" }, lead);
    replace(this.head,
      el("p", { class: "over soft" }, `${job.title ? `${job.title} \u00b7 ` : ""}${job.command} \u00b7 ${STANDING[standing]} \u00b7 ${ago(Date.parse(job.created), Date.now())}`,
        job.continues ? [" \u00b7 ", el("a", { href: `#/job/${job.continues}` }, "belongs to another job")] : null),
      el("div", { class: "verdict" }, mark(standing, true), el("div", null, title, words.slice(1).map((text) => el("p", null, text)),
        result ? el("p", { class: "soft" }, standing_sentence(result)) : null, this.actions(standing))));
    if (focused) title.focus();
  }

  actions(standing) {
    const can = (scope) => this.scopes().includes(scope);
    const button = (text, act) => el("button", { type: "button", onclick: async (event) => {
      event.target.disabled = true;
      try { await act(); } catch (problem) { this.head.append(problem_box(problem, 2)); }
      event.target.disabled = false;
    } }, text);
    const live = standing === "queued" || standing === "running";
    return el("p", { class: "actions" },
      live && can("submit") && !this.job.cancelling ? button("Cancel", async () => { this.take(await this.api.cancel(this.id)); announce("Cancelled."); }) : null,
      button("Ask again, changed", async () => { this.ask_again((await this.api.job(this.id)).request); }),
      !live && can("admin") ? button("Delete", async () => { await this.api.remove(this.id); announce("Deleted."); this.removed(this.id); }) : null);
  }

  draw_progress() {
    const { job } = this;
    if (job.state !== "queued" && job.state !== "running") { replace(this.progress); this.bar = null; return; }
    const words = forecast_in_words(job.forecast);
    if (!this.bar) {
      this.bar = el("progress", { "aria-label": "Progress", max: 1 });
      this.bar_words = el("p", { role: "status" });
      this.bar_facts = el("p", { class: "soft" });
      replace(this.progress, this.bar_words, this.bar, this.bar_facts);
    }
    const fraction = job.state === "running" ? fraction_of(job.progress) : null;
    this.bar.hidden = job.state === "queued" || (fraction === null && reduced_motion());
    if (fraction === null) this.bar.removeAttribute("value"); else this.bar.value = fraction;
    const text = job.cancelling ? "It is being stopped." : job.state === "queued" ? "It waits for its turn." : `Now ${phase_in_words(job.progress?.phase)}.`;
    if (this.bar_words.textContent !== text) this.bar_words.textContent = text;
    this.bar_facts.textContent = [words ? `Forecast: ${words}.` : "", job.memory_bytes ? `Memory limit ${bytes(job.memory_bytes)}.` : "",
      job.state === "running" && job.started ? `Running for ${seconds(Math.max(0, (Date.now() - Date.parse(job.started)) / 1000))}.` : "",
      job.attempts > 1 ? `This is attempt ${job.attempts}: the one before met its memory limit, or was cut short.` : ""].filter(Boolean).join(" ");
  }

  async draw_result(result, turn) {
    this.close();
    const parts = [this.job.problem ? problem_box(this.job.problem, 2) : null];
    for (const one of result.contradictions ?? []) {
      parts.push(problem_box({ title: "Two certificates contradict each other", detail: `At ${exact(one.shift)} there are at least ${grouped(one.least)}, at ${exact(one.other_shift)} at most ${grouped(one.most)}: counts cannot fall.`,
        remedy: "This is a defect of the machine or the program: report it, and trust neither." }, 2));
    }
    if (result.directions) parts.push(this.causes_part(result));
    if (result.counts) parts.push(this.staircase_part(result));
    if (result.critical) parts.push(this.brackets_part(result));
    if (result.gaps) parts.push(this.audit_part(result));
    if (result.steps) parts.push(this.path_part(result));
    if (result.forecast) parts.push(this.forecast_part(result));
    const follows = (result.sentences ?? []).filter((text) => !result.in_words.includes(text));
    if (follows.length) parts.push(band("What follows", el("ul", null, follows.map((text) => el("li", null, text)))));
    if (result.local_accuracy) parts.push(band("Local accuracy", histogram(result.local_accuracy)));
    parts.push(this.certificate_band(result));
    parts.push(band("Not checked", result.not_checked.length ? el("ul", { class: "not-checked" }, result.not_checked.map((text) => el("li", null, text))) : null));
    if (result.warnings.length) parts.push(band("Warnings", el("ul", { class: "warnings" }, result.warnings.map((one) => el("li", null, el("strong", null, one.code), `: ${one.message}`, one.place ? el("span", { class: "soft" }, ` (${one.place})`) : null)))));
    parts.push(this.parts_band(result), this.request_part(), this.work_part(result), this.downloads_part());
    replace(this.body, parts);
    announce(result.in_words[0]);
    if (this.staircase) await this.join_shifts(turn);
    if (result.directions && this.job.files.includes("view")) await this.draw_model(result, turn);
  }

  certificate_band(result) {
    const parts = [];
    if (result.inertia) parts.push(inertia_part(result.inertia));
    if (result.certificate) parts.push(certificate_part(result.certificate));
    if (result.verdict_for_all_roundings) parts.push(facts([["for all roundings", result.verdict_for_all_roundings.replaceAll("_", " ")]]));
    if (result.constrained) {
      const c = result.constrained;
      parts.push(el("h3", null, "On the constraints"), facts([["multipliers", grouped(c.multipliers)],
        c.rank !== null ? ["independent", `${grouped(c.rank)}, backed by ${backing(c.rank_level, c.rank_failure_probability)}`] : null,
        c.redundant ? ["redundant", grouped(c.redundant)] : null,
        c.inertia ? ["inertia", `${grouped(c.inertia.negative)} negative, ${grouped(c.inertia.zero)} zero, ${grouped(c.inertia.positive)} positive; backed by ${backing(c.inertia_level, c.inertia_failure_probability)}`] : null,
        c.negative_range ? ["negative", `between ${grouped(c.negative_range[0])} and ${grouped(c.negative_range[1])}`] : null]));
    }
    for (const [name, range] of [["in the whole range", result.complete], ["on the other side", result.other_side], ["the list\u2019s range", result.range]]) {
      if (range && range.from !== undefined) parts.push(facts([[name, `${range.count ?? range.counted ?? "?"} between ${exact(range.from)} and ${exact(range.to)}${range.level ? `, backed by ${backing(range.level, range.failure_probability)}` : ""}`]]));
    }
    if (result.counts) parts.push(el("details", null, el("summary", null, `The certificate of each of the ${grouped(result.counts.length)} counts`),
      result.counts.slice(0, 200).map((count) => certificate_part(count.certificate, `At ${exact(count.shift)}`))));
    if (parts.length) parts.push(facts([["risk", result.risk > 0 ? `at most ${rounded(result.risk)} that any statement here is wrong; allowed ${rounded(result.risk_allowed)}` : "none: no statement rests on chance"], ["seed", result.seed]]));
    return band("Certificate", parts);
  }

  staircase_part(result) {
    const meaning = result.counts[0].meaning.replace(/ \(.*/, "");
    const axis = `${axis_of(result)}: ${meaning}`;
    this.staircase = new Staircase(result.counts, { axis, meaning, on_add: this.scopes().includes("submit") ? (shift) => this.add_shift(shift) : null });
    this.shift_of = new Map();
    return band("Staircase", this.staircase.element);
  }

  /// A count of the same pencil at another shift, as a job that continues this one.
  async add_shift(shift) {
    try {
      const { request } = this.job.request ? this.job : await this.api.job(this.id);
      const table_of_count = (await this.commands()).find((command) => command.name === "count");
      const has = (list, key) => list.some((one) => one.key === key);
      const inputs = Object.fromEntries(Object.entries(request.inputs).filter(([key]) => has(table_of_count.inputs, key)));
      const options = Object.fromEntries(Object.entries(request.options ?? {}).filter(([key]) => has(table_of_count.options, key) && key !== "expect"));
      options.at = [shift];
      const job = await this.api.submit({ command: "count", inputs, options, continues: this.id });
      this.shift_of.set(job.id, shift);
      this.take_shift(job);
    } catch (problem) {
      this.staircase?.drop(shift);
      this.staircase?.warning.append(problem_box(problem));
    }
  }

  async take_shift(job) {
    if (job.command !== "count" && job.command !== "sweep") return;
    if (job.state === "queued" || job.state === "running") return;
    if (this.shift_of.get(job.id) === "joined") return;
    const shift = this.shift_of.get(job.id);
    if (job.state !== "done") {
      if (shift !== undefined) {
        this.staircase.drop(shift);
        this.staircase.warning.append(problem_box(job.problem ?? { title: `No count at ${exact(shift)}`, detail: `The job was ${job.state}.` }));
      }
      this.shift_of.set(job.id, "joined");
      return;
    }
    this.shift_of.set(job.id, "joined");
    const { staircase } = this;
    try {
      const result = await this.api.result(job.id);
      if (staircase === this.staircase) staircase.join(result.counts ?? [], shift !== undefined);
    } catch (problem) {
      staircase.drop(shift);
      staircase.warning.append(problem_box(problem));
    }
  }

  /// Shifts that were added before.
  async join_shifts(turn) {
    try {
      const { jobs } = await this.api.jobs({ continues: this.id, limit: 500 });
      for (const job of jobs) if (turn === this.turn) await this.take_shift(job);
    } catch (problem) {
      this.staircase?.warning.append(problem_box(problem));
    }
  }

  brackets_part(result) {
    if (result.critical.length === 0) return band("Brackets", el("p", null, "There is no value in the range."));
    const unit = result.inputs?.geometric ? "critical load factor f" : result.inputs?.mass ? "s, the square of the circular frequency" : "eigenvalue of K";
    return band("Brackets", new Brackets(result.critical, result.complete, unit).element);
  }

  audit_part(result) {
    const missing = result.missing ?? [];
    return band("The list", result.gaps.length === 0 ? el("p", null, "No stretch of the range differs from the list.")
      : table("Where the list and the counts differ", ["from", "to", "listed", "certain", "values listed there"], result.gaps.map((gap) => [exact(gap.low), exact(gap.high), gap.listed, gap.counted, (gap.labels ?? []).join(", ")]), 4),
    missing.length ? [el("h3", null, "What is missing"), new Brackets(missing, null, "missing values").element, el("ul", null, missing.slice(0, 20).map((value) => el("li", null, bracket_sentence(value))))] : null);
  }

  path_part(result) {
    return band("Load path", table("Steps of the load path", ["step", "verdict", "negative", "zero", "file"], result.steps.map((step, k) => [k + 1, step.verdict.replaceAll("_", " ") + (step.changed ? " (changed)" : ""), step.inertia.negative, step.inertia.zero, step.path])));
  }

  forecast_part(result) {
    const f = result.forecast;
    return band("Forecast", facts([["one count", `${seconds(f.seconds)}, ${counted(f.factorizations, "factorization")}`], ["if that does not settle it", seconds(f.seconds_otherwise)],
      ["peak memory", `${bytes(f.peak_bytes_count)}; ${bytes(f.peak_bytes_solve)} with the factor kept${f.peak_bytes_locate ? `; ${bytes(f.peak_bytes_locate)} to locate` : ""}`], ["factor", `${grouped(f.factor_entries)} entries, ${Number((f.factor_flops / 1e9).toPrecision(3))} Gflop`], ["assuming", f.assumption]]));
  }

  causes_part(result) {
    this.model_place = el("div", { class: "model-place" });
    const causes = result.directions.map((direction, k) => {
      const most = Math.max(...direction.nodes.map((one) => one.share), 1e-300);
      const ranked = direction.nodes.slice(0, 8);
      return el("article", { class: "cause" },
        el("h3", null, el("span", { class: direction.kind === "unresolved" ? "open" : "heed", "aria-hidden": "true" }, direction.kind === "unresolved" ? "\u25a1 " : direction.sign < 0 ? "\u25bc " : direction.sign === 0 ? "\u2261 " : "\u25b2 "),
          `${k + 1}. ${CAUSES[direction.kind] ?? direction.kind}`, el("span", { class: "soft tally-word" }, ` ${directions_in_words(direction)}`)),
        el("p", null, direction.explanation),
        facts([["remedy", direction.remedy], direction.motions.length ? ["moves", direction.motions.join("; ")] : null,
          direction.moving_nodes ? ["takes part", counted(direction.moving_nodes, "node")] : null,
          direction.kind !== "over_stiff_coupling" ? ["held to K", `energy ${rounded(direction.energy)} of what the dofs have by themselves`] : null]),
        ranked.length ? el("details", null, el("summary", null, "The dofs with the largest share"),
          table(`Shares in cause ${k + 1}`, ["node", "dof", "share", "drawn"], ranked.map((one) => {
            const bar = el("span", { class: "share" });
            bar.style.width = `${100 * one.share / most}%`;
            return [one.node ?? "-", one.dof, percent(one.share), el("span", { class: "share-track", "aria-hidden": "true" }, bar)];
          }))) : null,
        this.job.files.includes("view") ? el("p", null, el("button", { type: "button", class: "small", onclick: () => { this.node_view?.show(k, true); this.model_place.scrollIntoView({ block: "nearest" }); } }, `Show ${k + 1} in the model`)) : null);
    });
    const left = result.location?.not_located;
    return band("Where and why", el("div", { class: this.job.files.includes("view") ? "where" : null }, this.model_place, el("div", null,
      causes.length ? causes : el("p", null, "No cause was found: no negative, no zero, and no weak direction that stands apart."),
      left ? el("p", null, `${grouped(left)} more are counted but not shown.`) : null)));
  }

  async draw_model(result, turn) {
    try {
      const view = await this.api.view(this.id);
      if (turn !== this.turn || view.node.length === 0) return;
      this.node_view = new NodeView(view, { title: "The model", alarm: result.local_accuracy?.alarm ?? 12 });
      replace(this.model_place, this.node_view.element);
    } catch (problem) {
      if (turn === this.turn) replace(this.model_place, problem_box(problem));
    }
  }

  parts_band(result) {
    const parts = result.components ?? [];
    if (parts.length < 2) return null;
    return band("Connected parts", table("Connected parts", ["part", "nodes", "equations", "zero directions"], parts.slice(0, 12).map((part, k) => [k + 1, grouped(part.nodes), grouped(part.rows), grouped(part.nullity)]), 4),
      parts.length > 12 ? el("p", { class: "soft" }, `and ${grouped(parts.length - 12 + (result.location?.components_left_out ?? 0))} more`) : null);
  }

  request_part() {
    const { request } = this.job;
    if (!request) return null;
    const text = (value) => (Array.isArray(value) ? value.map((one) => (typeof one === "object" ? `${one.path} times ${one.factor}` : one)).join(", ") : String(value));
    return band("Question", facts([["asked", COMMANDS[request.command] ?? request.command],
      ...Object.entries(request.inputs ?? {}).map(([key, value]) => [INPUTS[key] ?? key, el("span", { class: "path" }, text(value))]),
      ...Object.entries(request.options ?? {}).map(([key, value]) => [key.replaceAll("_", " "), text(value)]), ["job", el("span", { class: "path" }, this.job.id)]]));
  }

  work_part(result) {
    const { work, timings_seconds: time, memory_bytes: memory } = result;
    const inputs = Object.entries(result.inputs).flatMap(([role, input]) => (input === null ? [] : Array.isArray(input) ? input.map((one) => [`${role}, times ${one.factor}`, one]) : [[role, input]]));
    return band("Inputs, work, time",
      table("Inputs", ["input", "equations", "entries", "SHA-256"], inputs.map(([role, input]) => [INPUTS[role] ?? role, grouped(input.rows), grouped(input.entries), el("span", { class: "path" }, input.sha256)])),
      facts([["equations", `${grouped(result.rows_analysed)} analysed${result.rows_struck ? `, ${grouped(result.rows_struck)} struck out` : ""}`],
        result.forecast ? null : ["work", `${counted(work.factorizations, "factorization")}, ${grouped(work.factor_entries)} entries in L, largest front ${grouped(work.largest_front)} rows`],
        ["memory", `peak ${bytes(memory.peak)}, forecast ${bytes(memory.forecast)}`],
        ["time", `${seconds(time.total)}: read ${seconds(time.read)}, order ${seconds(time.order)}, analyse ${seconds(time.analyse)}, factor ${seconds(time.factor)}`],
        ["machine", `${counted(result.host.cores, "core")}, ${result.host.isa}; ${result.program.name} ${result.program.version}`]]));
  }

  downloads_part() {
    const files = this.job.files ?? [];
    if (files.length === 0) return null;
    return band("Downloads", el("ul", { class: "downloads" }, files.map((name) => {
      const [what, kind, file] = DOWNLOADS[name] ?? [name, "", name];
      const failed = el("span");
      return el("li", null, el("button", { type: "button", onclick: async () => {
        replace(failed);
        try {
          const url = URL.createObjectURL(await this.api.blob(`/v1/jobs/${this.id}/${name}`));
          const link = el("a", { href: url, download: `${this.id}-${file}` });
          link.click();
          setTimeout(() => URL.revokeObjectURL(url), 30000);
        } catch (problem) { replace(failed, problem_box(problem)); }
      } }, `${what[0].toUpperCase()}${what.slice(1)}`, el("span", { class: "soft" }, ` ${kind}`)), failed);
    })));
  }
}
