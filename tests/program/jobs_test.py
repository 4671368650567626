"""What running jobs rests on: the schema of requests, progress on a pipe, the analysis store."""

import json
import os
import subprocess
import unittest

import jsonschema

from program import PROGRAM, SOURCE, ProgramTest, chain


def without_times(document):
    for key in ("timings_seconds", "memory_bytes", "arguments"):
        document.pop(key)
    document["work"].pop("analysis_reused")
    return document


class JobsTest(ProgramTest):
    def test_the_shipped_schema_of_requests_is_that_of_the_command_line(self):
        run = self.run_program("describe", "request-schema")
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        shipped = (SOURCE / "data/schemas/request-1.json").read_text(encoding="utf-8")
        self.assertEqual(run.stdout, shipped, "write it anew: stanchion describe request-schema")
        schema = json.loads(run.stdout)
        jsonschema.Draft202012Validator.check_schema(schema)
        validator = jsonschema.Draft202012Validator(schema)
        good = {"id": "a", "command": "count", "inputs": {"stiffness": "K", "added": [{"path": "G", "factor": 2}]},
                "options": {"at": [1, 2], "memory_cap": "8G", "load_sign": "minus"}}
        self.assertTrue(validator.is_valid(good))
        for change in ({"id": ".."}, {"command": "convert"}, {"inputs": {}}, {"more": 1}, {"options": {"json": "x"}},
                       {"options": {"at": []}}, {"options": {"find_missing": True}}, {"options": {"load_sign": "up"}}):
            self.assertFalse(validator.is_valid(good | change), change)

    def progress_of(self, *arguments):
        reader, writer = os.pipe()
        process = subprocess.Popen([PROGRAM, *arguments, "--progress-fd", str(writer)], pass_fds=[writer],
                                   cwd=self.folder, stdout=subprocess.PIPE, stderr=subprocess.PIPE)
        os.close(writer)
        with os.fdopen(reader, encoding="utf-8") as lines:
            seen = [json.loads(line) for line in lines]
        process.communicate(timeout=60)
        return process.returncode, seen

    def test_progress_comes_as_json_lines(self):
        code, seen = self.progress_of("check", self.matrix("K.mtx", 3000, chain(3000)))
        self.assertEqual(code, 0)
        self.assertIn("read", [line["phase"] for line in seen])
        self.assertIn("factor", [line["phase"] for line in seen])
        for line in seen:
            self.assertEqual(line["total"], 1)
            self.assertTrue(0 <= line["done"] <= 1)

    def test_a_failure_comes_the_same_way(self):
        code, seen = self.progress_of("check", "none.mtx")
        self.assertEqual(code, 2)
        failure = seen[-1]["failure"]
        self.assertEqual((failure["kind"], failure["code"], failure["place"]),
                         ("bad_input", "file-not-found", "none.mtx"))

    def test_a_reader_that_is_gone_is_no_harm(self):
        reader, writer = os.pipe()
        os.close(reader)
        run = subprocess.run([PROGRAM, "check", self.matrix("K.mtx", 300, chain(300)), "--quiet", "--progress-fd",
                              str(writer)], pass_fds=[writer], check=False, capture_output=True)
        os.close(writer)
        self.assertEqual((run.returncode, run.stderr), (0, b""))

    def test_standard_handles_are_no_place_for_progress(self):
        for handle in ("0", "2", "-1", "99999"):
            self.expect_failure(2, "out-of-range", "check", self.matrix("K.mtx", 3, chain(3)), "--progress-fd", handle)

    def test_the_analysis_is_shared_and_the_answer_the_same(self):
        stiffness = self.matrix("K.mtx", 400, chain(400))
        other = self.matrix("L.mtx", 400, {key: 2 * value for key, value in chain(400).items()})
        alone = self.expect(0, "check", stiffness)
        store = ("--analysis-store", "store")
        first = self.expect(0, "check", stiffness, *store)
        self.assertFalse(first["work"]["analysis_reused"])
        second = self.expect(0, "check", stiffness, *store)
        self.assertTrue(second["work"]["analysis_reused"])
        third = self.expect(0, "count", other, "--at", "0.5", *store)  # of one pattern, asked otherwise
        self.assertTrue(third["work"]["analysis_reused"])
        self.assertEqual(without_times(second), without_times(alone))
        # Another pattern has an order of its own.
        ring = chain(400, 2) | {(399, 0): -0.1}
        self.assertFalse(self.expect(0, "check", self.matrix("R.mtx", 400, ring), *store)["work"]["analysis_reused"])

    def test_a_damaged_store_costs_time_only(self):
        stiffness = self.matrix("K.mtx", 400, chain(400))
        alone = without_times(self.expect(0, "check", stiffness))
        store = ("--analysis-store", "store")
        self.expect(0, "check", stiffness, *store)
        [kept] = (self.folder / "store").glob("*/*.order")
        good = kept.read_bytes()
        for bad in (b"", good[:-1], good.replace(b"order 1", b"order 2"), b"\0" * len(good)):
            kept.write_bytes(bad)
            again = self.expect(0, "check", stiffness, *store)
            self.assertFalse(again["work"]["analysis_reused"])
            self.assertEqual(without_times(again), alone)
            self.assertEqual(kept.read_bytes(), good, "a damaged file is written anew")


if __name__ == "__main__":
    unittest.main()
