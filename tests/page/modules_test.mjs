// The page's modules by themselves, without a browser: node --test modules_test.mjs
import assert from "node:assert/strict";
import test from "node:test";

const from = (name) => import(new URL(`../../data/page/${name}.js`, import.meta.url));
const { lines_of, short_value, tick_text, ticks, ticks_with_room, zoomed } = await from("axis_chart");
const { falls_of, merge_counts, steps_of } = await from("staircase");
const { EventParser } = await from("events");
const { JobBook, passes } = await from("jobs");
const scene = await from("node_scene");
const words = await from("words");
const { request_of, value_of } = await from("ask_form");
const { problem_of } = await from("api");
const { SHAPES } = await from("mark");
const { axis_of } = await from("job_view");

const settled = () => new Promise((go) => { setTimeout(go, 0); });

test("numbers are written as the text report writes them", () => {
  assert.equal(words.grouped(1234567), "1,234,567");
  assert.equal(words.grouped(999), "999");
  assert.equal(words.counted(1, "entry"), "1 entry");
  assert.equal(words.counted(2, "entry"), "2 entries");
  assert.equal(words.counted(1200, "zero direction"), "1,200 zero directions");
  assert.equal(words.rounded(1.5408907483305256e-9), "1.54e-09");
  assert.equal(words.rounded(1e-6), "1e-06");
  assert.equal(words.rounded(0), "0");
  assert.equal(words.rounded(123456), "123000");
  assert.equal(words.rounded(1.5e120), "1.5e+120");
  assert.equal(words.bytes(17000000), "17 MB");
  assert.equal(words.bytes(999), "999 B");
  assert.equal(words.bytes(1500), "1.5 kB");
  assert.equal(words.seconds(0.0004), "<1 ms");
  assert.equal(words.seconds(0.25), "250 ms");
  assert.equal(words.seconds(3), "3 s");
  assert.equal(words.percent(0.0004), "<0.1 %");
  assert.equal(words.percent(0.10210768697449463), "10 %");
});

test("doubles are shown with the digits that tell them apart", () => {
  const value = 1.6164418907346163;
  assert.equal(Number(words.exact(value)), value);
});

test("every outcome has a word and a shape of its own, whatever the colour", () => {
  const names = Object.keys(words.STANDING);
  assert.equal(new Set(names.map((name) => words.STANDING[name])).size, names.length);
  assert.equal(new Set(names.map((name) => JSON.stringify(SHAPES[name]))).size, names.length);
  for (const name of names) assert.ok(SHAPES[name], name);
});

test("exit codes become outcomes", () => {
  const of = (state, exit_code) => words.standing_of({ state, exit_code });
  assert.equal(of("done", 0), "good");
  assert.equal(of("done", 1), "not_good");
  assert.equal(of("done", 3), "unresolved");
  assert.equal(of("done", 5), "failed");
  assert.equal(of("running", null), "running");
  assert.equal(of("cancelled", null), "cancelled");
});

test("the weakest statement decides what backs the answer", () => {
  const result = { risk: 0, risk_allowed: 1e-6, counts: [{ level: "proved" }, { level: "proved" }] };
  assert.equal(words.standing_sentence(result), "Backed by proof throughout; no statement rests on chance.");
  result.counts[1].level = "statistical";
  result.risk = 2e-7;
  assert.equal(words.standing_sentence(result),
    "Backed by statistics where not by proof; the risk that any statement is wrong is at most 2e-07 (allowed: 1e-06).");
  result.counts[0].level = "none";
  assert.match(words.standing_sentence(result), /^Not certified in every part/);
  // A bracket whose completeness is not shown is not certified, whatever its values say.
  assert.match(words.standing_sentence({ risk: 0, critical: [{ level: "proved" }], complete: null }), /^Not certified/);
  assert.match(words.standing_sentence({ risk: 0, forecast: {} }), /^Nothing was factored/);
});

test("a certificate says level, way, bounds and assumptions", () => {
  const rows = words.certificate_in_words({ level: "proved", method: "offsets", precision: "double", resolution: 1e-11, error_bound: 1e-13,
    relative_bound: null, failure_probability: null, assumptions: ["rounding is IEEE 754"], smallest_eigenvalue_above: 2e-12,
    smallest_eigenvalue_of_k_above: null, runs: [{ offset: 1e-11, negative: 0, error_bound: 1e-13 }] });
  const text = rows.map((row) => row.join(": ")).join("\n");
  for (const part of ["backed by: proof", "one factorization", "rounding errors at most 1e-13", "1e-11", "exceeds 2e-12", "rounding is IEEE 754"]) assert.ok(text.includes(part), part);
  assert.equal(words.certificate_in_words({ level: "none", assumptions: [], runs: [] })[0][1], "nothing: no certificate");
});

test("a narrow axis has two labels at least, and room between them", () => {
  for (const [low, high] of [[1.61, 1.69], [0, 3], [-2.4, 2.4], [0.999, 1.001], [12, 3400], [-1.9, 1.9], [1.5, 1.95]]) {
    for (const pixels of [220, 284, 600, 1800]) {
      const { step, list } = ticks_with_room(low, high, pixels);
      assert.ok(list.length >= 2, `${low} to ${high} on ${pixels}: ${list}`);
      const widest = Math.max(...list.map((at) => tick_text(at, step).length));
      assert.ok(step / (high - low) * pixels >= widest * 7, `${list} on ${pixels}`);
    }
  }
});

test("ticks are 1, 2 or 5 times a power of ten and lie inside", () => {
  for (const [low, high] of [[0, 1], [-3, 3.3], [1.61644, 1.61645], [1e6, 3e9]]) {
    const { step, list } = ticks(low, high, 6);
    assert.ok([1, 2, 5, 10].includes(Math.round(step / 10 ** Math.floor(Math.log10(step) + 1e-9))), `${step}`);
    assert.ok(list.length >= 2 && list.length <= 13, `${list.length}`);
    for (const at of list) assert.ok(at >= low - step * 1e-6 && at <= high + step * 1e-6);
    assert.equal(new Set(list.map((at) => tick_text(at, step))).size, list.length, "labels differ");
  }
});

test("zooming keeps what is under the pointer and stays inside", () => {
  const all = [0, 10];
  const [low, high] = zoomed([2, 6], 3, 0.5, all);
  assert.ok(Math.abs((3 - low) / (high - low) - 0.25) < 1e-12);
  assert.equal(high - low, 2);
  assert.deepEqual(zoomed([2, 6], 3, 100, all), [0, 10]);
  let window = [...all];
  for (let k = 0; k < 500; k += 1) window = zoomed(window, 3.3, 0.5, all);
  assert.ok(window[1] > window[0], "never without width");
});

test("a place on the axis becomes a short number within its pixel", () => {
  for (const [value, pixel] of [[1.5532871, 0.004], [-0.0331, 0.01], [123456.7, 900], [0.00012345, 1e-6]]) {
    const short = short_value(value, pixel);
    assert.ok(Math.abs(short - value) <= pixel, `${short}`);
    assert.ok(String(short).length <= 9, `${short}`);
  }
});

test("words break into lines", () => {
  assert.deepEqual(lines_of("one two three", 7), ["one two", "three"]);
  assert.deepEqual(lines_of("one", 1), ["one"]);
});

const count = (shift, below, level = "proved") => ({ shift, below, level, below_range: [below ?? 0, below ?? 9], meaning: "critical factors between 0 and the shift" });

test("added counts join the staircase in order; the better backed one stays", () => {
  const merged = merge_counts([[count(2, 4), count(1, 0, "statistical")], [count(1.5, 1), count(1, 0)]]);
  assert.deepEqual(merged.map((one) => one.shift), [1, 1.5, 2]);
  assert.equal(merged[0].level, "proved");
  assert.deepEqual(steps_of([count(1, 0), count(2, null, "none"), count(3, 4)]), [{ low: 1, high: 3, from: 0, to: 4 }]);
});

test("counts of factors that fall as the load grows are called a contradiction", () => {
  const meaning = "critical factors between 0 and the shift";
  assert.equal(falls_of([count(1, 2), count(2, 4)], meaning).length, 0);
  assert.equal(falls_of([count(1, 2), count(2, 1)], meaning).length, 1);
  assert.equal(falls_of([count(-2, 3), count(-1, 1)], meaning).length, 0);
  assert.equal(falls_of([{ ...count(1, 2), holds_outside: [0.9, 2.1] }, count(2, 1)], meaning).length, 0);
  assert.equal(falls_of([count(-2, 1), count(-1, 3)], meaning).length, 1);
  assert.equal(falls_of([count(1, 2), count(2, 1)], "negative directions of K + f G").length, 0);
});

test("the axis names its pencil", () => {
  assert.match(axis_of({ inputs: { geometric: {}, mass: null } }), /factor f/);
  assert.match(axis_of({ inputs: { geometric: null, mass: {} } }), /frequency/);
  assert.match(axis_of({ inputs: { geometric: null, mass: null } }), /mixed units/);
});

// WHATWG HTML, "Server-sent events", parsing an event stream: line ends, comments, one leading blank, several data lines.
test("events are read however the bytes are cut", () => {
  const text = ": hello\n\nid: 7\nevent: job\ndata: {\"a\":\ndata:1}\n\ndata: x\r\n\r\nid: 8\nevent: removed\ndata: {}\n\nevent: empty\n\n";
  for (let cut = 0; cut <= text.length; cut += 1) {
    for (const parts of [[text.slice(0, cut), text.slice(cut)], [...text]]) {
      const events = [];
      const parser = new EventParser((event) => events.push(event));
      for (const part of parts) parser.feed(part);
      assert.deepEqual(events, [{ type: "job", data: "{\"a\":\n1}", id: "7" }, { type: "message", data: "x", id: "7" }, { type: "removed", data: "{}", id: "8" }], `cut at ${cut}`);
      if (cut > 0 && parts.length > 2) break;
    }
  }
});

const job = (k, more = {}) => ({ id: `j-${String(k).padStart(6, "0")}`, command: "check", title: null, state: "done", exit_code: 0, headline: `answer ${k}`,
  created: new Date(1.7e12 + 1000 * k).toISOString(), ...more });

test("ten thousand jobs come in pages, stay ordered, and are filtered", async () => {
  const all = Array.from({ length: 10000 }, (_, k) => job(9999 - k, { command: k % 2 ? "check" : "sweep" }));
  const api = { jobs: async ({ limit, cursor = "0" }) => {
    const at = Number(cursor);
    return { jobs: all.slice(at, at + limit).map((one) => ({ ...one })), total: all.length, next: at + limit < all.length ? String(at + limit) : null };
  } };
  const book = new JobBook();
  await book.load(api, 20000);
  await settled();
  assert.equal(book.shown.length, 10000);
  book.put(job(20000));
  book.put(job(5000.5));
  await settled();
  assert.equal(book.order[0].id, "j-020000");
  for (let k = 1; k < book.order.length; k += 1) assert.ok(book.order[k - 1].created >= book.order[k].created);
  book.set_filter({ text: "answer 77", standing: "good", command: "sweep" });
  await settled();
  assert.ok(book.shown.length > 0 && book.shown.every((one) => one.command === "sweep" && `${one.id} ${one.headline}`.includes("77")));
  book.set_filter({});
  book.remove("j-020000");
  await settled();
  assert.equal(book.shown.length, 10001);
});

test("a late event does not bring an ended job back to life; a list read again drops what is gone", async () => {
  const book = new JobBook();
  book.put(job(1, { state: "running" }));
  book.put(job(1, { state: "done" }));
  book.put(job(1, { state: "running" }));
  assert.equal(book.by_id.get("j-000001").state, "done");
  book.put(job(3, { state: "running", cancelling: true }));
  book.put(job(3, { state: "cancelled" }));
  assert.equal(book.by_id.get("j-000003").cancelling, false);
  book.put(job(2));
  await book.load({ jobs: async () => ({ jobs: [job(2)], total: 1, next: null }) }, 100);
  await settled();
  assert.deepEqual(book.shown.map((one) => one.id), ["j-000002"]);
});

test("a phase that says only that it began has no fraction", () => {
  assert.equal(words.fraction_of({ phase: "order", done: 0, total: 1 }), null);
  assert.equal(words.fraction_of({ phase: "factor", done: 0.4, total: 1 }), 0.4);
  assert.equal(words.fraction_of(null), null);
});

test("a filter wants every word", () => {
  const one = job(1, { title: "North tower", headline: "K is indefinite" });
  assert.ok(passes(one, { text: "tower INDEF" }));
  assert.ok(!passes(one, { text: "tower south" }));
  assert.ok(!passes(one, { standing: "failed" }));
});

test("a view is orthonormal and right-handed, and turning does not stretch", () => {
  const dot = (a, b) => a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
  for (const [azimuth, elevation] of [[0, 0], [1, 0.4], [-2.5, 1.2], [4, -0.7]]) {
    const { right, up, toward } = scene.view_axes(azimuth, elevation);
    for (const axis of [right, up, toward]) assert.ok(Math.abs(dot(axis, axis) - 1) < 1e-12);
    assert.ok(Math.abs(dot(right, up)) + Math.abs(dot(up, toward)) + Math.abs(dot(right, toward)) < 1e-12);
    const cross = [right[1] * up[2] - right[2] * up[1], right[2] * up[0] - right[0] * up[2], right[0] * up[1] - right[1] * up[0]];
    assert.ok(cross.every((c, k) => Math.abs(c - toward[k]) < 1e-12));
    assert.ok(up[2] >= 0, "z is never seen upside down");
  }
});

test("everything fits into the picture", () => {
  const points = Float64Array.from({ length: 300 }, (_, k) => Math.sin(7.3 * k) * (k % 3 === 0 ? 50 : 4));
  const angles = scene.best_angles(points, null);
  const camera = { ...angles, ...scene.fit(points, angles, 640, 400, 30) };
  const flat = scene.project(points, camera, 640, 400, new Float64Array(300));
  for (let k = 0; k < 300; k += 3) {
    assert.ok(flat[k] >= 29.9 && flat[k] <= 610.1);
    assert.ok(flat[k + 1] >= 29.9 && flat[k + 1] <= 370.1);
  }
  const node = scene.nearest(flat, flat[30] + 1, flat[31], 12);
  assert.equal(Math.hypot(flat[3 * node] - flat[30] - 1, flat[3 * node + 1] - flat[31]) <= 1, true);
  assert.equal(scene.nearest(flat, -1000, -1000, 12), -1);
});

test("one point, or none, does no harm", () => {
  for (const points of [new Float64Array(0), Float64Array.from([1, 2, 3])]) {
    const angles = scene.best_angles(points, null);
    const camera = { ...angles, ...scene.fit(points, angles, 100, 100, 10) };
    assert.ok(Object.values(camera).every(Number.isFinite));
  }
});

test("a motion is seen from where it shows", () => {
  const place = Float64Array.from({ length: 192 }, (_, k) => [Math.floor(k / 3) % 4, Math.floor(k / 12) % 4, Math.floor(k / 48)][k % 3] - 1.5);
  for (const d of [0, 1, 2]) {
    const moved = Array.from({ length: 192 }, (_, k) => (k % 3 === d ? 1 : 0));
    const { azimuth, elevation } = scene.best_angles(place, moved);
    assert.ok(Math.abs(scene.view_axes(azimuth, elevation).toward[d]) < 0.8, `axis ${d}`);
  }
});

test("a motion displaces its nodes alone", () => {
  const place = Float64Array.from([0, 0, 0, 1, 1, 1]);
  const out = scene.displace(place, { nodes: [1], moved: [0, 0, 1] }, 2, -0.5, new Float64Array(6));
  assert.deepEqual([...out], [0, 0, 0, 1, 1, 0]);
});

const option = (key, kind) => ({ key, kind });

test("fields become a request, with the types that the settings have", () => {
  const request = request_of("count", { stiffness: "a/K.mtx", dofs: "", added: "a/G.mtx 0.5\nb c/F.mtx -1e3" }, [
    { option: option("at", "numbers"), text: "1.5, 1.65; 2 1e1" }, { option: option("threads", "whole"), text: "2" },
    { option: option("risk", "real"), text: "1e-7" }, { option: option("quiet", "flag"), text: true }, { option: option("strict", "flag"), text: false }, { option: option("title", "text"), text: "" }]);
  assert.deepEqual(request, { command: "count", inputs: { stiffness: "a/K.mtx", added: [{ path: "a/G.mtx", factor: 0.5 }, { path: "b c/F.mtx", factor: -1000 }] },
    options: { at: [1.5, 1.65, 2, 10], threads: 2, risk: 1e-7, quiet: true } });
});

test("what is no number is refused in words", () => {
  assert.throws(() => value_of(option("from", "real"), "1,5x"), /from: "1,5x" is no number/);
  assert.throws(() => value_of(option("points", "whole"), "2.5"), /no whole number/);
  assert.throws(() => request_of("check", { added: "only-a-path" }, []), /write the path/);
});

// RFC 9457.
test("every error is a problem with its remedy, also where the answer is none", async () => {
  const problem = await problem_of(new Response(JSON.stringify({ type: "about:blank", title: "No", status: 422, detail: "why", remedy: "so" }), { status: 422 }));
  assert.equal(problem.title, "No");
  assert.equal(problem.remedy, "so");
  const other = await problem_of(new Response("<html>", { status: 502 }));
  assert.equal(other.status, 502);
  assert.ok(other.title && other.remedy);
});
