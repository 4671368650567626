// All jobs that are known, the newest first, and those of them that pass a filter.

import { standing_of } from "./words.js";

const PAGE = 500;

function later_first(a, b) {
  if (a.created !== b.created) return a.created < b.created ? 1 : -1;
  return a.id < b.id ? 1 : a.id > b.id ? -1 : 0;
}

/// Whether the job has all words of `text`, and the standing and command asked ("" for any).
export function passes(job, { text = "", standing = "", command = "" }) {
  if (command && job.command !== command) return false;
  if (standing && standing_of(job) !== standing) return false;
  if (!text) return true;
  const hay = `${job.id} ${job.command} ${job.title ?? ""} ${job.headline ?? ""} ${job.problem?.detail ?? ""}`.toLowerCase();
  return text.toLowerCase().split(/\s+/).every((word) => hay.includes(word));
}

/// `known` as `job` says it now; a member that is there only at times goes with it.
export function renew(known, job) {
  return Object.assign(known, { cancelling: false }, job);
}

export class JobBook {
  constructor() {
    this.by_id = new Map();
    this.order = [];
    this.filter = {};
    this.shown = [];
    this.total = 0;
    this.next = null;
    this.listeners = new Set();
    this.pending = false;
  }

  listen(listener) {
    this.listeners.add(listener);
    return () => this.listeners.delete(listener);
  }

  changed() {
    if (this.pending) return;
    this.pending = true;
    queueMicrotask(() => {
      this.pending = false;
      this.sift();
      for (const listener of this.listeners) listener(this);
    });
  }

  sift() {
    const all = !this.filter.text && !this.filter.standing && !this.filter.command;
    this.shown = all ? this.order : this.order.filter((job) => passes(job, this.filter));
  }

  set_filter(filter) {
    this.filter = filter;
    this.changed();
  }

  /// An event can be older than what a list has said already: a job that has ended stays ended.
  put(job) {
    const known = this.by_id.get(job.id);
    if (known) {
      const ended = (state) => state !== "queued" && state !== "running";
      if (ended(known.state) && !ended(job.state)) return;
      renew(known, job);
    } else {
      this.by_id.set(job.id, job);
      const at = this.place_of(job);
      this.order.splice(at, 0, job);
      this.order = this.order.slice();
    }
    this.changed();
  }

  put_all(jobs) {
    let fresh = false;
    for (const job of jobs) {
      const known = this.by_id.get(job.id);
      if (known) renew(known, job);
      else { this.by_id.set(job.id, job); fresh = true; }
    }
    if (fresh) this.order = [...this.by_id.values()].sort(later_first);
    this.changed();
  }

  place_of(job) {
    let low = 0, high = this.order.length;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (later_first(this.order[middle], job) < 0) low = middle + 1; else high = middle;
    }
    return low;
  }

  remove(id) {
    if (!this.by_id.delete(id)) return;
    this.order = this.order.filter((job) => job.id !== id);
    this.total = Math.max(0, this.total - 1);
    this.changed();
  }

  /// Reads the list again, page by page, up to `most` jobs; what is no longer there goes. A later call ends an earlier one.
  async load(api, most) {
    const turn = (this.turn = (this.turn ?? 0) + 1);
    const seen = new Set();
    let cursor = null;
    do {
      const page = await api.jobs(cursor ? { limit: PAGE, cursor } : { limit: PAGE });
      if (turn !== this.turn) return;
      for (const job of page.jobs) seen.add(job.id);
      this.total = page.total;
      this.put_all(page.jobs);
      cursor = page.next;
    } while (cursor && seen.size < most);
    this.next = cursor;
    if (!cursor) {
      const young = Date.now() - 10000;  // what came while the pages were read is not missing
      for (const job of this.order) {
        if (!seen.has(job.id) && Date.parse(job.created) < young) this.by_id.delete(job.id);
      }
      this.order = this.order.filter((job) => this.by_id.has(job.id));
    }
    this.changed();
  }

  /// The next older ones, after what `load` has read.
  async older(api, many) {
    let left = many;
    while (this.next && left > 0) {
      const page = await api.jobs({ limit: PAGE, cursor: this.next });
      this.next = page.next;
      this.total = page.total;
      left -= page.jobs.length;
      this.put_all(page.jobs);
    }
  }
}
