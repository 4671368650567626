"""What the numbers of a file can tell: --precision, --digits, --risk and --seed."""

import os
import unittest

from program import ProgramTest, chain, diagonal


def ring(rows):
    """Springs of whole stiffness in a closed ring, held by one spring 2^-48: all but free, and exactly known."""
    entries = {(i, i): 0.0 for i in range(rows)}
    for i in range(rows):
        j, stiffness = (i + 1) % rows, float(1 + 7 * i % 11)
        entries[i, i] += stiffness
        entries[j, j] += stiffness
        entries[max(i, j), min(i, j)] = -stiffness
    entries[0, 0] += 2.0 ** -48
    return entries


class PrecisionTest(ProgramTest):
    def test_double_unless_asked(self):
        path = self.matrix("K.mtx", 4, chain(4))
        for arguments in ([], ["--precision", "double"]):
            self.assertEqual(self.expect(0, "check", path, *arguments)["certificate"]["precision"], "double")

    def test_extended(self):
        path = self.matrix("K.mtx", 4, chain(4))
        document = self.expect(0, "check", path, "--precision", "extended")
        self.assertEqual(document["certificate"]["precision"], "extended")
        self.assertLess(document["certificate"]["error_bound"], 1e-20)
        self.assertIn("in extended precision", self.run_program("check", path, "--precision", "extended").stdout)
        counted = self.expect(0, "count", path, "--at", "0.5", "--precision", "extended")
        self.assertEqual(counted["counts"][0]["certificate"]["precision"], "extended")

    def test_delays_far_beyond_the_forecast(self):
        # Every node tied to every other one: the ties of a complete graph on n nodes have rank n - 1 (graph theory), and
        # n-([I B^T; B 0]) is the rank of B. Stacks sized by the forecast do not hold what is delayed.
        nodes = 40
        entries, row = {(i, i): 1.0 for i in range(nodes)}, nodes
        for a in range(nodes):
            for b in range(a):
                entries[row, a], entries[row, b] = 1.0, -1.0
                row += 1
        path = self.matrix("K.mtx", row, entries)
        (self.folder / "dofs.csv").write_text("equation,node,dof\n" + "".join(f"{k + 1},{k + 1},{'ux' if k < nodes else 'multiplier'}\n" for k in range(row)), encoding="ascii")
        for precision in ("double", "extended"):
            with self.subTest(precision):
                document = self.expect(1, "check", path, "--dofs", "dofs.csv", "--precision", precision)
                self.assertEqual(document["inertia"]["negative"], nodes - 1)
                self.assertEqual(document["inertia"]["zero"], row - nodes - (nodes - 1))
                self.assertEqual(document["inertia"]["positive"], nodes)

    def test_extended_tells_what_double_cannot(self):
        path = self.matrix("K.mtx", 8000, ring(8000))
        self.assertEqual(self.expect(0, "check", path, "--precision", "extended")["verdict"], "positive_definite")
        double = self.expect(1, "check", path)
        self.assertEqual(double["verdict"], "positive_semidefinite")
        self.assertIn("last-resort", [warning["code"] for warning in double["warnings"]])

    def test_single_certifies_itself_or_says_that_it_cannot(self):
        path = self.matrix("K.mtx", 40, chain(40))
        document = self.expect(0, "check", path, "--precision", "single")
        self.assertEqual(document["certificate"]["precision"], "single")
        self.assertEqual(document["certificate"]["level"], "statistical")
        self.assertEqual(document["inertia"]["positive"], 40)
        self.assertIn("in single precision", self.run_program("check", path, "--precision", "single").stdout)
        counted = self.expect(0, "count", path, "--at", "0.5", "--precision", "single")
        usual = self.expect(0, "count", path, "--at", "0.5")
        self.assertEqual(counted["counts"][0]["certificate"]["precision"], "single")
        self.assertEqual(counted["counts"][0]["below"], usual["counts"][0]["below"])
        document = self.expect(3, "check", self.matrix("R.mtx", 8000, ring(8000)), "--precision", "single")
        self.assertEqual(document["certificate"]["level"], "none")
        self.assertIn("leave --precision out", " ".join(w["message"] for w in document["warnings"]))

    def test_single_where_it_does_not_go(self):
        path = self.matrix("K.mtx", 4, chain(4))
        for command in (["check", path, "--locate"], ["check", path, "--digits", "6"],
                        ["check", path, "--resolution", "1e-6"], ["locate", path]):
            with self.subTest(command):
                self.expect_failure(2, "contradiction", *command, "--precision", "single")

    def test_extended_needs_more_memory_and_says_so_beforehand(self):
        self.run_program("specimen", "solid", "--unknowns", "12000", "--out", "solid")
        forecast, peak = {}, {}
        for precision in ("double", "extended"):
            memory = self.expect(0, "check", "solid/K.mtx", "--threads", 2, "--precision", precision)["memory_bytes"]
            forecast[precision], peak[precision] = memory["forecast"], memory["peak"]
        # On two threads this model's stack takes some 37 MB in doubles; what the process holds besides differs between builds.
        self.assertGreater(forecast["extended"] - forecast["double"], 25e6)
        if not os.environ.get("STANCHION_SANITIZED"):  # a sanitizer holds memory of its own, which no forecast counts
            self.assertLessEqual(peak["extended"], 1.05 * forecast["extended"])
        between = (forecast["double"] + forecast["extended"]) // 2
        limits = ("--threads", 2, "--memory-cap", between)
        self.expect(0, "check", "solid/K.mtx", *limits)
        self.expect_failure(4, "memory-cap", "check", "solid/K.mtx", *limits, "--precision", "extended")

    def test_other_words(self):
        path = self.matrix("K.mtx", 4, chain(4))
        for value in ("half", "Double", ""):
            with self.subTest(value):
                self.assertIn("--precision", self.expect_failure(2, "bad-precision", "check", path, "--precision", value))


class DigitsTest(ProgramTest):
    def setUp(self):
        super().setUp()
        # Definite as written; with the off-diagonal 1.0 that would have been written 0.999 or 1.00 it is not.
        self.close = self.matrix("K.mtx", 2, {(0, 0): 1.0, (1, 0): 0.999, (1, 1): 1.0})

    def test_neighbours_may_be_singular(self):
        document = self.expect(1, "check", self.close, "--digits", "3")
        self.assertEqual(document["verdict"], "positive_definite")
        self.assertEqual(document["verdict_for_all_roundings"], "positive_semidefinite")
        run = self.run_program("check", self.close, "--digits", "3")
        self.assertTrue(run.stdout.startswith("K is positive definite"), run.stdout)
        self.assertIn("For every matrix whose rounding gives the numbers in the file: positive semidefinite",
                      " ".join(run.stdout.split()))

    def test_enough_digits_settle_it(self):
        document = self.expect(0, "check", self.close, "--digits", "8")
        self.assertEqual(document["verdict_for_all_roundings"], "positive_definite")
        self.assertIsNone(self.expect(0, "check", self.close)["verdict_for_all_roundings"])

    def test_an_expectation_must_hold_for_all_of_them(self):
        self.expect(3, "check", self.close, "--digits", "3", "--expect", "positive-definite")
        self.expect(0, "check", self.close, "--digits", "8", "--expect", "positive-definite")


class RiskTest(ProgramTest):
    def test_allowed_and_spent(self):
        path = self.matrix("K.mtx", 5, diagonal([1, -2, 3, -4, 5]))
        document = self.expect(1, "check", path, "--risk", "1e-4", "--seed", "12345678901234567")
        self.assertEqual((document["risk_allowed"], document["seed"]), (1e-4, 12345678901234567))
        self.assertLessEqual(document["risk"], document["risk_allowed"])

    def test_a_shift_on_an_eigenvalue_in_words(self):
        path = self.matrix("D.mtx", 4, diagonal([1, 2, 2, 3]))
        document = self.expect(3, "count", path, "--at", "2,2.5")
        low, high = document["counts"][0]["holds_outside"]
        self.assertTrue(low < 2 < high and high - low < 1e-6)
        self.assertIsNone(document["counts"][1]["holds_outside"])
        run = self.run_program("count", path, "--at", "2,2.5")
        self.assertRegex(run.stdout, r"\n +2 +1 to 3 ")
        self.assertRegex(" ".join(run.stdout.split()), r"2 eigenvalues lie within \S+ of this shift")


if __name__ == "__main__":
    unittest.main()
