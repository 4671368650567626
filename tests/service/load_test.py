"""Many jobs from many connections: none is lost, and the service does not grow.

With STANCHION_LONG=1 a soak of 20,000 jobs; otherwise some hundred. Latency is measured by `scripts/bench service`,
for a test must not depend on the machine's speed.
"""

import http.client
import json
import os
import threading
import time
import unittest

from client import ServiceTest, chain_text

JOBS = 20_000 if os.environ.get("STANCHION_LONG") else 240
CONNECTIONS = 20


def figures(service):
    lines = service.ask("GET", "/metrics").body.decode().splitlines()
    table = dict(line.rsplit(" ", 1) for line in lines if not line.startswith("#"))
    return float(table["process_resident_memory_bytes"]), float(table["process_open_fds"])


class LoadTest(ServiceTest):
    def test_jobs_from_many_connections(self):
        (self.models / "K.mtx").write_text(chain_text(30))
        # An address sanitizer would keep a quarter of a gigabyte of what was freed, which looks like growth.
        options = os.environ.get("ASAN_OPTIONS", "")
        service = self.serve("--rate", "100000", environment={"ASAN_OPTIONS": options + ":quarantine_size_mb=1"})
        body = json.dumps({"command": "check", "inputs": {"stiffness": "models/K.mtx"}})
        ids, lock, seen, began = [], threading.Lock(), [], time.monotonic()

        def submit_some(number):
            connection = service.connect()
            for count in range(JOBS // CONNECTIONS):
                key = f"client {number} job {count}"
                while True:
                    try:
                        answer = service.ask("POST", "/v1/jobs", body, {"Content-Type": "application/json", "Idempotency-Key": key}, connection)
                        break
                    except (OSError, http.client.HTTPException):
                        # A machine that was stopped for a while lets connections lapse; the key says it is the same job.
                        self.assertIsNone(service.process.poll())
                        connection.close()
                        connection = service.connect()
                self.assertEqual(answer.status, 202, answer.body)
                with lock:
                    ids.append(answer.json()["id"])
            connection.close()

        clients = [threading.Thread(target=submit_some, args=(number,)) for number in range(CONNECTIONS)]
        for client in clients:
            client.start()
        for client in clients:
            client.join()
        self.assertEqual(len(set(ids)), JOBS)
        # However slow the machine is, it goes on.
        done, until = 0, time.monotonic() + 200
        while done < JOBS and time.monotonic() < until:
            time.sleep(0.2 if JOBS < 1000 else 5)
            before, done = done, service.ask("GET", "/v1/jobs?limit=1&state=done").json()["total"]
            until = time.monotonic() + 200 if done > before else until
            seen.append((done, *figures(service)))
        self.assertEqual(done, JOBS, service.ask("GET", "/v1/jobs?state=failed").body[:2000])
        warm = next(entry for entry in seen if entry[0] > JOBS / 4)
        last = seen[-1]
        print(f"{JOBS} jobs in {time.monotonic() - began:.1f} s")
        for part in range(1, 11):
            ended, memory, files = next(entry for entry in seen if entry[0] >= JOBS * part // 10)
            print(f"{ended:6} jobs ended: {memory / 1e6:.1f} MB, {files:.0f} open files", flush=True)
        self.assertLess(last[1], warm[1] * 1.25 + 16e6)
        self.assertLessEqual(last[2], warm[2] + 8)
        self.assertEqual(service.stop(), 0)


if __name__ == "__main__":
    unittest.main()
