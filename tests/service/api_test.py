"""The service as a client sees it: jobs, files, uploads, events, paging, errors."""

import hashlib
import json
import pathlib
import re
import shutil
import threading
import time
import unittest

import jsonschema
from prometheus_client.parser import text_string_to_metric_families

from client import API, SOURCE, ServiceTest, chain_text, children


class DescriptionTest(ServiceTest):
    def test_every_schema_is_a_schema_and_every_example_fits(self):
        for name, schema in API["components"]["schemas"].items():
            jsonschema.Draft202012Validator.check_schema(schema)
            for example in [schema["example"]] if "example" in schema else schema.get("examples", []):
                jsonschema.Draft202012Validator({**schema, "components": API["components"]}).validate(example)
        for path, item in API["paths"].items():
            for method, operation in item.items():
                if method == "parameters":
                    continue
                bodies = [operation.get("requestBody", {})]
                bodies += [response for response in operation["responses"].values() if "$ref" not in response]
                for body in bodies:
                    for content in body.get("content", {}).values():
                        if "example" in content:
                            schema = {**content["schema"], "components": API["components"]}
                            jsonschema.Draft202012Validator(schema).validate(content["example"])

    def test_the_document_is_openapi(self):
        # The schema that the OpenAPI Initiative gives for 3.0, from Debian's package openapi-specification: of 3.1 there
        # is none in it. Apart from schemas, which are held against theirs above, 3.1 added here only two facts.
        path = pathlib.Path("/usr/share/openapi-specification/schemas/v3.0/schema.json")
        if not path.exists():
            self.skipTest("openapi-specification is not installed")

        def without_schemas(node):
            if isinstance(node, list):
                return [without_schemas(item) for item in node]
            if not isinstance(node, dict):
                return node
            empty = {"schema": lambda _: {}, "schemas": lambda names: {name: {} for name in names}}
            return {key: empty.get(key, without_schemas)(value) for key, value in node.items()}

        self.assertEqual(API["openapi"], "3.1.0")
        document = {**without_schemas(API), "openapi": "3.0.3"}
        del document["info"]["summary"], document["info"]["license"]["identifier"]
        validator = jsonschema.Draft4Validator(json.loads(path.read_text(encoding="utf-8")))
        self.assertEqual([error.message for error in validator.iter_errors(document)], [])
        document["paths"]["/v1/jobs"]["get"]["responces"] = document["paths"]["/v1/jobs"]["get"].pop("responses")
        self.assertFalse(validator.is_valid(document))

    def test_references_and_parameters_of_the_description(self):
        text = json.dumps(API)
        for reference in set(re.findall(r'"\$ref": "([^"]+)"', text)):
            self.assertTrue(reference.startswith("#/"), reference)
            node = API
            for part in reference[2:].split("/"):
                node = node[part.replace("~1", "/").replace("~0", "~")]
        names = []
        for path, item in API["paths"].items():
            for method, operation in item.items():
                if method == "parameters":
                    continue
                names.append(operation["operationId"])
                parameters = item.get("parameters", []) + operation.get("parameters", [])
                parameters = [API["components"]["parameters"][entry["$ref"].split("/")[-1]] if "$ref" in entry else entry
                              for entry in parameters]
                declared = {entry["name"] for entry in parameters if entry["in"] == "path"}
                self.assertEqual(declared, set(re.findall(r"{([a-z]+)}", path)), path)
        self.assertEqual(len(set(names)), len(names))

    def test_it_is_served(self):
        self.assertEqual(self.serve().ask("GET", "/v1/openapi.json").json(), API)


class JobTest(ServiceTest):
    def setUp(self):
        super().setUp()
        for name in ("K.mtx", "G.mtx", "dofs.csv", "nodes.csv"):
            shutil.copy(SOURCE / "data/demo" / name, self.models / name)
        (self.models / "singular.mtx").write_text(chain_text(5, held=0))
        (self.models / "bad.mtx").write_text("%%MatrixMarket matrix coordinate real symmetric\n2 2 1\n3 3 1\n")

    def test_a_count_from_start_to_files(self):
        service = self.serve()
        job = service.submit({"command": "count", "inputs": {"stiffness": "models/K.mtx",
                                                             "geometric": str(self.models / "G.mtx")},
                              "options": {"at": [1.5, 1.65, 2], "title": "Footbridge"}})
        self.assertEqual(job["request"]["inputs"], {"stiffness": "models/K.mtx", "geometric": "models/G.mtx"})
        job = service.wait(job["id"])
        self.assertEqual((job["state"], job["exit_code"], job["attempts"], job["title"]),
                         ("done", 0, 1, "Footbridge"))
        self.assertTrue(job["headline"].startswith("All 3 counts are certified"), job["headline"])
        self.assertEqual(set(job["files"]), {"result", "report", "csv", "junit", "certificate", "log", "text"})
        result = service.ask("GET", f"/v1/jobs/{job['id']}/result").json()
        schema = json.loads((SOURCE / "data/schemas/outcome-1.json").read_text())
        jsonschema.Draft202012Validator(schema).validate(result)
        # The counts of data/demo/expected.json, whose sources are named in data/demo/README.md.
        self.assertEqual([count["below"] for count in result["counts"]], [0, 2, 4])
        self.assertEqual(result["inputs"]["stiffness"]["sha256"],
                         hashlib.sha256((self.models / "K.mtx").read_bytes()).hexdigest())
        self.assertEqual(result["inputs"]["stiffness"]["path"], "models/K.mtx")
        for name in job["files"]:
            answer = service.ask("GET", f"/v1/jobs/{job['id']}/{name}")
            self.assertEqual(answer.status, 200)
            self.assertTrue(answer.body)
        self.assertIn("sandbox", service.ask("GET", f"/v1/jobs/{job['id']}/report").headers["Content-Security-Policy"])
        self.problem(service.ask("GET", f"/v1/jobs/{job['id']}/vtu"), 404, "no-such-file")

    def test_every_command(self):
        service = self.serve()
        (self.models / "values.csv").write_text("value\n1.6164418908\n1.6185006117\n")
        model = {"stiffness": "models/K.mtx", "dofs": "models/dofs.csv", "nodes": "models/nodes.csv"}
        pencil = {"stiffness": "models/K.mtx", "geometric": "models/G.mtx"}
        jobs = {
            "check": service.submit({"command": "check", "inputs": model, "options": {"locate": True}}),
            "sweep": service.submit({"command": "sweep", "inputs": pencil,
                                     "options": {"from": 0, "to": 2, "points": 3}}),
            "bracket": service.submit({"command": "bracket", "inputs": {**pencil, "dofs": "models/dofs.csv",
                                                                        "nodes": "models/nodes.csv"},
                                       "options": {"first": 2}}),
            "audit": service.submit({"command": "audit", "inputs": {**pencil, "values": "models/values.csv"}}),
            "locate": service.submit({"command": "locate", "inputs": model}),
            "forecast": service.submit({"command": "forecast", "inputs": {"stiffness": "models/K.mtx"}}),
            "path": service.submit({"command": "check", "inputs": {"stiffness": "models/K.mtx",
                                                                   "steps": ["models/singular.mtx"]}}),
        }
        ended = {name: service.wait(job["id"]) for name, job in jobs.items()}
        states = {name: (job["state"], job["exit_code"]) for name, job in ended.items()}
        self.assertEqual(states, {"check": ("done", 0), "sweep": ("done", 0), "bracket": ("done", 0),
                                  "audit": ("done", 0), "locate": ("done", 0), "forecast": ("done", 0),
                                  "path": ("failed", 2)}, ended["path"])
        self.assertIn("svg", ended["sweep"]["files"])
        self.assertIn("vtu", ended["bracket"]["files"])
        self.assertTrue({"vtu", "view"} <= set(ended["locate"]["files"]), ended["locate"])

    def test_answers_that_are_not_good_and_jobs_that_fail(self):
        service = self.serve()
        singular = service.submit({"command": "check", "inputs": {"stiffness": "models/singular.mtx"}})
        bad = service.submit({"command": "check", "inputs": {"stiffness": "models/bad.mtx"}})
        singular, bad = service.wait(singular["id"]), service.wait(bad["id"])
        self.assertEqual((singular["state"], singular["exit_code"]), ("done", 1))
        self.assertEqual((bad["state"], bad["exit_code"]), ("failed", 2))
        self.assertEqual(bad["problem"]["status"], 422)
        self.assertIn("models/bad.mtx", bad["problem"]["place"])
        self.assertTrue(bad["problem"]["remedy"])

    def test_refused_requests(self):
        service = self.serve()
        stiffness = {"stiffness": "models/K.mtx"}
        refused = [
            ({"command": "frobnicate", "inputs": stiffness}, 400, "unknown-command"),
            ({"command": "check", "inputs": stiffness, "more": 1}, 400, "bad-request"),
            ({"command": "check", "inputs": stiffness, "options": {"shifts": 1}}, 400, "unknown-option"),
            ({"command": "check", "inputs": stiffness, "options": {"json": "/etc/x"}}, 400, "unknown-option"),
            ({"command": "check", "inputs": stiffness, "options": {"log": "/etc/x"}}, 400, "unknown-option"),
            ({"command": "check", "inputs": stiffness, "continues": 7}, 400, "bad-request"),
            ({"command": "check", "inputs": stiffness, "options": {"title": "x" * 501}}, 400, "bad-request"),
            ({"command": "check", "inputs": {}}, 400, "bad-request"),
            ({"command": "specimen", "inputs": stiffness}, 400, "unknown-command"),
            ({"command": "recheck", "inputs": stiffness}, 400, "unknown-command"),
            ({"command": "batch", "inputs": stiffness}, 400, "unknown-command"),
            ({"command": "check", "inputs": {"stiffness": "/etc/passwd"}}, 422, "outside-roots"),
            ({"command": "check", "inputs": {"stiffness": "models/../../etc/passwd"}}, 422, "outside-roots"),
            ({"command": "check", "inputs": {"stiffness": "models/nothing.mtx"}}, 422, "file-not-found"),
            ({"command": "check", "inputs": {"stiffness": "models"}}, 422, "outside-roots"),
            ({"command": "check", "inputs": {"stiffness": "sha256:" + "0" * 64}}, 422, "unknown-input"),
            ({"command": "check", "inputs": {"stiffness": "sha256:../../../etc/passwd"}}, 422, "unknown-input"),
            ({"command": "check", "inputs": {"stiffness": "models/K.mtx", "list": "models/K.mtx"}}, 400, "bad-request"),
            ({"command": "check", "inputs": stiffness, "options": {"memory_cap": "900T"}}, 413, "memory-limit"),
        ]
        for request, status, code in refused:
            with self.subTest(request):
                self.problem(service.ask("POST", "/v1/jobs", request), status, code)
        deep = '{"command":' * 40 + "1" + "}" * 40
        for body, status, code in [("{", 400, "bad-json"), (deep, 400, "bad-json"), ('{"a":1,"a":2}', 400, "bad-json"),
                                   ("[]", 400, "bad-request"), ('"' + "x" * (1 << 20) + '"', 413, "request-too-long")]:
            answer = service.ask("POST", "/v1/jobs", body, {"Content-Type": "application/json"})
            self.problem(answer, status, code)
        for kind in ("text/plain", "application/x-www-form-urlencoded", "application/json;x=y", ""):
            answer = service.ask("POST", "/v1/jobs", "{}", {"Content-Type": kind})
            self.problem(answer, 415, "content-type")
        answer = service.ask("POST", "/v1/jobs", "{}", {"Content-Type": "application/json", "Content-Encoding": "gzip"})
        self.problem(answer, 415, "content-encoding")
        self.assertEqual(service.ask("GET", "/v1/jobs").json()["total"], 0)

    def test_paging_and_filters(self):
        service = self.serve()
        check = {"command": "check", "inputs": {"stiffness": "models/K.mtx"}}
        ids = [service.submit({**check, "options": {"title": f"span {k}%"}})["id"] for k in range(7)]
        child = service.submit({**check, "continues": ids[0]})["id"]
        for job in ids + [child]:
            service.wait(job)
        seen, cursor = [], ""
        while cursor is not None:
            page = service.ask("GET", "/v1/jobs?limit=3" + (f"&cursor={cursor}" if cursor else "")).json()
            self.assertEqual(page["total"], 8)
            seen += [job["id"] for job in page["jobs"]]
            cursor = page["next"]
        self.assertEqual(seen, list(reversed(ids + [child])))
        total = lambda query: service.ask("GET", "/v1/jobs?" + query).json()["total"]
        self.assertEqual([total("continues=" + ids[0]), total("search=span+3%25"), total("search=%25"),
                          total("state=done"), total("state=failed"), total("command=count")], [1, 1, 7, 8, 0, 0])
        for query in ("limit=0", "limit=501", "limit=x", "cursor=-1", "state=odd", "limit=1&limit=2"):
            self.problem(service.ask("GET", "/v1/jobs?" + query), 400, "bad-request")

    def test_ids_and_idempotency(self):
        service = self.serve()
        check = {"command": "check", "inputs": {"stiffness": "models/K.mtx"}}
        job = service.submit({**check, "id": "span-1"}, Idempotency_Key="a key")
        again = service.ask("POST", "/v1/jobs", {**check, "id": "span-1"}, {"Idempotency-Key": "a key"})
        self.assertEqual((again.status, again.headers["Idempotency-Replayed"]), (202, "true"))
        self.assertEqual(again.json()["id"], job["id"])
        self.problem(service.ask("POST", "/v1/jobs", check, {"Idempotency-Key": "a key"}), 422, "idempotency-key")
        self.problem(service.ask("POST", "/v1/jobs", {**check, "id": "span-1"}), 409, "id-taken")
        self.assertEqual(service.ask("GET", "/v1/jobs").json()["total"], 1)

    def test_cancel_and_delete(self):
        service = self.serve("--processors", "1")
        (self.models / "long.mtx").write_text(chain_text(20000))
        slow = {"command": "sweep", "inputs": {"stiffness": "models/long.mtx"},
                "options": {"from": 0.1, "to": 3.9, "points": 5000}}
        jobs = [service.submit(slow)["id"] for _ in range(4)]
        until_running = threading.Event()
        while service.ask("GET", "/v1/jobs/" + jobs[0]).json()["state"] != "running":
            until_running.wait(0.02)
        self.problem(service.ask("DELETE", "/v1/jobs/" + jobs[0]), 409, "job-active")
        for job in reversed(jobs):
            self.assertEqual(service.ask("POST", f"/v1/jobs/{job}/cancel", b"", {"Content-Type": ""}).status, 202)
        for job in jobs:
            self.assertEqual(service.wait(job)["state"], "cancelled")
            self.problem(service.ask("POST", f"/v1/jobs/{job}/cancel", b""), 409, "job-ended")
        self.assertEqual(service.ask("DELETE", "/v1/jobs/" + jobs[0]).status, 204)
        self.problem(service.ask("GET", "/v1/jobs/" + jobs[0]), 404, "unknown-job")
        self.assertFalse((self.store / "jobs" / jobs[0]).exists())
        self.problem(service.ask("DELETE", "/v1/jobs/" + jobs[0]), 404, "unknown-job")

    def test_a_running_job_is_cancelled_with_its_process(self):
        service = self.serve("--processors", "1")
        (self.models / "long.mtx").write_text(chain_text(20000))
        job = service.submit({"command": "sweep", "inputs": {"stiffness": "models/long.mtx"},
                              "options": {"from": 0.1, "to": 3.9, "points": 50000}})["id"]
        workers = []
        while not workers or service.ask("GET", "/v1/jobs/" + job).json()["state"] != "running":
            time.sleep(0.02)
            workers = children(service.process.pid)
        self.assertEqual(service.ask("POST", f"/v1/jobs/{job}/cancel", b"").status, 202)
        ended = service.wait(job)
        self.assertEqual((ended["state"], ended["exit_code"], ended["attempts"]), ("cancelled", 130, 1), ended)
        self.assertEqual(children(service.process.pid), [])
        self.assertFalse((self.store / "jobs" / job / "in").exists())
        # Room for the next one.
        self.assertEqual(service.wait(service.submit({"command": "check", "inputs": {"stiffness": "models/K.mtx"}})["id"])
                         ["exit_code"], 0)

    def test_a_silent_stream_says_that_it_is_there(self):
        service = self.serve("--heartbeat", "1")
        connection = service.connect()
        connection.request("GET", "/v1/events")
        response = connection.getresponse()
        began, beats = time.monotonic(), 0
        while beats < 3:
            beats += b": still here" in response.fp.readline()
        self.assertGreater(time.monotonic() - began, 2)
        # A client that has gone is noticed by the next beat, and its thread ends.
        response.close()
        connection.close()
        until = time.monotonic() + 20
        while (left := self.metric(service, "stanchion_connections ")) > 1 and time.monotonic() < until:
            time.sleep(0.1)
        self.assertEqual(left, 1)

    def metric(self, service, name):
        lines = service.ask("GET", "/metrics").body.decode().splitlines()
        return next(float(line.rsplit(" ", 1)[1]) for line in lines if line.startswith(name))

    def test_events(self):
        service = self.serve()
        connection = service.connect()
        connection.request("GET", "/v1/events")
        stream = connection.getresponse()
        self.assertEqual((stream.status, stream.headers["Content-Type"]), (200, "text/event-stream"))
        job = service.submit({"command": "check", "inputs": {"stiffness": "models/K.mtx"}})["id"]
        states, last = [], ""
        while not states or states[-1] not in ("done", "failed"):
            line = stream.fp.readline().decode().strip()
            last = line.removeprefix("id: ") if line.startswith("id: ") else last
            if line.startswith("data: "):
                record = json.loads(line.removeprefix("data: "))
                self.assertEqual(record["id"], job)
                states.append(record["state"])
        connection.close()
        self.assertEqual((states[0], states[-1]), ("queued", "done"))
        self.assertIn("running", states)
        # From the number before the last one on, the last event comes once more.
        connection = service.connect()
        connection.request("GET", "/v1/events", headers={"Last-Event-ID": str(int(last) - 1)})
        lines = connection.getresponse().fp
        text = ""
        while "data: " not in text:
            text += lines.readline().decode()
        self.assertIn(f"id: {last}\n", text)
        connection.close()
        # The stream of a job that has ended ends.
        body = service.ask("GET", f"/v1/jobs/{job}/events").body.decode()
        self.assertEqual(body.count("data: "), 1)
        self.problem(service.ask("GET", "/v1/events", headers={"Last-Event-ID": "x"}), 400, "bad-request")

    def test_facts_and_metrics(self):
        service = self.serve()
        job = service.submit({"command": "check", "inputs": {"stiffness": "models/K.mtx"}})
        service.wait(job["id"])
        facts = service.ask("GET", "/v1/service").json()
        self.assertEqual((facts["roots"], facts["tokens_needed"], facts["scopes"]),
                         (["models"], False, ["read", "submit", "admin"]))
        commands = {command["name"]: command for command in service.ask("GET", "/v1/commands").json()["commands"]}
        self.assertEqual(set(commands), {"check", "count", "sweep", "bracket", "audit", "locate", "forecast"})
        self.assertIn("geometric", [entry["key"] for entry in commands["count"]["inputs"]])
        self.assertNotIn("json", [entry["key"] for entry in commands["count"]["options"]])
        answer = service.ask("GET", "/metrics")
        families = {family.name: family for family in text_string_to_metric_families(answer.body.decode())}
        ended = {sample.labels["state"]: sample.value for sample in families["stanchion_jobs_ended"].samples}
        self.assertEqual(ended, {"done": 1, "failed": 0, "cancelled": 0})
        submits = [sample.value for sample in families["stanchion_http_request_seconds"].samples
                   if sample.name.endswith("_count") and sample.labels["route"] == "POST /v1/jobs"]
        self.assertEqual(submits, [1])
        self.assertGreater(families["process_resident_memory_bytes"].samples[0].value, 1e6)
        self.assertEqual(service.ask("GET", "/live").json(), {"live": True})
        self.assertEqual(service.ask("GET", "/ready").json(), {"ready": True})
        analyses = service.ask("GET", "/v1/analyses").json()
        self.assertEqual(analyses["total"], 1)


class InputTest(ServiceTest):
    def upload(self, service, text, name="K.mtx"):
        return service.ask("POST", f"/v1/inputs?name={name}", text.encode())

    def test_upload_and_use(self):
        service = self.serve()
        text = chain_text(40)
        answer = self.upload(service, text)
        digest = hashlib.sha256(text.encode()).hexdigest()
        self.assertEqual((answer.status, answer.json()["digest"], answer.json()["known"]), (201, digest, False))
        self.assertEqual(self.upload(service, text).status, 200)
        self.assertEqual(service.ask("PUT", "/v1/inputs/" + digest, text.encode()).status, 200)
        self.problem(service.ask("PUT", "/v1/inputs/" + "0" * 64, text.encode()), 422, "digest-differs")
        job = service.submit({"command": "check", "inputs": {"stiffness": "sha256:" + digest}})
        self.assertEqual(service.wait(job["id"])["exit_code"], 0)
        listed = service.ask("GET", "/v1/inputs").json()
        self.assertEqual([(entry["digest"], entry["name"]) for entry in listed["inputs"]], [(digest, "K.mtx")])
        self.assertEqual(service.ask("DELETE", "/v1/inputs/" + digest).status, 204)
        self.problem(service.ask("GET", "/v1/inputs/" + digest), 404, "unknown-input")
        self.problem(service.ask("DELETE", "/v1/inputs/" + digest), 404, "unknown-input")
        self.assertEqual(list((self.store / "inputs").iterdir()), [])

    def test_chunked_and_limits(self):
        service = self.serve("--upload-size", "100k")
        connection = service.connect()
        pieces = [b"%%MatrixMarket matrix coordinate real symmetric\n", b"1 1 1\n", b"1 1 2.5\n"]
        connection.request("POST", "/v1/inputs", body=iter(pieces), encode_chunked=True,
                           headers={"Transfer-Encoding": "chunked", "Content-Type": "application/octet-stream"})
        answer = connection.getresponse()
        self.assertEqual(answer.status, 201)
        self.assertEqual(json.loads(answer.read())["digest"], hashlib.sha256(b"".join(pieces)).hexdigest())
        connection.close()
        self.problem(service.ask("POST", "/v1/inputs", b"x" * 200_000), 413, "upload-too-long")
        connection = service.connect()
        try:
            connection.request("POST", "/v1/inputs", body=iter([b"x" * 50_000] * 4), encode_chunked=True,
                               headers={"Transfer-Encoding": "chunked", "Content-Type": "application/octet-stream"})
            self.assertEqual(connection.getresponse().status, 413)
        except ConnectionError:
            pass  # the answer may be lost to a client that goes on sending
        connection.close()
        self.problem(service.ask("POST", "/v1/inputs", b"x", {"Content-Type": "text/plain"}), 415, "content-type")
        self.assertEqual(len(list((self.store / "inputs").iterdir())), 1)

    def test_the_least_recently_used_go_first(self):
        service = self.serve("--store-size", "100k", "--upload-size", "60k")
        digests = []
        for k in range(4):
            answer = service.ask("POST", f"/v1/inputs?name=f{k}", bytes([k]) * 40_000)
            self.assertEqual(answer.status, 201)
            digests.append(answer.json()["digest"])
        left = [entry["digest"] for entry in service.ask("GET", "/v1/inputs").json()["inputs"]]
        self.assertEqual(left, [digests[3], digests[2]])
        self.assertLessEqual(service.ask("GET", "/v1/inputs").json()["bytes"], 100 << 10)

    def test_what_waiting_jobs_need_stays(self):
        (self.models / "long.mtx").write_text(chain_text(20000))
        service = self.serve("--store-size", "100k", "--upload-size", "60k", "--processors", "1")
        blocking = [service.submit({"command": "sweep", "inputs": {"stiffness": "models/long.mtx"},
                                    "options": {"from": 0.1, "to": 3.9, "points": 5000}})["id"] for _ in range(3)]
        needed = self.upload(service, chain_text(2500)).json()
        job = service.submit({"command": "check", "inputs": {"stiffness": "sha256:" + needed["digest"]}})
        self.problem(service.ask("DELETE", "/v1/inputs/" + needed["digest"]), 409, "input-needed")
        for k in range(3):
            service.ask("POST", "/v1/inputs", bytes([k]) * 40_000)
        self.assertTrue(service.ask("GET", "/v1/inputs/" + needed["digest"]).json()["needed"])
        for other in blocking:
            service.ask("POST", f"/v1/jobs/{other}/cancel", b"")
        self.assertEqual(service.wait(job["id"])["exit_code"], 0)

    def test_files_under_the_roots(self):
        (self.models / "bridge").mkdir()
        (self.models / "bridge/K.mtx").write_text(chain_text(3))
        (self.models / "inside.mtx").symlink_to("bridge/K.mtx")
        (self.models / "outside.mtx").symlink_to("/etc/passwd")
        (self.models / "far").symlink_to("/etc")
        (self.models / ".hidden").write_text("x")
        service = self.serve()
        roots = service.ask("GET", "/v1/files").json()
        self.assertEqual([(entry["path"], entry["kind"]) for entry in roots["entries"]], [("models", "folder")])
        listing = service.ask("GET", "/v1/files?path=models").json()
        self.assertEqual([entry["path"] for entry in listing["entries"]], ["models/bridge", "models/inside.mtx"])
        self.assertEqual(listing["entries"][1]["bytes"], len(chain_text(3)))
        for path, status, code in [("models/far", 422, "outside-roots"), ("models/..", 422, "outside-roots"),
                                   ("/etc", 422, "outside-roots"), ("models/none", 404, "file-not-found"),
                                   ("other", 422, "outside-roots")]:
            self.problem(service.ask("GET", "/v1/files?path=" + path), status, code)
        check = lambda name: {"command": "check", "inputs": {"stiffness": name}}
        self.assertEqual(service.wait(service.submit(check("models/inside.mtx"))["id"])["exit_code"], 0)
        for name in ("models/outside.mtx", "models/far/passwd"):
            self.problem(service.ask("POST", "/v1/jobs", check(name)), 422, "outside-roots")


if __name__ == "__main__":
    unittest.main()
