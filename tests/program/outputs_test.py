"""Where answers go: --json, --quiet, --log; nothing is ever half-written."""

import os
import subprocess
import unittest

from program import PROGRAM, ProgramTest, chain, read_json


class OutputsTest(ProgramTest):
    def setUp(self):
        super().setUp()
        self.stiffness = self.matrix("K.mtx", 30, chain(30))

    def test_json_on_standard_output_is_alone_there(self):
        run = self.run_program("check", self.stiffness, "--json", "-")
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        self.assertEqual(read_json(run.stdout)["verdict"], "positive_definite")
        quiet = self.run_program("check", self.stiffness, "--json", "-", "--quiet")
        self.assertEqual(read_json(quiet.stdout)["verdict"], "positive_definite")

    def test_quiet_leaves_the_exit_code(self):
        run = self.run_program("check", self.stiffness, "--quiet")
        self.assertEqual((run.returncode, run.stdout, run.stderr), (0, "", ""))

    def test_numbers_in_json_and_a_second_run_agree(self):
        first, second = (read_json(self.run_program("check", self.stiffness, "--json", "-").stdout) for _ in range(2))
        for varying in ("timings_seconds", "memory_bytes"):
            first.pop(varying), second.pop(varying)
        self.assertEqual(first, second)

    def test_a_link_stays_a_link(self):
        (self.folder / "link.json").symlink_to("answer.json")
        self.expect_zero("check", self.stiffness, "--json", "link.json", "--quiet")
        self.assertTrue((self.folder / "link.json").is_symlink())
        self.assertEqual(read_json((self.folder / "answer.json").read_text())["command"], "check")

    def test_no_part_is_left_beside_the_answer(self):
        self.expect_zero("check", self.stiffness, "--json", "answer.json", "--quiet")
        self.assertEqual(sorted(os.listdir(self.folder)), ["K.mtx", "answer.json"])

    def test_unwritable_places_are_found_before_the_work(self):
        for option in ("--json", "--log"):
            with self.subTest(option):
                self.expect_failure(2, "cannot-write", "check", "nowhere.mtx", option, "no/such/folder/x")
        self.expect_failure(2, "cannot-write", "check", self.stiffness, "--json", self.folder)

    def test_a_full_disk(self):
        self.expect_failure(4, "write-failed", "check", self.stiffness, "--json", "/dev/full")
        with open("/dev/full", "w", encoding="ascii") as full:
            run = self.run_full(full)
        self.assertEqual(run.returncode, 4)
        self.assertIn("[write-failed]", run.stderr)

    def test_log(self):
        self.expect_zero("check", self.stiffness, "--log", "run.log", "--quiet")
        lines = (self.folder / "run.log").read_text().splitlines()
        self.assertIn(" stanchion ", lines[0])
        self.assertIn("answered, exit code 0", lines[-1])
        for line in lines:
            self.assertRegex(line, r"^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\.\d{3} \S")
        run = self.run_program("check", self.stiffness, "--log", "-", "--json", "-")
        self.assertGreater(len(run.stderr.splitlines()), 1)
        read_json(run.stdout)

    def expect_zero(self, *arguments):
        run = self.run_program(*arguments)
        self.assertEqual((run.returncode, run.stderr), (0, ""))

    def run_full(self, stream):
        return subprocess.run([PROGRAM, "check", self.stiffness], stdout=stream, stderr=subprocess.PIPE, text=True,
                              check=False, timeout=60)


if __name__ == "__main__":
    unittest.main()
