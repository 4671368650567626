// What went wrong, where, and what usually helps.

import { el } from "./dom.js";

/// A Problem as a box that is read out at once.
export function problem_box(problem, level = 3) {
  return el("div", { class: "problem", role: "alert" },
    el(`h${level}`, null, problem.title ?? "Something went wrong"),
    problem.detail && problem.detail !== problem.title ? el("p", null, problem.detail) : null,
    problem.place ? el("p", null, el("span", { class: "soft" }, "Where: "), problem.place) : null,
    problem.remedy ? el("p", null, el("span", { class: "soft" }, "What helps: "), problem.remedy) : null);
}
