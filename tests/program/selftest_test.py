"""stanchion selftest: what was tried, as text and as JSON."""

import json
import unittest

from program import ProgramTest


class SelftestTest(ProgramTest):
    def test_text_names_every_property_and_the_blas(self):
        run = self.run_program("selftest")
        self.assertEqual((run.returncode, run.stderr), (0, ""), run.stdout)
        for words in ("rounding to nearest", "underflow", "fused", "dense products", "BLAS", "own loops"):
            self.assertIn(words, run.stdout)
        self.assertNotIn("wrong", run.stdout)
        self.assertIn("as the error bounds assume", run.stdout)

    def test_json_to_a_file_and_to_standard_output(self):
        run = self.run_program("selftest", "--quick", "--quiet", "--json", "answer.json")
        self.assertEqual((run.returncode, run.stdout, run.stderr), (0, "", ""))
        written = json.loads((self.folder / "answer.json").read_text(encoding="utf-8"))
        shown = json.loads(self.run_program("selftest", "--quick", "--json", "-").stdout)
        for document in (written, shown):
            self.assertEqual(document["schema_version"], 1)
            self.assertTrue(document["ok"])
            self.assertTrue(all(test["ok"] and test["seconds"] >= 0 for test in document["tests"]))
            self.assertEqual(len(document["tests"]), 10)

    def test_errors(self):
        self.expect_failure(2, "cannot-write", "selftest", "--json", "no/such/folder/answer.json")
        self.expect_failure(2, "unknown-argument", "selftest", "K.mtx")


if __name__ == "__main__":
    unittest.main()
