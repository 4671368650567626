"""Kills the service and its workers while they work: each accepted job ends exactly once, with its files.

With STANCHION_LONG=1 a hundred times, otherwise a few.
"""

import http.client
import os
import random
import signal
import sqlite3
import threading
import time
import unittest

from client import ServiceTest, chain_text, children

KILLS = 100 if os.environ.get("STANCHION_LONG") else 6
ENDED = {"done", "failed", "cancelled"}


class CrashTest(ServiceTest):
    def waiting(self, service):
        return sum(service.ask("GET", "/v1/jobs?limit=1&state=" + state).json()["total"]
                   for state in ("queued", "running"))

    def test_kills_at_random(self):
        dice = random.Random(int(os.environ.get("STANCHION_SEED", "7")))
        (self.models / "K.mtx").write_text(chain_text(60))
        check = {"command": "check", "inputs": {"stiffness": "models/K.mtx"}}
        accepted, lock = [], threading.Lock()
        service, stop = self.serve(), threading.Event()
        current = [service]

        def submit_all(number):
            count = 0
            while not stop.is_set():
                count += 1
                key = f"client {number} job {count}"
                while not stop.is_set():
                    # The same key until there is an answer: an answer lost with the service is no second job.
                    try:
                        answer = current[0].ask("POST", "/v1/jobs", check, {"Idempotency-Key": key}, check=False)
                    except OSError:
                        time.sleep(0.02)
                        continue
                    except Exception:  # the connection broke in the middle of an answer
                        continue
                    if answer.status == 202:
                        with lock:
                            accepted.append((key, answer.json()["id"]))
                        break
                    time.sleep(0.02)
                # As many wait as keep the workers busy, not ever more.
                try:
                    time.sleep(0.05 if self.waiting(current[0]) < 20 else 0.5)
                except (OSError, ValueError, http.client.HTTPException):
                    pass

        clients = [threading.Thread(target=submit_all, args=(number,)) for number in range(4)]
        for client in clients:
            client.start()
        killed_workers = set()
        for _ in range(KILLS):
            time.sleep(dice.uniform(0.05, 0.6))
            if dice.random() < 0.5:
                found = children(service.process.pid)
                if found:
                    victim = dice.choice(found)
                    killed_workers.add(victim)
                    try:
                        os.kill(victim, signal.SIGKILL)
                    except ProcessLookupError:
                        pass
            else:
                service.kill()
                service = self.serve()
                current[0] = service
        stop.set()
        for client in clients:
            client.join()
        # However slow the machine is, the number of jobs that wait goes down, and to nothing.
        waiting, least, until = 1, 10**9, time.monotonic() + 100
        while waiting and time.monotonic() < until:
            waiting = self.waiting(service)
            if waiting < least:
                least, until = waiting, time.monotonic() + 100
            time.sleep(0.1)
        self.assertEqual(waiting, 0)
        self.assertEqual(len({key for key, _ in accepted}), len(accepted))
        self.assertEqual(len({job for _, job in accepted}), len(accepted))
        failed = 0
        for key, job in accepted:
            record = service.ask("GET", "/v1/jobs/" + job).json()
            self.assertIn(record["state"], ENDED)
            self.assertIn(record["attempts"], (1, 2))
            if record["state"] == "done":
                self.assertEqual(service.ask("GET", f"/v1/jobs/{job}/result").json()["verdict"], "positive_definite")
            else:
                failed += 1
                self.assertIn(record["problem"]["code"], ("killed", "interrupted-twice"), record["problem"])
        self.assertEqual(service.stop(), 0)
        with sqlite3.connect(self.store / "jobs.sqlite") as table:
            self.assertEqual(table.execute("PRAGMA integrity_check").fetchone(), ("ok",))
            rows = dict(table.execute("SELECT idempotency_key, id FROM jobs").fetchall())
        # Nothing that was accepted is lost, and no key became two jobs.
        self.assertEqual({key: rows.get(key) for key, _ in accepted}, dict(accepted))
        self.assertLessEqual(len(rows) - len(accepted), 4)
        self.assertLessEqual(failed, len(killed_workers) + KILLS)
        print(f"{KILLS} kills, {len(accepted)} jobs accepted, {failed} failed by a kill", flush=True)

    def test_an_orderly_end_puts_running_jobs_back(self):
        (self.models / "long.mtx").write_text(chain_text(20000))
        (self.models / "K.mtx").write_text(chain_text(20))
        service = self.serve("--grace", "0", "--processors", "1")
        slow = service.submit({"command": "sweep", "inputs": {"stiffness": "models/long.mtx"},
                               "options": {"from": 0.1, "to": 3.9, "points": 5000}})["id"]
        while service.ask("GET", "/v1/jobs/" + slow).json()["state"] != "running":
            time.sleep(0.02)
        self.assertEqual(service.stop(), 0)
        with sqlite3.connect(self.store / "jobs.sqlite") as table:
            self.assertEqual(table.execute("SELECT state, attempts FROM jobs").fetchall(), [("queued", 0)])
        service = self.serve()
        self.assertEqual(service.ask("POST", f"/v1/jobs/{slow}/cancel", b"").status, 202)
        quick = service.submit({"command": "check", "inputs": {"stiffness": "models/K.mtx"}})["id"]
        self.assertEqual(service.wait(quick)["exit_code"], 0)
        self.assertEqual(service.wait(slow)["state"], "cancelled")

    def worker_of(self, service, job, attempt):
        """The process that runs the job, once it does."""
        until = time.monotonic() + 100
        while time.monotonic() < until:
            record = service.ask("GET", "/v1/jobs/" + job).json()
            found = children(service.process.pid)
            if (record["state"], record["attempts"]) == ("running", attempt) and found:
                return found[0]
            time.sleep(0.02)
        raise AssertionError(record)

    def test_a_worker_that_is_killed_is_replaced_once(self):
        (self.models / "K.mtx").write_text(chain_text(9000))
        service = self.serve()
        sweep = {"command": "sweep", "inputs": {"stiffness": "models/K.mtx"}, "options": {"from": 0.1, "to": 3.9, "points": 50_000}}
        job = service.submit(sweep)["id"]
        first = self.worker_of(service, job, 1)
        os.kill(first, signal.SIGKILL)
        second = self.worker_of(service, job, 2)
        self.assertNotEqual(first, second)
        os.kill(second, signal.SIGKILL)
        ended = service.wait(job)
        self.assertEqual((ended["state"], ended["exit_code"], ended["attempts"]), ("failed", 4, 2))
        self.assertEqual(ended["problem"]["code"], "killed")
        self.assertIn("so was the attempt before", ended["problem"]["detail"])
        # One that is cancelled in between is not begun again.
        job = service.submit(sweep)["id"]
        worker = self.worker_of(service, job, 1)
        os.kill(worker, signal.SIGSTOP)
        self.assertEqual(service.ask("POST", f"/v1/jobs/{job}/cancel", b"").status, 202)
        os.kill(worker, signal.SIGKILL)
        ended = service.wait(job)
        self.assertEqual((ended["state"], ended["attempts"]), ("cancelled", 1))
        self.assertEqual(service.stop(), 0)
        log = service.log.read_text()
        self.assertEqual(log.count("once more with"), 1, log)

    def test_an_end_that_cannot_be_written_is_kept(self):
        (self.models / "K.mtx").write_text(chain_text(9))
        service = self.serve()
        # As a full disk would, but for ends alone.
        with sqlite3.connect(self.store / "jobs.sqlite") as table:
            table.execute("CREATE TRIGGER full BEFORE UPDATE ON jobs WHEN new.state = 'done' BEGIN SELECT RAISE(ABORT, 'full'); END")
        table.close()
        job = service.submit({"command": "check", "inputs": {"stiffness": "models/K.mtx"}})["id"]
        until = time.monotonic() + 60
        while service.ask("GET", "/ready").status == 200 and "cannot be written yet" not in service.log.read_text() and time.monotonic() < until:
            time.sleep(0.05)
        self.assertEqual(service.ask("GET", "/v1/jobs/" + job).json()["state"], "running")
        with sqlite3.connect(self.store / "jobs.sqlite") as table:
            table.execute("DROP TRIGGER full")
        table.close()
        self.assertEqual(service.wait(job)["exit_code"], 0)
        self.assertEqual(service.ask("GET", "/ready").status, 200)
        self.assertEqual(service.stop(), 0)
        self.assertEqual(service.log.read_text().count("cannot be written yet"), 1)

    def test_one_service_a_store(self):
        self.serve()
        with self.assertRaisesRegex(RuntimeError, "store-in-use"):
            self.serve()


if __name__ == "__main__":
    unittest.main()
