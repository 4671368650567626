// The service's API as functions. Every failure is thrown as a Problem (RFC 9457) with what usually helps.

export class Problem extends Error {
  constructor(document) {
    super(document.detail ?? document.title);
    Object.assign(this, { status: 0, title: "Something went wrong", detail: "", place: null, remedy: null }, document);
  }
}

const unreachable = () => new Problem({
  title: "The server cannot be reached", detail: "No answer came over the network.", code: "unreachable",
  remedy: "See whether stanchion serve still runs; this page tries again by itself.",
});

export async function problem_of(response) {
  try {
    const document = await response.json();
    if (document && typeof document === "object" && document.title) return new Problem({ status: response.status, ...document });
  } catch { /* not JSON: the status has to do */ }
  return new Problem({ status: response.status, title: `The server answered ${response.status}`,
    detail: response.statusText, remedy: "Try again; if it stays, look into the server's log." });
}

export class Api {
  /// The token lives as long as the tab: in memory and in its session storage, nowhere else.
  constructor(storage = globalThis.sessionStorage) {
    this.storage = storage;
    this.on_token_needed = () => {};
  }

  get token() { return this.storage?.getItem("stanchion-token") ?? ""; }

  set token(text) {
    if (text) this.storage?.setItem("stanchion-token", text);
    else this.storage?.removeItem("stanchion-token");
  }

  headers(more = {}) {
    return this.token ? { ...more, Authorization: `Bearer ${this.token}` } : more;
  }

  async fetch(path, options = {}) {
    let response;
    try {
      response = await fetch(path, { cache: "no-store", ...options, headers: this.headers(options.headers) });
    } catch (failure) {
      if (failure.name === "AbortError") throw failure;
      throw unreachable();
    }
    if (response.ok) return response;
    const problem = await problem_of(response);
    if (response.status === 401) this.on_token_needed(problem);
    throw problem;
  }

  async json(path, options) { return (await this.fetch(path, options)).json(); }

  post(path, document, headers = {}) {
    return this.json(path, { method: "POST", body: document === null ? null : JSON.stringify(document),
      headers: document === null ? headers : { "Content-Type": "application/json", ...headers } });
  }

  service() { return this.json("/v1/service"); }
  commands() { return this.json("/v1/commands"); }
  files(path) { return this.json(path ? `/v1/files?path=${encodeURIComponent(path)}` : "/v1/files"); }
  jobs(query) { return this.json(`/v1/jobs?${new URLSearchParams(query)}`); }
  job(id) { return this.json(`/v1/jobs/${id}`); }
  result(id) { return this.json(`/v1/jobs/${id}/result`); }
  view(id) { return this.json(`/v1/jobs/${id}/view`); }
  cancel(id) { return this.post(`/v1/jobs/${id}/cancel`, null); }
  remove(id) { return this.fetch(`/v1/jobs/${id}`, { method: "DELETE" }); }

  /// The key lets a request that was sent twice (a lost answer) make one job only.
  submit(request, key = crypto.randomUUID()) { return this.post("/v1/jobs", request, { "Idempotency-Key": key }); }

  async blob(path) { return (await this.fetch(path)).blob(); }

  /// Tells `progress` how much has gone, 0 to 1. The handle's `done` settles with {digest, bytes, name, known}.
  upload(file, progress) {
    const request = new XMLHttpRequest();
    const done = new Promise((settle, fail) => {
      request.open("POST", `/v1/inputs?name=${encodeURIComponent(file.name)}`);
      for (const [name, value] of Object.entries(this.headers({ "Content-Type": "application/octet-stream" }))) {
        request.setRequestHeader(name, value);
      }
      request.upload.onprogress = (event) => { if (event.lengthComputable) progress(event.loaded / event.total); };
      request.onerror = () => fail(unreachable());
      request.onabort = () => fail(new Problem({ title: "The upload was stopped", code: "stopped" }));
      request.onload = async () => {
        const response = new Response(request.responseText || "{}", { status: request.status || 500 });
        if (response.ok) return settle(await response.json());
        const problem = await problem_of(response);
        if (problem.status === 401) this.on_token_needed(problem);
        return fail(problem);
      };
      request.send(file);
    });
    return { done, stop: () => request.abort() };
  }
}
