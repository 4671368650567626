"""stanchion audit: complete lists, one missing, one doubled, one spurious, clusters, units, ranges."""

import math
import unittest

from program import ProgramTest, chain, chain_eigenvalues, diagonal

ROWS = 60
VALUES = chain_eigenvalues(ROWS)  # closed form: 2 - 2 cos(k pi / (n + 1))
FIRST = VALUES[:12]


class AuditTest(ProgramTest):
    def setUp(self):
        super().setUp()
        self.stiffness = self.matrix("K.mtx", ROWS, chain(ROWS, held=2))
        self.geometric = self.matrix("G.mtx", ROWS, diagonal([-1] * ROWS))

    def list(self, values, name="list.csv"):
        (self.folder / name).write_text("value\n" + "".join(f"{value!r}\n" for value in values), encoding="ascii")
        return self.folder / name

    def audit(self, code, values, *arguments):
        return self.expect(code, "audit", self.stiffness, "--geometric", self.geometric, "--values", self.list(values), *arguments)

    def test_a_complete_list_costs_a_handful(self):
        document = self.audit(0, FIRST)
        self.assertEqual((document["verdict"], document["gaps"]), ("complete", []))
        self.assertEqual((document["range"]["listed"], document["range"]["counted"]), (12, 12))
        self.assertEqual(document["range"]["from"], 0)
        self.assertLessEqual(document["work"]["factorizations"], 6)
        self.assertIn("residual", document["proof"])

    def test_by_counts_every_gap_is_counted_in(self):
        document = self.audit(0, FIRST, "--digits", 12)
        self.assertEqual(document["verdict"], "complete")
        self.assertIn("counts in every gap", document["proof"])
        swapped = FIRST[:3] + FIRST[4:] + [(FIRST[6] + FIRST[7]) / 2]  # as many as there are, but not those
        for method in ((), ("--digits", 12)):
            self.assertEqual(self.audit(1, swapped, *method)["verdict"], "missing_and_surplus")

    def test_a_value_moved_within_its_own_gap_is_noticed(self):
        # As many in every gap as are listed, but one of them far beyond its tolerance.
        moved = FIRST[:5] + [FIRST[5] * 1.001] + FIRST[6:]
        for method in ((), ("--digits", 12)):
            document = self.audit(1, moved, *method)
            self.assertEqual(document["verdict"], "missing_and_surplus")
        gap, = document["gaps"]
        self.assertEqual((gap["listed"], gap["counted"]), (1, 1))
        self.assertTrue(gap["low"] < FIRST[5] < gap["high"])
        # What the digits leave open is said to be open.
        document = self.audit(0, FIRST, "--digits", 12, "--tolerance", "1e-11")
        self.assertTrue(any("could not be shown" in sentence for sentence in document["sentences"]), document["sentences"])

    def test_with_an_indefinite_mass_lists_begin_at_0(self):
        # K = I and M diagonal: the values are the reciprocals of the masses, two of them negative.
        stiffness = self.matrix("K2.mtx", 5, diagonal([1] * 5))
        mass = self.matrix("M2.mtx", 5, diagonal([-4, -2, 1, 2, 8]))
        ask = ("audit", stiffness, "--mass", mass, "--values")
        for method in ((), ("--digits", 15)):
            for values, counted in (([0.125, 0.5, 1.0], 3), ([-0.5, -0.25], 2), ([-0.5, -0.25, 0.125], 3)):
                document = self.expect(0, *ask, self.list(values), *method)
                self.assertEqual((document["verdict"], document["range"]["counted"]), ("complete", counted))
            self.assertEqual(self.expect(1, *ask, self.list([-0.5]), *method)["verdict"], "missing")

    def test_a_verdict_that_rests_on_a_test_is_not_called_proved(self):
        # The ends of the tolerances lie so near the values that proofs leave their counts open.
        stiffness = self.matrix("K3.mtx", 4, {(0, 0): 1.0, (1, 1): 2.0, (2, 2): 3.0, (3, 2): 1.0})
        mass = self.matrix("M3.mtx", 4, diagonal([1, 1, 1, 0]))
        multipliers = self.folder / "multipliers.txt"
        multipliers.write_text("4\n", encoding="ascii")
        for tolerance, level in (("1e-9", "proved"), ("1e-14", "statistical")):
            document = self.expect(0, "audit", stiffness, "--mass", mass, "--multipliers", multipliers,
                                   "--values", self.list([1.0, 2.0]), "--tolerance", tolerance)
            self.assertEqual((document["verdict"], document["range"]["level"]), ("complete", level))
            self.assertEqual(document["range"]["failure_probability"], document["risk"] if level == "statistical" else None)

    def test_tolerances_narrower_than_what_is_certain_are_not_called_kept(self):
        moved = FIRST[:3] + [FIRST[3] * (1 + 1e-11)] + FIRST[4:]
        for values, tolerance, shown in ((FIRST, "1e-6", True), (moved, "1e-13", False)):
            document = self.audit(0, values, "--tolerance", tolerance)
            self.assertEqual(any("could not be shown" in sentence for sentence in document["sentences"]), not shown)

    def test_one_missing(self):
        for method in ((), ("--digits", 12)):
            document = self.audit(1, FIRST[:5] + FIRST[6:], "--find-missing", *method)
            self.assertEqual(document["verdict"], "missing")
            gap, = document["gaps"]
            self.assertTrue(gap["low"] < FIRST[5] < gap["high"])
            if method:
                self.assertEqual(gap["counted"] - gap["listed"], 1)
            else:
                self.assertEqual((gap["listed"], gap["counted"]), (0, 1))
            self.assertTrue(any(value["low"] <= FIRST[5] * (1 + 1e-12) and FIRST[5] * (1 - 1e-12) <= value["high"]
                                for value in document["missing"]))

    def test_missing_below_the_first_listed(self):
        document = self.audit(1, FIRST[1:])
        self.assertEqual(document["verdict"], "missing")
        self.assertTrue(document["gaps"][0]["low"] < FIRST[0] < document["gaps"][0]["high"])
        self.audit(0, FIRST[1:], "--from", repr((FIRST[0] + FIRST[1]) / 2))

    def test_one_doubled_and_one_spurious(self):
        document = self.audit(1, FIRST + [FIRST[4]])
        self.assertEqual(document["verdict"], "surplus")
        self.assertEqual((document["gaps"][0]["listed"], document["gaps"][0]["counted"]), (2, 1))
        document = self.audit(1, FIRST + [(FIRST[4] + FIRST[5]) / 2])
        self.assertEqual(document["verdict"], "surplus")
        self.assertEqual((document["gaps"][0]["listed"], document["gaps"][0]["counted"]), (1, 0))

    def test_one_of_a_pair_removed(self):
        path = self.matrix("D.mtx", 5, diagonal([1, 2, 2, 3, 9]))
        for method in ((), ("--digits", 14)):
            for listed, verdict in (([1, 2, 2, 3], "complete"), ([1, 2, 3], "missing"), ([1, 2, 2, 2, 3], "surplus")):
                document = self.expect(0 if verdict == "complete" else 1, "audit", path, "--values", self.list(listed), *method)
                self.assertEqual(document["verdict"], verdict)

    def test_tolerances_keep_clusters_together(self):
        values = [1, 1 + 1e-7, 4]
        path = self.matrix("D.mtx", 3, diagonal(values))
        (self.folder / "t.csv").write_text("value,tolerance,label\n1.00002,1e-4,a\n0.99998,1e-4,b\n4,1e-3,c\n", encoding="ascii")
        document = self.expect(0, "audit", path, "--values", "t.csv")
        self.assertEqual(document["verdict"], "complete")
        (self.folder / "t.csv").write_text("value,tolerance,label\n1.00002,1e-6,a\n0.99998,1e-6,b\n4,1e-3,c\n", encoding="ascii")
        document = self.expect(1, "audit", path, "--values", "t.csv")
        self.assertEqual(document["verdict"], "missing_and_surplus")
        self.assertIn("a", [label for gap in document["gaps"] for label in gap["labels"]])

    def test_a_chain_of_tolerances_does_not_hide_a_value_far_from_all(self):
        # Tolerances meet from value to value, and the number is right, but none lies near the last one listed.
        path = self.matrix("D.mtx", 4, diagonal([1, 1.1, 1.2, 9]))
        (self.folder / "t.csv").write_text("value,tolerance\n1.1,0.2\n1.4,0.15\n1.8,0.35\n", encoding="ascii")
        for method in ((), ("--digits", 12)):
            document = self.expect(1, "audit", path, "--values", "t.csv", *method)
            self.assertEqual(document["verdict"], "missing_and_surplus")
            gap, = document["gaps"]
            self.assertEqual((gap["listed"], gap["counted"]), (3, 3))
        (self.folder / "t.csv").write_text("value,tolerance\n1.05,0.2\n1.25,0.2\n1.15,0.06\n", encoding="ascii")
        for method in ((), ("--digits", 12)):
            self.expect(0, "audit", path, "--values", "t.csv", *method)

    def test_hertz_and_omega2(self):
        mass = self.matrix("M.mtx", ROWS, diagonal([1] * ROWS))
        hertz = [math.sqrt(value) / (2 * math.pi) for value in FIRST]
        for values, unit in ((hertz, "hertz"), (FIRST, "omega2")):
            for chosen, code in ((values, 0), (values[:2] + values[3:], 1)):
                document = self.expect(code, "audit", self.stiffness, "--mass", mass, "--values", self.list(chosen), "--unit", unit)
                self.assertEqual(document["verdict"], "missing" if code else "complete")

    def test_ends_that_lie_on_a_value(self):
        # K diagonal and G = -I: the factors are 1 to 6, exactly. What lies on an end belongs to the range.
        stiffness = self.matrix("K6.mtx", 6, diagonal([1, 2, 3, 4, 5, 6]))
        geometric = self.matrix("G6.mtx", 6, diagonal([-1] * 6))
        for values, ends, code, verdict, numbers in (
                ([1, 2, 3], ("--to", 3), 0, "complete", (3, 3)), ([1, 2], ("--to", 3), 1, "missing", (2, 3)),
                ([2, 3, 4], ("--from", 2, "--to", 4), 0, "complete", (3, 3)),
                ([1, 3, 4, 5], ("--from", 2, "--to", 4), 1, "missing", (2, 3))):
            document = self.expect(code, "audit", stiffness, "--geometric", geometric, "--values", self.list(values), *ends)
            self.assertEqual(document["verdict"], verdict)
            self.assertEqual((document["range"]["listed"], document["range"]["counted"]), numbers)
            self.assertIn("end-on-value", [warning["code"] for warning in document["warnings"]])
            self.assertLess(document["range"]["to"], ends[-1] + 0.5)
            self.assertGreater(document["range"]["to"], ends[-1])

    def test_negative_factors(self):
        document = self.audit(0, [-value for value in FIRST], "--load-sign", "minus")
        self.assertEqual((document["range"]["to"], document["range"]["counted"]), (0, 12))

    def test_k_not_definite_is_unresolved(self):
        path = self.matrix("I.mtx", 3, diagonal([-1, 2, 3]))
        geometric = self.matrix("B.mtx", 3, diagonal([-1, -1, -1]))
        document = self.expect(3, "audit", path, "--geometric", geometric, "--values", self.list([2, 3]))
        self.assertEqual(document["verdict"], "unresolved")
        self.expect(3, "audit", path, "--geometric", geometric, "--values", self.list([2, 3]), "--expect", "complete")

    def test_bad_questions(self):
        both = ("--geometric", self.geometric)
        self.expect_failure(2, "missing-argument", "audit", self.stiffness, *both)
        self.expect_failure(2, "file-not-found", "audit", self.stiffness, *both, "--values", "none.csv")
        good = self.list(FIRST)
        self.expect_failure(2, "contradiction", "audit", self.stiffness, *both, "--values", good, "--unit", "hertz")
        self.expect_failure(2, "out-of-range", "audit", self.stiffness, *both, "--values", good, "--tolerance", -1)
        self.expect_failure(2, "expectation-not-applicable", "audit", self.stiffness, *both, "--values", good, "--expect",
                            "none-below")
        self.expect_failure(2, "contradiction", "audit", self.stiffness, *both, "--values", good, "--json", good)


if __name__ == "__main__":
    unittest.main()
