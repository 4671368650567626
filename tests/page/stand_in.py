"""A stand-in for the service, for looking at the page alone: answers the same API from memory and from the real
program. Not a service: no limits, no tokens, nothing durable. Usage: stand_in.py PORT [--jobs N] [--root FOLDER]"""

import argparse
import hashlib
import http.server
import json
import os
import pathlib
import queue
import subprocess
import tempfile
import threading
import time
import urllib.parse

SOURCE = pathlib.Path(os.environ.get("STANCHION_SOURCE", pathlib.Path(__file__).parents[2]))
PROGRAM = os.environ.get("STANCHION_PROGRAM", str(SOURCE / "build/release/bin/stanchion"))
KINDS = {".html": "text/html", ".js": "text/javascript", ".css": "text/css", ".svg": "image/svg+xml"}
POLICY = ("default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self' data: blob:; connect-src 'self'; "
          "base-uri 'none'; form-action 'none'; frame-ancestors 'none'")
FILES = {"result": "result.json", "view": "view.json", "report": "report.html", "csv": "numbers.csv", "text": "text.txt"}


def option(key, kind, help_text, group="Question", choices=(), required=False, value=""):
    return {"key": key, "option": f"--{key.replace('_', '-')}", "kind": kind, "value": value, "help": help_text, "group": group,
            "required": required, "choices": list(choices)}


def tables():
    stiffness = option("stiffness", "file", "the stiffness matrix", "Files", required=True)
    common = [option(key, "file", text, "Files") for key, text in
              (("dofs", "equation, node and dof of every equation"), ("nodes", "places of the nodes"), ("fix", "equations that are held"))]
    geometric = option("geometric", "file", "the geometric stiffness matrix of the load", "Files")
    mass = option("mass", "file", "the mass matrix", "Files")
    title = option("title", "text", "printed above the answer", "Output")
    own = {
        "check": ([], [option("expect", "text", "positive-definite, zero:N or negative:N"), option("resolution", "real", "what counts as zero", "Certificate")]),
        "count": ([geometric, mass], [option("at", "numbers", "the shifts", required=True)]),
        "sweep": ([geometric, mass], [option("from", "real", "where the range begins"), option("to", "real", "where it ends"),
                                      option("points", "whole", "how many shifts"), option("refine", "flag", "count again where it jumps"),
                                      option("spacing", "text", "of the shifts", choices=("linear", "geometric"))]),
        "bracket": ([geometric, mass], [option("first", "whole", "how many of the lowest"), option("below", "real", "all below it")]),
        "audit": ([geometric, mass, option("values", "file", "the list", "Files")], []),
        "locate": ([mass], []), "forecast": ([geometric, mass], []),
    }
    return [{"name": name, "summary": name, "inputs": [stiffness, *inputs, *common], "options": [*options, title]}
            for name, (inputs, options) in own.items()]


class Service:
    def __init__(self, root, made_up):
        self.root, self.lock, self.listeners = pathlib.Path(root), threading.Lock(), []
        self.jobs, self.folder, self.count, self.events = {}, pathlib.Path(tempfile.mkdtemp(prefix="page_stand_in_")), 0, 0
        begin = time.time() - made_up
        for k in range(made_up):
            job = self.new_job({"command": ("check", "count", "sweep", "locate")[k % 4], "inputs": {"stiffness": "made/up.mtx"}, "options": {"title": f"Variant {k}"}}, begin + k)
            job.update(state=("done", "done", "failed", "cancelled", "done")[k % 5], exit_code=(0, 1, None, None, 3)[k % 5],
                       headline=f"Answer number {k} of a long series of variants of the same model.", started=job["created"], finished=job["created"])

    def new_job(self, request, when):
        self.count += 1
        stamp = time.strftime("%Y-%m-%dT%H:%M:%S", time.gmtime(when)) + f".{int(when % 1 * 1000):03d}Z"
        job = {"id": f"j-{self.count:08d}", "command": request["command"], "title": request.get("options", {}).get("title"), "state": "queued",
               "created": stamp, "started": None, "finished": None, "attempts": 0, "continues": request.get("continues"), "progress": None,
               "forecast": {"seconds": 0.2, "peak_bytes": 17000000}, "memory_bytes": 134217728, "exit_code": None, "headline": None,
               "problem": None, "files": [], "request": {k: v for k, v in request.items() if k != "continues"}}
        self.jobs[job["id"]] = job
        return job

    def tell(self, job):
        with self.lock:
            self.events += 1
            text = json.dumps({key: value for key, value in job.items() if key != "request"})
            for listener in self.listeners:
                listener.put(f"id: {self.events}\nevent: job\ndata: {text}\n\n")

    def submit(self, request):
        job = self.new_job(request, time.time())
        self.tell(job)
        threading.Thread(target=self.run, args=(job,), daemon=True).start()
        return job

    def path_of(self, name):
        return str(self.folder / name[7:]) if name.startswith("sha256:") else str(self.root.parent / name)

    def run(self, job):
        request, folder = job["request"], self.folder / job["id"]
        folder.mkdir()
        job.update(state="running", started=job["created"], attempts=1)
        for k in range(3):
            job["progress"] = {"phase": ("read", "factor", "certify")[k], "done": k, "total": 3}
            self.tell(job)
            time.sleep(0.15)
        inputs = dict(request["inputs"])
        command = [PROGRAM, request["command"], self.path_of(inputs.pop("stiffness"))]
        for key, name in inputs.items():
            command += [f"--{key}", self.path_of(name)]
        for key, value in request.get("options", {}).items():
            text = ",".join(map(repr, value)) if isinstance(value, list) else str(value)
            command += [f"--{key.replace('_', '-')}"] + ([] if value is True else [text])
        command += ["--json", folder / "result.json", "--html", folder / "report.html", "--csv", folder / "numbers.csv"]
        if request["command"] == "locate":
            command += ["--view", folder / "view.json"]
        run = subprocess.run(command, capture_output=True, text=True, check=False)
        (folder / "text.txt").write_text(run.stdout)
        job.update(exit_code=run.returncode, finished=job["created"], files=[name for name, file in FILES.items() if (folder / file).exists()])
        if "result" in job["files"]:
            job.update(state="done", headline=json.loads((folder / "result.json").read_text())["in_words"][0])
        else:
            first, *rest = run.stderr.splitlines()
            job.update(state="failed", problem={"type": "about:blank", "title": "The job has no answer", "status": 422, "code": "bad",
                                                "detail": first, "remedy": rest[0].replace("  remedy: ", "") if rest else None})
        self.tell(job)


class Handler(http.server.BaseHTTPRequestHandler):
    protocol_version = "HTTP/1.1"
    service = None

    def log_message(self, *_):
        pass

    def answer(self, status, body, kind="application/json"):
        data = body if isinstance(body, bytes) else json.dumps(body).encode()
        self.send_response(status)
        for name, value in (("Content-Type", kind), ("Content-Length", len(data)), ("Content-Security-Policy", POLICY)):
            self.send_header(name, str(value))
        self.end_headers()
        self.wfile.write(data)

    def problem(self, status, title, detail, remedy):
        self.answer(status, {"type": "about:blank", "title": title, "status": status, "detail": detail, "code": "none", "remedy": remedy}, "application/problem+json")

    def do_GET(self):
        url = urllib.parse.urlparse(self.path)
        query = dict(urllib.parse.parse_qsl(url.query))
        parts = url.path.strip("/").split("/")
        service = self.service
        if parts[0] != "v1":
            file = SOURCE / "data/page" / (parts[0] or "index.html")
            if not file.is_file():
                return self.problem(404, "Not found", url.path, "see /")
            return self.answer(200, file.read_bytes(), KINDS[file.suffix])
        if parts[1] == "service":
            return self.answer(200, {"program": "stanchion", "version": "0", "api": "v1", "roots": [service.root.name], "limits": {}, "tokens_needed": False, "scopes": ["read", "submit", "admin"]})
        if parts[1] == "commands":
            return self.answer(200, {"commands": tables()})
        if parts[1] == "files":
            return self.files(query.get("path", ""))
        if parts[1] == "events":
            return self.events()
        if parts[1] == "jobs" and len(parts) == 2:
            jobs = [job for job in reversed(service.jobs.values()) if "continues" not in query or job["continues"] == query["continues"]]
            at, limit = int(query.get("cursor", 0)), int(query.get("limit", 50))
            page = [{key: value for key, value in job.items() if key != "request"} for job in jobs[at:at + limit]]
            return self.answer(200, {"jobs": page, "total": len(jobs), "next": str(at + limit) if at + limit < len(jobs) else None})
        job = service.jobs.get(parts[2])
        if job is None:
            return self.problem(404, "There is no such job", f"no job is called {parts[2]}", "choose one from the list")
        if len(parts) == 3:
            return self.answer(200, job)
        return self.answer(200, (service.folder / job["id"] / FILES[parts[3]]).read_bytes(), "application/json" if parts[3] in ("result", "view") else "text/plain")

    def files(self, path):
        base = self.service.root
        if not path:
            return self.answer(200, {"path": "", "parent": None, "entries": [{"name": base.name, "path": base.name, "kind": "folder", "bytes": None, "modified": None}], "truncated": False})
        folder = base.parent / path
        entries = [{"name": one.name, "path": f"{path}/{one.name}", "kind": "folder" if one.is_dir() else "file", "bytes": None if one.is_dir() else one.stat().st_size, "modified": None}
                   for one in sorted(folder.iterdir())]
        return self.answer(200, {"path": path, "parent": path.rpartition("/")[0], "entries": entries, "truncated": False})

    def events(self):
        self.send_response(200)
        self.send_header("Content-Type", "text/event-stream")
        self.send_header("Connection", "close")
        self.end_headers()
        mine = queue.Queue()
        self.service.listeners.append(mine)
        try:
            while True:
                try:
                    text = mine.get(timeout=5)
                except queue.Empty:
                    text = ": still here\n\n"
                self.wfile.write(text.encode())
                self.wfile.flush()
        except OSError:
            self.service.listeners.remove(mine)
        self.close_connection = True

    def do_POST(self):
        body = self.rfile.read(int(self.headers.get("Content-Length") or 0))
        parts = urllib.parse.urlparse(self.path).path.strip("/").split("/")
        if parts[1] == "inputs":
            digest = hashlib.sha256(body).hexdigest()
            (self.service.folder / digest).write_bytes(body)
            return self.answer(201, {"digest": digest, "bytes": len(body), "name": dict(urllib.parse.parse_qsl(urllib.parse.urlparse(self.path).query)).get("name"), "known": False})
        if len(parts) == 2:
            return self.answer(202, self.service.submit(json.loads(body)))
        job = self.service.jobs[parts[2]]
        job.update(state="cancelled")
        self.service.tell(job)
        return self.answer(202, job)

    def do_DELETE(self):
        del self.service.jobs[self.path.rpartition("/")[2]]
        self.answer(204, b"")


def serve(port, root, made_up):
    Handler.service = Service(root, made_up)
    server = http.server.ThreadingHTTPServer(("127.0.0.1", port), Handler)
    server.daemon_threads = True
    return server


if __name__ == "__main__":
    parser = argparse.ArgumentParser()
    parser.add_argument("port", type=int)
    parser.add_argument("--jobs", type=int, default=0)
    parser.add_argument("--root", default=str(SOURCE / "data/demo"))
    asked = parser.parse_args()
    serve(asked.port, asked.root, asked.jobs).serve_forever()
