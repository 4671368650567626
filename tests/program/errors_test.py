"""What the program says when it cannot answer: bad usage, bad input, limits."""

import os
import re
import resource
import unittest

from program import ProgramTest, chain, diagonal


class UsageTest(ProgramTest):
    def setUp(self):
        super().setUp()
        self.stiffness = self.matrix("K.mtx", 30, chain(30))

    def test_no_command_and_unknown_command(self):
        self.expect_failure(2, "missing-argument")
        self.assertIn("'verify'", self.expect_failure(2, "unknown-argument", "verify", self.stiffness))

    def test_help_and_version(self):
        run = self.run_program("--version")
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        self.assertRegex(run.stdout, r"^stanchion \d+\.\d+\.\d+\n$")
        for arguments in (["--help"], ["check", "--help"], ["count", "--help"], ["forecast", "-h"]):
            run = self.run_program(*arguments)
            self.assertEqual((run.returncode, run.stderr), (0, ""))
            self.assertIn("Usage: stanchion", run.stdout)

    def test_options_are_not_abbreviated(self):
        self.assertIn("--thread'", self.expect_failure(2, "unknown-argument", "check", self.stiffness, "--thread", 1))
        self.expect_failure(2, "unknown-argument", "check", self.stiffness, "--at", "1")
        self.expect_failure(2, "unknown-argument", "count", self.stiffness, "surplus.mtx")
        self.expect_failure(2, "file-not-found", "check", self.stiffness, "no-second-step.mtx")

    def test_missing_arguments(self):
        self.expect_failure(2, "missing-argument", "check")
        self.expect_failure(2, "missing-argument", "count", self.stiffness)
        self.expect_failure(2, "bad-argument", "check", self.stiffness, "--json")

    def test_numbers(self):
        for option, value in [("--threads", "two"), ("--risk", "1e"), ("--resolution", "nan"), ("--digits", "8.5"),
                              ("--seed", ""), ("--rows", "0x10")]:
            with self.subTest(option):
                text = self.expect_failure(2, "bad-number", "check", self.stiffness, option, value)
                self.assertIn(option, text)
        for option, value in [("--threads", "0"), ("--risk", "0"), ("--risk", "1.5"), ("--resolution", "0"),
                              ("--digits", "18"), ("--digits", "0"), ("--seed", "-1"), ("--base", "2"),
                              ("--rows", "99999999999")]:
            with self.subTest(option=option, value=value):
                text = self.expect_failure(2, "out-of-range", "check", self.stiffness, option, value)
                self.assertIn(option, text)
        for value in ("1,,2", "1,", "inf", "1;2", "a"):
            with self.subTest(value):
                self.expect_failure(2, "bad-number", "count", self.stiffness, "--at", value)

    def test_contradictions(self):
        self.expect_failure(2, "contradiction", "count", self.stiffness, "--at", 1, "--geometric", self.stiffness,
                            "--mass", self.stiffness)
        self.expect_failure(2, "contradiction", "count", self.stiffness, "--at", 1, "--load-sign", "minus")
        self.expect_failure(2, "contradiction", "check", self.stiffness, "--json", self.stiffness)

    def test_words(self):
        self.expect_failure(2, "bad-expectation", "check", self.stiffness, "--expect", "stable")
        self.expect_failure(2, "expectation-not-applicable", "count", self.stiffness, "--at", 1, "--expect", "zero:1")
        self.expect_failure(2, "bad-size", "check", self.stiffness, "--memory-cap", "8 apples")
        self.expect_failure(2, "bad-added-matrix", "check", self.stiffness, "--add", self.stiffness)
        self.expect_failure(2, "bad-number", "check", self.stiffness, "--add", f"{self.stiffness}:x")
        self.expect_failure(2, "bad-load-sign", "count", self.stiffness, "--geometric", self.stiffness, "--at", 1,
                            "--load-sign", "up")


class InputTest(ProgramTest):
    def test_missing_file(self):
        text = self.expect_failure(2, r"[a-z-]+", "check", "nowhere.mtx")
        self.assertIn("nowhere.mtx", text)

    def test_missing_second_file(self):
        path = self.matrix("K.mtx", 5, chain(5))
        for option in ("--geometric", "--mass", "--dofs", "--fix", "--multipliers"):
            with self.subTest(option):
                text = self.expect_failure(2, r"[a-z-]+", "count", path, "--at", 1, option, "nowhere.txt")
                self.assertIn("nowhere.txt", text)

    def test_a_folder_and_an_empty_file(self):
        self.expect_failure(2, r"[a-z-]+", "check", self.folder)
        (self.folder / "empty.mtx").write_text("")
        self.assertIn("empty.mtx", self.expect_failure(2, r"[a-z-]+", "check", "empty.mtx"))

    def test_the_place_of_a_damaged_entry(self):
        text = "%%MatrixMarket matrix coordinate real symmetric\n2 2 3\n1 1 2\n2 1 abc\n2 2 2\n"
        (self.folder / "K.mtx").write_text(text)
        self.assertIn("K.mtx:4", self.expect_failure(2, r"[a-z-]+", "check", "K.mtx"))

    def test_matrices_of_different_size(self):
        stiffness = self.matrix("K.mtx", 5, chain(5))
        other = self.matrix("G.mtx", 6, chain(6))
        self.expect_failure(2, r"[a-z-]+", "count", stiffness, "--geometric", other, "--at", 1)


class LimitTest(ProgramTest):
    def test_memory_cap_is_refused_with_the_figure(self):
        path = self.matrix("K.mtx", 3000, chain(3000))
        text = self.expect_failure(4, r"[a-z-]+", "check", path, "--memory-cap", "1k")
        need, unit, cap, cap_unit = re.search(r"(\d+) (KiB|MiB)\D* (\d+) (KiB|MiB)", text).groups()
        self.assertEqual((cap, cap_unit), ("1", "KiB"), text)
        self.assertGreater((unit, int(need)), (cap_unit, int(cap)))

    def test_a_sufficient_cap_changes_nothing(self):
        self.expect(0, "check", self.matrix("K.mtx", 3000, chain(3000)), "--memory-cap", "2G")

    @unittest.skipIf(os.environ.get("STANCHION_SANITIZED"), "a sanitizer reserves more than any limit allows")
    def test_dense_products_without_memory_end_the_run(self):
        # OpenBLAS wants 128 MiB of address space for each thread inside a product and, refused it, asks for ever.
        self.matrix("K.mtx", 2000, chain(2000))
        self.matrix("M.mtx", 2000, diagonal([1] * 2000))

        def limited():
            resource.setrlimit(resource.RLIMIT_DATA, (300 << 20, 300 << 20))
            resource.setrlimit(resource.RLIMIT_CPU, (60, 60))

        bracket = ("bracket", "K.mtx", "--mass", "M.mtx", "--first", 2)
        environment = {**os.environ, "OPENBLAS_NUM_THREADS": "1"}
        run = self.run_program(*bracket, "--threads", 8, preexec_fn=limited, env=environment)
        self.assertEqual((run.returncode, run.stdout), (4, ""), run.stderr)
        self.assertIn("[out-of-memory]", run.stderr)
        self.assertEqual(self.run_program(*bracket, "--threads", 1, preexec_fn=limited, env=environment).returncode, 0)



if __name__ == "__main__":
    unittest.main()
