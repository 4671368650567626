"""Malformed requests of every kind: the service answers or hangs up, never falls, and never says 5xx but 501, 503, 505, 507.

With STANCHION_LONG=1 50,000 requests, otherwise 4,000. Meant to run under sanitizers, too.
"""

import copy
import json
import os
import random
import socket
import unittest

from client import ServiceTest, chain_text

REQUESTS = 50_000 if os.environ.get("STANCHION_LONG") else 4_000
ALLOWED = {501, 503, 505, 507}
PATHS = ["/v1/jobs", "/v1/jobs/x", "/v1/jobs/x/cancel", "/v1/jobs/x/events", "/v1/inputs", "/v1/inputs/" + "0" * 64,
         "/v1/files?path=models", "/v1/files?path=models/../..", "/v1/analyses", "/v1/commands", "/v1/service", "/metrics",
         "/live", "/ready", "/", "/page.css", "/..%2f..%2fetc/passwd", "/v1/jobs?limit=1&cursor=9", "/v1/openapi.json"]
VALUES = [None, True, 0, -1, 1e308, 10**30, "", "x", "models/K.mtx", "../../etc/passwd", "sha256:" + "0" * 64, "\u0000",
          "\ud83d\ude00", "x" * 5000, [], {}, ["models/K.mtx"], [{"path": "models/K.mtx", "factor": 1}], {"a": {"b": 1}}]
KEYS = ["id", "command", "inputs", "options", "continues", "stiffness", "geometric", "at", "threads", "memory_cap",
        "added", "steps", "title", "json", "analysis_store", "progress_fd", "", "\u0000"]
FIELDS = ["Host", "Content-Length", "Transfer-Encoding", "Content-Type", "Authorization", "Origin", "Sec-Fetch-Site",
          "Idempotency-Key", "Last-Event-ID", "Expect", "Connection", "Range", "Content-Encoding", "If-None-Match", "X"]


class Fuzz:
    def __init__(self, seed):
        self.dice = random.Random(seed)

    def value(self, depth=0):
        if depth < 4 and self.dice.random() < 0.3:
            return {self.dice.choice(KEYS): self.value(depth + 1) for _ in range(self.dice.randrange(4))}
        return copy.deepcopy(self.dice.choice(VALUES))  # a request is changed further

    def request(self):
        request = {"command": self.dice.choice(["check", "count", "sweep", "locate", "audit", "forecast", "bracket"]),
                   "inputs": {"stiffness": "models/K.mtx"}}
        for _ in range(self.dice.randrange(1, 4)):
            place = self.dice.choice([request, request.get("inputs"), request.setdefault("options", {})])
            if isinstance(place, dict):
                place[self.dice.choice(KEYS)] = self.value()
        return request

    def spoiled(self, data):
        data = bytearray(data)
        for _ in range(self.dice.randrange(1, 6)):
            at = self.dice.randrange(len(data) + 1)
            kind = self.dice.randrange(4)
            if kind == 0 and data:
                data[at % len(data)] = self.dice.randrange(256)
            elif kind == 1:
                data[at:at] = self.dice.randbytes(self.dice.randrange(8))
            elif kind == 2:
                del data[at:at + self.dice.randrange(8)]
            else:
                data[at:at] = data[at:at + 20]
        return bytes(data)

    def body(self):
        text = json.dumps(self.request()).encode()
        kind = self.dice.randrange(6)
        if kind == 0:
            return self.spoiled(text)
        if kind == 1:
            return self.dice.randbytes(self.dice.randrange(300))
        if kind == 2:
            return b"[" * self.dice.randrange(2000)
        if kind == 3:
            return b""
        return text

    def message(self):
        if self.dice.random() < 0.05:
            body = b'{"command": "check", "inputs": {"stiffness": "models/K.mtx"}}'
            head = b"POST /v1/jobs HTTP/1.1\r\nHost: localhost\r\nContent-Type: application/json\r\nContent-Length: %d\r\n\r\n"
            return head % len(body) + body, "POST", "/v1/jobs"
        method = self.dice.choice(["GET", "POST", "PUT", "DELETE", "HEAD", "PATCH", "OPTIONS", "BREW"])
        path = self.dice.choice(PATHS)
        body = self.body() if self.dice.random() < 0.6 or method in ("POST", "PUT") else b""
        fields = [("Host", "localhost")]
        if body or method in ("POST", "PUT"):
            kind = "application/octet-stream" if "inputs" in path else "application/json"
            fields += [("Content-Type", kind), ("Content-Length", str(len(body)))]
        if self.dice.random() < 0.3:
            fields.append((self.dice.choice(FIELDS), str(self.value())[:400].encode("ascii", "replace").decode()))
        self.dice.shuffle(fields)
        head = f"{method} {path} HTTP/1.1\r\n" + "".join(f"{name}: {value}\r\n" for name, value in fields) + "\r\n"
        data = head.encode("latin-1", "replace") + body
        if self.dice.random() < 0.4:
            data = self.spoiled(data)
        return data, method, path


class FuzzTest(ServiceTest):
    def test_malformed_requests(self):
        (self.models / "K.mtx").write_text(chain_text(3))
        service = self.serve("--rate", "1000000", "--queue", "200", "--store-size", "1M", "--upload-size", "100k")
        fuzz = Fuzz(int(os.environ.get("STANCHION_SEED", "11")))
        statuses = {}
        for number in range(REQUESTS):
            data, method, path = fuzz.message()
            with socket.create_connection(("127.0.0.1", service.port), timeout=60) as connection:
                try:
                    connection.sendall(data)
                    connection.shutdown(socket.SHUT_WR)
                    answer = b""
                    # A stream of events goes on; its beginning is enough.
                    while piece := connection.recv(65536):
                        answer += piece
                        if b"text/event-stream" in answer[:2000]:
                            break
                except ConnectionError:
                    continue
            if not answer:
                continue
            self.assertTrue(answer.startswith(b"HTTP/1.1 "), (number, data, answer[:200]))
            status = int(answer[9:12])
            statuses[status] = statuses.get(status, 0) + 1
            self.assertTrue(status < 500 or status in ALLOWED, (number, data, answer[:500]))
            if status >= 400 and method != "HEAD" and not data.startswith(b"HEAD"):
                self.assertIn(b"application/problem+json", answer.split(b"\r\n\r\n")[0], (number, data, answer[:500]))
            self.assertIsNone(service.process.poll(), (number, data))
        print(f"{REQUESTS} requests: {dict(sorted(statuses.items()))}", flush=True)
        self.assertGreater(statuses.get(202, 0), 0)
        self.assertGreater(statuses.get(400, 0), 0)
        self.assertEqual(service.ask("GET", "/ready").status, 200)
        for job in service.ask("GET", "/v1/jobs?limit=500&state=queued").json()["jobs"]:
            service.ask("POST", f"/v1/jobs/{job['id']}/cancel", b"")
        self.assertEqual(service.stop(), 0)


if __name__ == "__main__":
    unittest.main()
