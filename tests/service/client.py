"""Starts the service and speaks to it; holds every answer against data/openapi.json."""

import http.client
import json
import os
import pathlib
import re
import signal
import subprocess
import tempfile
import time
import unittest

import jsonschema

PROGRAM = os.environ["STANCHION_PROGRAM"]
SOURCE = pathlib.Path(os.environ["STANCHION_SOURCE"])
API = json.loads((SOURCE / "data/openapi.json").read_text(encoding="utf-8"))


def resolved(schema):
    """The schema with its own definitions at hand."""
    return {**schema, "components": API["components"]}


def described(method, path):
    """The operation that the description has for a request, and the template of its path."""
    path = path.split("?")[0]
    for template in sorted(API["paths"], key=lambda text: text.count("{")):
        if re.fullmatch(re.sub(r"\{[a-z]+\}", "[^/]+", template), path):
            operation = API["paths"][template].get(method.lower())
            if operation:
                return operation
    return None


def check_answer(method, path, status, kind, body):
    """Every answer is one that the description promises."""
    operation = described("GET" if method == "HEAD" else method, path)
    if operation is None:
        assert status >= 400, f"{method} {path} gives {status} and is not described"
        schema = API["components"]["schemas"]["Problem"]
    else:
        response = operation["responses"].get(str(status))
        assert response is not None, f"{method} {path} gives {status}, which is not described: {body[:300]}"
        if "$ref" in response:
            response = API["components"]["responses"][response["$ref"].split("/")[-1]]
        content = response.get("content", {})
        if not content:
            return
        base = kind.split(";")[0]
        assert base in content, f"{method} {path} gives {kind}"
        schema = content[base]["schema"]
    if method != "HEAD" and "json" in kind:
        jsonschema.Draft202012Validator(resolved(schema)).validate(json.loads(body))


class Answer:
    def __init__(self, status, headers, body):
        self.status, self.headers, self.body = status, headers, body

    def json(self):
        return json.loads(self.body)


class Service:
    """One running service; `stop` or `kill` ends it."""

    def __init__(self, store, *options, token=None, scheme="http", environment=None, log=None, type_log=True):
        self.token = token
        self.log = log or pathlib.Path(store).parent / "service.log"
        self.errors = open(pathlib.Path(store).parent / "service.err", "a", encoding="utf-8")
        self.process = subprocess.Popen(
            [PROGRAM, "serve", "--store", str(store), "--port", "0", *(["--log", str(self.log)] if type_log else []),
             *map(str, options)],
            stdout=subprocess.PIPE, stderr=self.errors, text=True, env={**os.environ, **(environment or {})})
        line = self.process.stdout.readline()
        found = re.match(scheme + r"://.*:(\d+)/", line.removeprefix("listening on "))
        if not found:
            self.process.wait()
            raise RuntimeError("the service did not start: " + pathlib.Path(self.errors.name).read_text())
        self.port = int(found[1])

    def connect(self):
        return http.client.HTTPConnection("127.0.0.1", self.port, timeout=120)

    def ask(self, method, path, body=None, headers=None, connection=None, check=True):
        fields = dict(headers or {})
        if self.token and "Authorization" not in fields:
            fields["Authorization"] = "Bearer " + self.token
        if isinstance(body, (dict, list)):
            body = json.dumps(body)
            fields.setdefault("Content-Type", "application/json")
        if isinstance(body, (bytes, bytearray)):
            fields.setdefault("Content-Type", "application/octet-stream")
        own = connection or self.connect()
        try:
            own.request(method, path, body=body, headers=fields)
            response = own.getresponse()
            answer = Answer(response.status, response.headers, response.read())
        finally:
            if connection is None:
                own.close()
        if check:
            check_answer(method, path, answer.status, answer.headers.get("Content-Type", ""), answer.body)
        return answer

    def submit(self, request, **headers):
        answer = self.ask("POST", "/v1/jobs", request, {k.replace("_", "-"): v for k, v in headers.items()})
        assert answer.status == 202, answer.body
        assert answer.headers["Location"] == "/v1/jobs/" + answer.json()["id"]
        return answer.json()

    def wait(self, job, seconds=100):
        until = time.monotonic() + seconds
        while time.monotonic() < until:
            now = self.ask("GET", "/v1/jobs/" + job).json()
            if now["state"] not in ("queued", "running"):
                return now
            time.sleep(0.05)
        raise AssertionError(f"job {job} has not ended: {now}")

    def stop(self):
        self.process.send_signal(signal.SIGTERM)
        code = self.process.wait(timeout=60)
        self.close()
        return code

    def kill(self):
        self.process.kill()
        self.process.wait()
        self.close()

    def close(self):
        self.process.stdout.close()
        self.errors.close()


def children(process):
    """The process numbers of what a process has started."""
    try:
        with open(f"/proc/{process}/task/{process}/children", encoding="ascii") as file:
            direct = file.read().split()
        for task in os.listdir(f"/proc/{process}/task"):
            with open(f"/proc/{process}/task/{task}/children", encoding="ascii") as file:
                direct += file.read().split()
        return [int(child) for child in set(direct)]
    except OSError:
        return []


class ServiceTest(unittest.TestCase):
    """Each test has a folder with a store and a root "models"; services are stopped at its end."""

    def setUp(self):
        folder = tempfile.TemporaryDirectory()
        self.addCleanup(folder.cleanup)
        self.folder = pathlib.Path(folder.name)
        self.models = self.folder / "models"
        self.models.mkdir()
        self.store = self.folder / "store"

    def serve(self, *options, **more):
        service = Service(self.store, "--root", f"models={self.models}", *options, **more)
        self.addCleanup(lambda: service.process.poll() is None and service.kill())
        return service

    def problem(self, answer, status, code):
        self.assertEqual((answer.status, answer.headers["Content-Type"]), (status, "application/problem+json"),
                         answer.body)
        document = answer.json()
        self.assertEqual((document["status"], document["code"]), (status, code), document)
        return document


def chain_text(rows, held=1):
    """Springs in a row as a Matrix Market file; held at one end definite, at none singular."""
    lines = [f"{rows} {rows} {2 * rows - 1}"]
    for i in range(1, rows + 1):
        ends = (i == rows) + (i == 1 and held == 0)
        lines.append(f"{i} {i} {2 - ends}")
        if i < rows:
            lines.append(f"{i + 1} {i} -1")
    return "%%MatrixMarket matrix coordinate real symmetric\n" + "\n".join(lines) + "\n"
