"""Many jobs from one file: one result each, whatever happens to the run."""

import gzip
import json
import os
import pty
import random
import signal
import subprocess
import sys
import time
import unittest
import xml.etree.ElementTree

from program import PROGRAM, ProgramTest, chain, read_json, validator

RESULT = validator("result-1")
SUMMARY = validator("batch-1")
REQUEST = validator("request-1")


class BatchTest(ProgramTest):
    def setUp(self):
        super().setUp()
        self.matrix("K.mtx", 60, chain(60))
        self.matrix("free.mtx", 60, chain(60, 0))
        self.results = self.folder / "jobs.results.jsonl"

    def job(self, name, command="check", stiffness="K.mtx", inputs=None, **options):
        return {"id": name, "command": command, "inputs": {"stiffness": stiffness} | (inputs or {}), "options": options}

    def write_jobs(self, jobs, name="jobs.jsonl"):
        for job in jobs:
            REQUEST.validate(job)
        (self.folder / name).write_text("".join(json.dumps(job) + "\n" for job in jobs), encoding="utf-8")

    def counts(self, number):
        return [self.job(f"count-{k}", "count", at=[0.01 * (k + 1)]) for k in range(number)]

    def read_results(self, path=None):
        """Every line of the results, checked against the schemas; one an id."""
        results = {}
        for line in (path or self.results).read_text(encoding="utf-8").splitlines():
            result = json.loads(line)
            RESULT.validate(result)
            if result["outcome"]:
                read_json(json.dumps(result["outcome"]))
            self.assertNotIn(result["id"], results, "two results of one job")
            results[result["id"]] = result
        return results

    def batch(self, code, *arguments):
        run = self.run_program("batch", "jobs.jsonl", *arguments, "--json", "summary.json")
        self.assertEqual((run.returncode, run.stderr), (code, ""), run.stdout)
        summary = json.loads((self.folder / "summary.json").read_text(encoding="utf-8"))
        SUMMARY.validate(summary)
        self.assertEqual(summary["exit_code"], code)
        return summary

    def test_every_job_has_its_result_and_a_bad_one_stops_nothing(self):
        (self.folder / "text.mtx").write_text("no matrix\n", encoding="ascii")
        self.write_jobs([self.job("good"), self.job("free", stiffness="free.mtx"),
                         self.job("expected", stiffness="free.mtx", expect="zero:1"),
                         self.job("missing", stiffness="none.mtx"), self.job("damaged", stiffness="text.mtx"),
                         self.job("small", memory_cap="64k"),
                         self.job("bracket", "bracket", inputs={"mass": "K.mtx"}, first=2),
                         self.job("forecast", "forecast")])
        summary = self.batch(4, "--junit", "summary.xml")
        results = self.read_results()
        codes = {name: result["exit_code"] for name, result in results.items()}
        self.assertEqual({name: codes[name] for name in ("good", "free", "expected", "missing", "damaged", "small",
                                                         "forecast")},
                         {"good": 0, "free": 1, "expected": 0, "missing": 2, "damaged": 2, "small": 4, "forecast": 0})
        self.assertEqual([entry["id"] for entry in summary["results"]], list(codes)[:0] + [
            "good", "free", "expected", "missing", "damaged", "small", "bracket", "forecast"])
        self.assertEqual(results["missing"]["failure"]["code"], "file-not-found")
        self.assertIsNone(results["missing"]["digest"])
        self.assertEqual(results["good"]["outcome"]["verdict"], "positive_definite")
        self.assertIsNone(results["damaged"]["outcome"])
        self.assertTrue(results["small"]["reason"])
        suite = xml.etree.ElementTree.parse(self.folder / "summary.xml").getroot().find("testsuite")
        self.assertEqual({key: suite.get(key) for key in ("tests", "failures", "skipped")},
                         {"tests": "8", "failures": "1", "skipped": "0"})
        self.assertEqual(suite.get("errors"), str(len(suite.findall("testcase/error"))))
        self.assertEqual([case.get("name") for case in suite.findall("testcase/failure/..")], ["free"])
        self.assertEqual(sorted(os.listdir(self.folder)),
                         ["K.mtx", "free.mtx", "jobs.jsonl", "jobs.results.jsonl", "summary.json", "summary.xml",
                          "text.mtx"])

    def test_the_answer_is_that_of_the_command_line(self):
        self.write_jobs([self.job("a", "count", at=[0.5, 1, 2])])
        self.batch(0)
        alone = self.expect(0, "count", "K.mtx", "--at", "0.5,1,2")
        batch = self.read_results()["a"]["outcome"]
        for key in ("counts", "risk", "inputs"):
            self.assertEqual(batch[key], alone[key])

    def test_a_pattern_is_ordered_once(self):
        self.matrix("L.mtx", 60, {key: 3 * value for key, value in chain(60).items()})
        self.write_jobs([self.job("a"), self.job("b", stiffness="L.mtx"), self.job("c", "count", "L.mtx", at=1)])
        self.batch(0, "--analysis-store", "store")
        reused = [result["outcome"]["work"]["analysis_reused"] for result in self.read_results().values()]
        self.assertEqual(sorted(reused), [False, True, True])
        self.assertEqual(len(list((self.folder / "store").glob("*/*.order"))), 1)

    def test_orders_used_least_recently_make_room(self):
        sizes = range(40, 70, 10)
        for rows in sizes:
            self.matrix(f"{rows}.mtx", rows, chain(rows))

        def reused(name, code, *rows):
            self.write_jobs([self.job(f"r{number}", stiffness=f"{number}.mtx") for number in rows])
            self.batch(code, "--analysis-store", "store", "--results", name, *room)
            found = self.read_results(self.folder / name)
            return [found[f"r{number}"]["outcome"]["work"]["analysis_reused"] for number in rows]

        def orders():
            return list((self.folder / "store").glob("*/*.order"))

        room = ()
        self.assertEqual(reused("1", 0, *sizes), [False] * 3)
        for path in orders():
            os.utime(path, (1, 1))
        self.assertEqual(reused("2", 0, 50), [True])
        room = ("--store-size", str(max(path.stat().st_size for path in orders())))
        self.assertEqual(reused("3", 0, 50), [True])
        self.assertEqual(len(orders()), 1)
        room = ()
        self.assertEqual(reused("4", 0, *sizes), [False, True, False])
        self.write_jobs([self.job("a")])
        self.expect_failure(2, "bad-size", "batch", "jobs.jsonl", "--store-size", "much")

    def test_bad_lines_are_refused_before_anything_runs(self):
        lines = [json.dumps(self.job("a")), "{", json.dumps(self.job("a")), "", json.dumps(self.job("b", "solve")),
                 json.dumps(self.job("c") | {"extra": 1}), json.dumps(self.job("d", at=[1])),
                 json.dumps(self.job("e", "count")), json.dumps(self.job("f", "count", at=["1"]))]
        (self.folder / "jobs.jsonl").write_text("\n".join(lines), encoding="utf-8")
        errors = self.run_program("batch", "jobs.jsonl").stderr
        for line, word in ((2, "bad-json"), (3, "also the id of line 1"), (5, "'solve'"), (6, "'extra'"), (7, "'at'"),
                           (8, "shift"), (9, "options/at")):
            self.assertRegex(errors, rf"line {line}: .*{word}")
        self.assertNotRegex(errors, "line 1: ")
        self.assertRegex(errors, r"\n  remedy: ")
        self.assertFalse(self.results.exists())
        self.assertEqual(self.run_program("batch", "jobs.jsonl").returncode, 2)
        (self.folder / "jobs.jsonl").write_text("\n\n", encoding="utf-8")
        self.expect_failure(2, "empty-file", "batch", "jobs.jsonl")
        self.expect_failure(2, "file-not-found", "batch", "none.jsonl")

    def test_a_refused_batch_leaves_no_older_summary(self):
        """Neither may show an earlier run: the JSON is gone, the JUnit document says why there is no answer."""
        places = ("--json", "summary.json", "--junit", "summary.xml")
        self.write_jobs([self.job("a")])
        (self.folder / "bad.jsonl").write_text("{\n", encoding="ascii")
        refused = {"bad-json": ("bad.jsonl",), "file-not-found": ("none.jsonl",), "results-exist": ("jobs.jsonl",),
                   "bad-shard": ("jobs.jsonl", "--resume", "--shard", "0/3"), "bad-size": ("jobs.jsonl", "--resume", "--memory-cap", "much"),
                   "unknown-argument": ("jobs.jsonl", "--resume", "--unknown"),
                   "file-not-found ": ("jobs.jsonl", "--merge", "none.jsonl", "--results", "x.jsonl")}
        for code, arguments in refused.items():
            with self.subTest(code):
                self.batch(0, "--resume", *places[2:])
                self.assertIn('name="a"', (self.folder / "summary.xml").read_text())
                run = self.run_program("batch", *arguments, *places)
                self.assertEqual((run.returncode, run.stdout), (2, ""))
                self.assertIn(code.strip(), run.stderr)
                self.assertFalse((self.folder / "summary.json").exists())
                suite = xml.etree.ElementTree.parse(self.folder / "summary.xml").getroot().find("testsuite")
                self.assertEqual((suite.get("errors"), suite.get("tests")), ("1", "1"))
                self.assertIn(code.strip(), suite.find("testcase/error").text)

    def test_a_refused_batch_destroys_nothing_that_is_read(self):
        self.write_jobs([self.job("a")])
        self.batch(0)
        (self.folder / "bad.jsonl").write_text("{\n", encoding="ascii")
        before = {path: (self.folder / path).read_bytes() for path in ("bad.jsonl", "K.mtx", "jobs.jsonl", "jobs.results.jsonl")}
        for place in before:
            for arguments in (("bad.jsonl", "--json"), ("bad.jsonl", "--merge", "jobs.results.jsonl", "--junit")):
                with self.subTest(place, arguments=arguments):
                    self.assertEqual(self.run_program("batch", *arguments, place).returncode, 2)
        self.assertEqual(self.run_program("batch", "jobs.jsonl", "--resume", "--json", "jobs.results.jsonl").returncode, 2)
        for option in ("--json", "--junit", "--results"):  # what a job names
            self.expect_failure(2, "contradiction", "batch", "jobs.jsonl", "--resume", option, "K.mtx")
        self.assertEqual({path: (self.folder / path).read_bytes() for path in before}, before)

    def test_resume_goes_by_contents(self):
        self.write_jobs(self.counts(3) + [self.job("free", stiffness="free.mtx")])
        self.batch(1)
        before = self.read_results()
        self.assertEqual(self.run_program("batch", "jobs.jsonl").returncode, 2, "results are not overwritten")
        os.utime(self.folder / "K.mtx", (1, 1))
        self.assertEqual(self.batch(1, "--resume")["taken_over"], 4)
        self.assertEqual(self.read_results(), before)
        # Other bytes, other options: these jobs are done again.
        self.matrix("free.mtx", 60, chain(60))
        jobs = self.counts(3) + [self.job("free", stiffness="free.mtx"), self.job("new")]
        jobs[0]["options"]["at"] = [0.5]
        self.write_jobs(jobs)
        self.assertEqual(self.batch(0, "--resume")["taken_over"], 2)
        after = self.read_results()
        self.assertEqual([name for name in after if after[name] == before.get(name)], ["count-1", "count-2"])

    def test_failed_jobs_are_tried_again_on_request(self):
        self.write_jobs([self.job("small", memory_cap="64k"), self.job("good")])
        self.batch(4)
        self.assertEqual(self.batch(4, "--resume")["taken_over"], 2)
        self.assertEqual(self.batch(4, "--resume", "--retry-failed")["taken_over"], 1)

    def test_torn_and_doubled_lines_are_mended(self):
        self.write_jobs(self.counts(4))
        self.batch(0)
        whole = self.results.read_bytes()
        lines = whole.splitlines(keepends=True)
        for torn in (lines[0] + lines[1][:-1], lines[0] + lines[1][:40], lines[0] + b"\0" * 300,
                     lines[0] + lines[0] + lines[1], lines[0][:30] + b"\n" + lines[1]):
            self.results.write_bytes(torn)
            summary = self.batch(0, "--resume")
            self.assertEqual(summary["damaged_lines_removed"] + summary["doubled_lines_removed"], 1)
            self.assertEqual(len(self.read_results()), 4)

    def test_parts_are_merged(self):
        self.write_jobs(self.counts(7) + [self.job("free", stiffness="free.mtx")])
        parts = []
        for number in (1, 2, 3):
            run = self.run_program("batch", "jobs.jsonl", "--shard", f"{number}/3", "--quiet")
            self.assertIn(run.returncode, (0, 1))
            parts.append(f"jobs.{number}-of-3.results.jsonl")
        self.assertEqual([len(self.read_results(self.folder / part)) for part in parts], [3, 3, 2])
        merges = [word for part in parts for word in ("--merge", part)]
        summary = self.batch(1, *merges)
        self.assertEqual(list(self.read_results()), [f"count-{k}" for k in range(7)] + ["free"])
        self.assertEqual(summary["not_run"], [])
        # A part that is missing is said, and is no success.
        summary = self.batch(3, *merges[:4], "--results", "some.jsonl")
        self.assertEqual(summary["not_run"], ["count-2", "count-5"])
        # Two parts that do not agree about the inputs.
        self.matrix("K.mtx", 60, {key: 2 * value for key, value in chain(60).items()})
        self.run_program("batch", "jobs.jsonl", "--shard", "1/3", "--results", "late.jsonl", "--quiet")
        self.expect_failure(2, "conflicting-results", "batch", "jobs.jsonl", *merges, "--merge", "late.jsonl",
                            "--results", "x.jsonl")
        self.expect_failure(2, "bad-shard", "batch", "jobs.jsonl", "--shard", "0/3")

    def test_a_packed_file_that_grows_without_end_ends_its_job_only(self):
        with gzip.open(self.folder / "bomb.mtx.gz", "wb") as packed:
            packed.write(b"%%MatrixMarket matrix coordinate real symmetric\n99999999 99999999 99999999\n")
            for _ in range(400):
                packed.write(b"1 1 1.0\n" * 100_000)
        self.write_jobs([self.job("bomb", stiffness="bomb.mtx.gz"), self.job("good")])
        self.batch(4, "--memory-cap", "512M")
        results = self.read_results()
        self.assertEqual((results["bomb"]["exit_code"], results["good"]["exit_code"]), (4, 0))
        self.assertLess(results["bomb"]["peak_bytes"], 1 << 30)

    def test_processor_time_is_limited(self):
        self.matrix("large.mtx", 20000, chain(20000))
        self.write_jobs([self.job("long", "count", "large.mtx", at=[k / 5000 for k in range(1, 3000)]),
                         self.job("good")])
        self.batch(4, "--cpu-limit", "1")
        results = self.read_results()
        self.assertEqual((results["long"]["exit_code"], results["good"]["exit_code"]), (4, 0))
        self.assertIn("processor time", results["long"]["reason"])

    def start(self, *arguments, **options):
        process = subprocess.Popen([PROGRAM, "batch", "jobs.jsonl", *arguments], cwd=self.folder, **options)
        self.addCleanup(lambda: process.poll() is None and process.kill())
        return process

    def wait_for_results(self, process, number):
        deadline = time.monotonic() + 120
        while not (self.results.exists() and self.results.read_bytes().count(b"\n") >= number):
            self.assertIsNone(process.poll(), "it ended too early")
            self.assertLess(time.monotonic(), deadline)
            time.sleep(0.002)

    def test_an_interruption_keeps_what_is_finished(self):
        self.write_jobs(self.counts(400))
        process = self.start("--junit", "summary.xml", stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)
        self.wait_for_results(process, 3)
        process.send_signal(signal.SIGTERM)
        output, errors = process.communicate(timeout=60)
        self.assertEqual((process.returncode, errors), (130, ""), output)
        self.assertRegex(output, r"^Interrupted: \d+ of 400 jobs")
        kept = self.read_results()
        self.assertTrue(3 <= len(kept) < 400)
        suite = xml.etree.ElementTree.parse(self.folder / "summary.xml").getroot().find("testsuite")
        self.assertEqual(suite.get("skipped"), str(400 - len(kept)))
        self.write_jobs(self.counts(len(kept) + 5))
        self.assertEqual(self.batch(0, "--resume")["taken_over"], len(kept))
        self.assertEqual(len(self.read_results()), len(kept) + 5)

    def test_two_runs_do_not_share_results(self):
        self.write_jobs(self.counts(400))
        process = self.start("--quiet")
        self.wait_for_results(process, 1)
        self.expect_failure(4, "in-use", "batch", "jobs.jsonl", "--resume")
        process.terminate()
        self.assertEqual(process.wait(60), 130)

    def test_progress_on_a_terminal(self):
        self.write_jobs(self.counts(20))
        terminal, inner = pty.openpty()
        process = self.start(stdout=subprocess.PIPE, stderr=inner)
        os.close(inner)
        shown = b""
        while True:
            try:
                part = os.read(terminal, 4096)
            except OSError:
                break
            if not part:
                break
            shown += part
        process.communicate(timeout=60)
        self.assertRegex(shown, rb"jobs \d+ %, \d+ s elapsed")
        self.assertTrue(shown.endswith(b"\x1b[K"))

    def kill_and_resume(self, kills, jobs, seed):
        """Kills the run (or one of its children) at random moments until all is done."""
        moments = random.Random(seed)
        self.write_jobs(self.counts(jobs) + [self.job("free", stiffness="free.mtx"), self.job("missing", stiffness="x")])
        finished = {}
        for _ in range(kills):
            process = self.start("--resume", "--quiet", stderr=subprocess.DEVNULL)
            time.sleep(moments.uniform(0, 0.25))
            if moments.random() < 0.3:
                for child in self.children_of(process.pid):
                    try:
                        os.kill(child, signal.SIGKILL)
                    except ProcessLookupError:
                        pass
                time.sleep(moments.uniform(0, 0.05))
            process.kill()
            process.wait()
            # What was finished before is there still; complete lines are whole.
            have = {}
            for line in self.results.read_bytes().split(b"\n")[:-1] if self.results.exists() else []:
                result = json.loads(line)
                self.assertNotIn(result["id"], have)
                have[result["id"]] = result
            for name, result in finished.items():
                if result["exit_code"] != 2:  # without its input it has no digest and is tried every time
                    self.assertEqual(have.get(name), result, "a finished result was lost or changed")
            finished = have
        self.batch(2, "--resume")
        results = self.read_results()
        self.assertEqual(len(results), jobs + 2)
        self.assertEqual({name: result["exit_code"] for name, result in results.items() if result["exit_code"]},
                         {"free": 1, "missing": 2})
        for k in range(jobs):
            [count] = results[f"count-{k}"]["outcome"]["counts"]
            self.assertEqual(count["shift"], 0.01 * (k + 1))
        self.assertFalse((self.folder / "jobs.results.jsonl.work").exists())

    @staticmethod
    def children_of(pid):
        try:
            with open(f"/proc/{pid}/task/{pid}/children", encoding="ascii") as children:
                return [int(child) for child in children.read().split()]
        except OSError:
            return []

    def test_killed_at_any_moment_nothing_is_lost(self):
        self.kill_and_resume(*((100, 200, 7) if "--long" in sys.argv else (6, 25, 5)))


if __name__ == "__main__":
    long_form = "--long" in sys.argv
    unittest.main(argv=[sys.argv[0]] + (["BatchTest.test_killed_at_any_moment_nothing_is_lost"] if long_form else []))
