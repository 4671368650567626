// Puts the page together: which part is shown for which address, and who hears of what.

import { Api } from "./api.js";
import { el, announce, replace } from "./dom.js";
import { EventStream } from "./events.js";
import { AskForm } from "./ask_form.js";
import { JobBook } from "./jobs.js";
import { JobList } from "./job_list.js";
import { JobView } from "./job_view.js";
import { mark } from "./mark.js";
import { problem_box } from "./problem.js";

const MOST_LISTED = 20000, MORE = 5000;

const api = new Api();
const book = new JobBook();
const place = (id) => document.getElementById(id);

let service = { scopes: ["read", "submit"], roots: [], tokens_needed: false };
let commands = null;

const tell = (problem) => replace(place("notice"), problem ? problem_box(problem, 2) : null);

async function command_tables() {
  commands ??= (await api.commands()).commands;
  return commands;
}

async function load_jobs() {
  try {
    book.failed = false;
    await book.load(api, MOST_LISTED);
    book.loaded = true;
    tell(null);
  } catch (problem) {
    book.failed = !book.loaded;
    if (problem.status !== 401) tell(problem);
  }
  book.changed();
}

let reading_older = false;
const list = new JobList(book, {
  open: (id) => { location.hash = `#/job/${id}`; },
  older: async () => {
    if (reading_older) return;
    reading_older = true;
    try { await book.older(api, MORE); } catch (problem) { tell(problem); }
    reading_older = false;
  },
});

const view = new JobView(api, {
  commands: command_tables,
  scopes: () => service.scopes,
  removed: (id) => { book.remove(id); location.hash = "#/"; },
  ask_again: (request) => { asked = request; location.hash = "#/new"; },
});

let asked = null;

function focus_title(where) {
  const title = where.querySelector("h1");
  if (title) title.focus({ preventScroll: true });
  where.scrollTop = 0;
}

function welcome() {
  return el("div", { class: "welcome" }, mark("good"), el("h1", { tabindex: -1 }, "Does it stand?"),
    el("p", null, "Choose a job from the list to see its verdict, what backs it, and what was not checked; or ask a new question of assembled matrices."),
    el("p", null, el("a", { class: "button main", href: "#/new" }, "New question")));
}

async function show() {
  const hash = location.hash || "#/";
  const job = /^#\/job\/([A-Za-z0-9._-]+)$/.exec(hash);
  const where = job ? "job" : hash === "#/new" ? "new" : "list";
  document.body.dataset.where = where;
  for (const link of document.querySelectorAll("nav a")) {
    if (link.getAttribute("href") === (where === "new" ? "#/new" : "#/")) link.setAttribute("aria-current", where === "job" ? "true" : "page");
    else link.removeAttribute("aria-current");
  }
  list.set_current(job ? job[1] : null);
  const detail = place("detail");
  view.close();
  view.turn += 1;
  if (job) {
    replace(detail, el("p", { class: "back" }, el("a", { href: "#/" }, "\u2190 All jobs")), view.element);
    document.title = "Job \u00b7 Stanchion";
    const opened = view.open(job[1]);
    focus_title(detail);
    await opened;
    if (view.job && view.id === job[1]) document.title = `${view.job.title ?? view.job.headline ?? view.job.command} \u00b7 Stanchion`;
  } else if (where === "new") {
    document.title = "New question \u00b7 Stanchion";
    try {
      const form = new AskForm(api, await command_tables(), { submitted: (made) => { book.put(made); announce("Accepted."); location.hash = `#/job/${made.id}`; } });
      if (asked) form.fill(asked);
      asked = null;
      replace(detail, form.element);
    } catch (problem) {
      replace(detail, el("h1", { tabindex: -1 }, "New question"), problem_box(problem, 2));
    }
    focus_title(detail);
  } else {
    document.title = "Jobs \u00b7 Stanchion";
    replace(detail, welcome());
  }
}

function connection(state, wait) {
  const words = { live: "live", lost: `connection lost, next try in ${Math.max(1, Math.round(wait))} s`, "waiting for a token": "waiting for a token" }[state];
  const dot = place("connection");
  if (dot.dataset.state === state && state !== "lost") return;
  const was = dot.dataset.state;
  dot.dataset.state = state;
  replace(dot, el("span", { class: `lamp lamp-${state.split(" ")[0]}`, "aria-hidden": "true" }), words,
    state === "lost" ? el("button", { type: "button", class: "small", onclick: () => stream.again() }, "Try now") : null);
  if (state === "live" && was && was !== "live") recovered();
}

/// What happened meanwhile is read again.
async function recovered() {
  announce("Connected again.");
  await load_jobs();
  if (view.id && document.body.dataset.where === "job") {
    try { view.take(await api.job(view.id)); } catch (problem) { if (problem.status === 404) tell(problem); }
  }
}

const stream = new EventStream(api, {
  state: connection,
  event: ({ type, data }) => {
    if (type === "resync") { recovered(); return; }
    let document_of;
    try { document_of = JSON.parse(data); } catch { return; }
    if (type === "job") {
      const newest = book.order[0]?.created ?? "";
      if (!book.by_id.has(document_of.id) && document_of.created >= newest) book.total += 1;
      book.put(document_of);
      view.take(document_of);
    } else if (type === "removed") book.remove(document_of.id);
  },
});

function token_dialog(problem) {
  const dialog = place("token-dialog");
  if (dialog.open) return;
  replace(place("token-problem"), problem ? el("p", { role: "alert" }, problem.detail || problem.title) : null);
  place("token-field").value = "";
  dialog.showModal();
}

async function begin() {
  try {
    service = await api.service();
    place("token-open").hidden = !service.tokens_needed;
    if (service.tokens_needed && service.scopes.length === 0) {
      token_dialog(api.token ? { detail: "This token is not known to the server." } : null);
      connection("waiting for a token", 0);
      return;
    }
  } catch (problem) {
    tell(problem);
  }
  stream.again();
  load_jobs();
  show();
}

api.on_token_needed = (problem) => token_dialog(problem);
place("token-open").addEventListener("click", () => token_dialog(null));
place("token-form").addEventListener("submit", (event) => {
  event.preventDefault();
  api.token = place("token-field").value.trim();
  place("token-dialog").close();
  begin();
});
place("token-forget").addEventListener("click", () => {
  api.token = "";
  place("token-dialog").close();
  location.reload();
});
place("skip").addEventListener("click", (event) => {
  event.preventDefault();
  const title = place("detail").querySelector("h1") ?? list.grid;
  title.focus();
});
place("jobs").append(list.element);
addEventListener("hashchange", show);
addEventListener("online", () => stream.again());
for (const kind of ["dragover", "drop"]) addEventListener(kind, (event) => event.preventDefault());
show();
begin();
