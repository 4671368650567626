// A beam on two posts: level, come off, not drawn to its end, not there yet. Shape and word say it beside the colour.

import { svg } from "./dom.js";
import { STANDING } from "./words.js";

export const SHAPES = {
  good: ["M6 20h54", "M16 22v34M50 22v34"],
  not_good: ["M6 32L60 10", "M16 34v22M50 24v32"],
  unresolved: ["M6 20h22M36 20h4M46 20h4M56 20h4", "M16 22v34M50 30v4M50 42v4M50 52v4"],
  running: ["M6 8h30", "M16 22v34M50 40v16"],
  queued: ["M24 52h22", ""],
  failed: ["M22 18l22 22M44 18l-22 22", ""],
  cancelled: ["M14 36h38", ""],
};
const TONES = { good: "clear", not_good: "heed", unresolved: "open", running: "clear", failed: "heed" };

/// With `named` the mark has a name of its own; without, words beside it say the same.
export function mark(standing, named = false) {
  const [beam, posts] = SHAPES[standing] ?? SHAPES.queued;
  const name = named ? { role: "img", "aria-label": STANDING[standing] ?? standing } : { "aria-hidden": "true" };
  return svg("svg", { class: `mark ${TONES[standing] ?? "soft"}`, viewBox: "0 0 66 66", ...name },
    svg("path", { d: beam, class: "beam" }), svg("path", { d: `${posts}M4 60h58`, class: "post" }));
}
