// Numbers and statements in words: the same words that the text report uses. No document is touched here.

/// 12345678 -> "12,345,678".
export function grouped(number) {
  return Math.round(number).toString().replace(/\B(?=(\d{3})+(?!\d))/g, ",");
}

export function counted(number, noun) {
  if (number === 1) return `1 ${noun}`;
  return `${grouped(number)} ${noun.endsWith("y") ? `${noun.slice(0, -1)}ies` : `${noun}s`}`;
}

/// Three digits, for sizes and bounds.
export function rounded(number) {
  if (number === 0) return "0";
  const size = Math.abs(number);
  if (size >= 1e-3 && size < 1e6) return Number(number.toPrecision(3)).toString();
  return Number(number.toPrecision(3)).toExponential().replace(/e([+-])(\d)$/, "e$10$2");
}

/// All digits that tell the number from its neighbours.
export function exact(number) {
  return String(number);
}

export function bytes(number) {
  const units = ["B", "kB", "MB", "GB", "TB"];
  let k = 0;
  while (number >= 1000 && k + 1 < units.length) { number /= 1000; k += 1; }
  return `${number < 9.95 && k > 0 ? number.toFixed(1) : Math.round(number)} ${units[k]}`;
}

export function seconds(number) {
  if (number < 0.001) return "<1 ms";
  if (number < 1) return `${Math.round(1000 * number)} ms`;
  if (number < 99.5) return `${Number(number.toPrecision(2))} s`;
  if (number < 5400) return `${Math.round(number / 60)} min`;
  return `${(number / 3600).toFixed(1)} h`;
}

/// "3 min ago"; the date when it is more than a day.
export function ago(date, now) {
  const past = (now - date) / 1000;
  if (past < 5) return "now";
  if (past < 60) return `${Math.floor(past)} s ago`;
  if (past < 3600) return `${Math.floor(past / 60)} min ago`;
  if (past < 86400) return `${Math.floor(past / 3600)} h ago`;
  return new Date(date).toISOString().slice(0, 10);
}

/// What the state and the exit code of a job come to: one of these names, each with a mark and a word of its own.
export function standing_of(job) {
  if (job.state !== "done") return job.state;
  return { 0: "good", 1: "not_good", 3: "unresolved" }[job.exit_code] ?? "failed";
}

export const STANDING = {
  queued: "waiting",
  running: "running",
  good: "good",
  not_good: "not good",
  unresolved: "unresolved",
  failed: "failed",
  cancelled: "cancelled",
};

export const COMMANDS = {
  check: "Is K positive definite?",
  count: "How many lie below the values asked?",
  sweep: "How does the count grow over a range?",
  bracket: "Between which bounds do the values lie?",
  audit: "Is somebody's list complete?",
  locate: "Which nodes carry the zero, negative and weak directions, and why?",
  forecast: "What will a factorization take?",
};

export const INPUTS = {
  stiffness: "Stiffness K", geometric: "Geometric stiffness G", mass: "Mass M", added: "Added to K", dofs: "Dof map",
  nodes: "Node table", axes: "Nodal axes", fix: "Held equations", multipliers: "Multipliers", values: "List of values",
  steps: "Further steps of the load path", list: "List of steps",
};

export function backing(level, failure_probability) {
  if (level === "proved") return "proof";
  if (level === "statistical") return `statistics (wrong with probability at most ${rounded(failure_probability ?? 0)})`;
  return "nothing: no certificate";
}

const RANK = { none: 0, statistical: 1, proved: 2 };

/// Every level that the answer rests on.
function levels_of(result) {
  const levels = [];
  if (result.certificate) levels.push(result.certificate.level);
  for (const count of result.counts ?? []) levels.push(count.level);
  if (result.critical) levels.push(result.complete ? result.complete.level : "none");
  for (const value of result.critical ?? []) levels.push(value.level);
  if (result.range?.level) levels.push(result.range.level);
  for (const step of result.steps ?? []) if (step.certificate) levels.push(step.certificate.level);
  return levels;
}

/// Level and risk of the whole answer in one sentence.
export function standing_sentence(result) {
  const levels = levels_of(result);
  if (levels.length === 0) return result.forecast ? "Nothing was factored: figures from the pattern alone." : "";
  const weakest = levels.reduce((a, b) => (RANK[a] <= RANK[b] ? a : b));
  const level = { proved: "Backed by proof throughout", statistical: "Backed by statistics where not by proof",
    none: "Not certified in every part" }[weakest];
  return level + (result.risk > 0
    ? `; the risk that any statement is wrong is at most ${rounded(result.risk)} (allowed: ${rounded(result.risk_allowed)}).`
    : "; no statement rests on chance.");
}

/// A certificate as rows of label and text.
export function certificate_in_words(certificate) {
  const rows = [["backed by", backing(certificate.level, certificate.failure_probability)]];
  const precision = { double: "double precision", single: "a factor kept in single precision",
    extended: "double-double precision" }[certificate.precision];
  const ways = {
    offsets: certificate.runs?.length === 1
      ? "one factorization, shifted off zero: what remains positive is positive beyond all rounding"
      : "factorizations on both sides of zero, each with a bound on all its rounding errors",
    relative: "one kept factorization that certifies itself against random vectors",
  };
  if (certificate.method) {
    rows.push(["how", `${ways[certificate.method] ?? certificate.method}${precision ? `, in ${precision}` : ""}`]);
  }
  for (const run of certificate.runs ?? []) {
    rows.push([`at offset ${rounded(run.offset)}`, `${grouped(run.negative)} below${run.error_bound === null ? ""
      : `, rounding errors at most ${rounded(run.error_bound)}`}`]);
  }
  if (certificate.relative_bound !== null && certificate.relative_bound !== undefined) {
    rows.push(["relative bound", `${rounded(certificate.relative_bound)}; below 1 the signs counted are those of the matrix`]);
  }
  if (certificate.resolution !== null && certificate.resolution !== undefined) {
    rows.push(["resolution", `${rounded(certificate.resolution)} of the scaled matrix, whose rows are about 1`]);
  }
  if (certificate.smallest_eigenvalue_above !== null && certificate.smallest_eigenvalue_above !== undefined) {
    const own = certificate.smallest_eigenvalue_of_k_above;
    rows.push(["it follows", `the smallest eigenvalue of the scaled matrix exceeds ${rounded(certificate.smallest_eigenvalue_above)}`
      + (own === null || own === undefined ? "" : `, that of the matrix itself ${rounded(own)}`)]);
  }
  for (const text of certificate.assumptions ?? []) rows.push(["assuming", text]);
  return rows;
}

/// One count in one line, for the card beside the staircase and for screen readers.
export function count_sentence(count) {
  const [least, most] = count.below_range;
  const number = count.below !== null && count.below !== undefined ? grouped(count.below)
    : `between ${grouped(least)} and ${grouped(most)}`;
  return `${number} at ${exact(count.shift)}: ${count.meaning}; backed by ${backing(count.level, count.failure_probability)}`;
}

export const CAUSES = {
  loose_part: "Loose part", mechanism: "Mechanism", unattached_dof: "Unattached dof",
  missing_rotational_stiffness: "Missing rotational stiffness", negative_spring: "Negative spring",
  negative_patch: "Negative patch", unstable_as_a_whole: "Unstable as a whole",
  redundant_constraint: "Redundant constraint", near_mechanism: "Near-mechanism",
  over_stiff_coupling: "Over-stiff coupling", unresolved: "Unresolved",
};

export function directions_in_words(direction) {
  if (direction.kind === "over_stiff_coupling") return counted(direction.count, "coupling");
  return counted(direction.count, { "-1": "negative direction", 0: "zero direction", 1: "weak direction" }[direction.sign]);
}

export function percent(share) {
  if (share < 0.001) return "<0.1 %";
  return share < 0.0995 ? `${(100 * share).toFixed(1)} %` : `${Math.round(100 * share)} %`;
}

const PHASES = { read: "reading", order: "ordering", analyse: "analysing the pattern", analyze: "analysing the pattern",
  "self-test": "testing the arithmetic", steps: "judging the steps", modes: "finding mode shapes", factor: "factoring", certify: "certifying", count: "counting", locate: "locating", bracket: "bracketing" };

export function phase_in_words(phase) {
  return PHASES[phase] ?? phase ?? "starting";
}

/// 0 to 1, or null when it is not known.
export function fraction_of(progress) {
  if (!progress || !(progress.total > 0) || !(progress.done > 0)) return null;  // many phases say only that they began
  return Math.min(1, Math.max(0, progress.done / progress.total));
}

/// "about 3 s and 120 MB", or "".
export function forecast_in_words(forecast) {
  if (!forecast) return "";
  const parts = [];
  if (forecast.seconds !== null && forecast.seconds !== undefined) parts.push(seconds(forecast.seconds));
  if (forecast.peak_bytes) parts.push(bytes(forecast.peak_bytes));
  return parts.length ? `about ${parts.join(" and ")}` : "";
}
