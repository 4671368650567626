"""stanchion bracket: rigorous intervals with multiplicity, completeness, both signs, the safety question."""

import math
import struct
import unittest
import xml.etree.ElementTree

from program import ProgramTest, chain, chain_eigenvalues, diagonal

ROWS = 40
VALUES = chain_eigenvalues(ROWS)  # closed form: 2 - 2 cos(k pi / (n + 1))


def cube(n):
    """Seven-point Laplacian of an n x n x n cube, held all round: values a_i + a_j + a_k of the chain, up to sixfold."""
    entries = {}
    for i in range(n):
        for j in range(n):
            for k in range(n):
                row = (i * n + j) * n + k
                entries[row, row] = 6.0
                if k + 1 < n:
                    entries[row + 1, row] = -1.0
                if j + 1 < n:
                    entries[row + n, row] = -1.0
                if i + 1 < n:
                    entries[row + n * n, row] = -1.0
    return n**3, entries


def congruent(values, below=1):
    """L^T diag(values) L with L unit lower bidiagonal, `below` beneath its diagonal: integers, so that pencils of two such matrices have
    values that are known. The larger `below`, the worse its condition: like below^(2 n)."""
    entries = {}
    for i, value in enumerate(values):
        entries[i, i] = value + (below * below * values[i + 1] if i + 1 < len(values) else 0)
        if i > 0:
            entries[i, i - 1] = below * value
    return entries


class BracketTest(ProgramTest):
    def setUp(self):
        super().setUp()
        self.stiffness = self.matrix("K.mtx", ROWS, chain(ROWS, held=2))
        self.geometric = self.matrix("G.mtx", ROWS, diagonal([-1] * ROWS))

    def bracket(self, code, *arguments):
        return self.expect(code, "bracket", *arguments)

    def hold(self, document, values, slack=1e-12):
        """Every interval holds as many of the true `values` as its multiplicity says, and all of them are there."""
        total = 0
        for critical in document["critical"]:
            room = slack * max(abs(critical["low"]), abs(critical["high"]))
            inside = sum(critical["low"] - room <= value <= critical["high"] + room for value in values)
            self.assertEqual(inside, critical["multiplicity"], critical)
            self.assertLessEqual(critical["low"], critical["value"])
            self.assertLessEqual(critical["value"], critical["high"])
            total += critical["multiplicity"]
        if document["complete"] is not None:
            self.assertEqual(total, document["complete"]["count"])
        for before, after in zip(document["critical"], document["critical"][1:]):
            self.assertLessEqual(before["high"], after["low"])
        return total

    def test_an_end_on_a_value(self):
        # K = L^T D L and G = -L^T S L with integers: the factors are D / S, exactly.
        signs = [1] * 9 + [-1] * 4
        factors = [2, 2, 2, 5, 7, 7, 9, 12, 40, -3, -7, -7, -8]
        path = self.matrix("D.mtx", 13, congruent([abs(factor) for factor in factors]))
        geometric = self.matrix("S.mtx", 13, congruent([-sign for sign in signs]))
        for low, high, expected, moved in ((3, 7, [5, 7, 7], 1), (2, 9, [2, 2, 2, 5, 7, 7, 9], 2), (-7, 2, [-7, -7, -3, 2, 2, 2], 2),
                                           (3, 8, [5, 7, 7], 0), (10, 11, [], 0)):
            document = self.bracket(0, path, "--geometric", geometric, "--from", low, "--to", repr(high))
            self.hold(document, factors)
            self.assertEqual(sum(value["multiplicity"] for value in document["critical"]), len(expected))
            complete = document["complete"]
            self.assertEqual(complete["count"], len(expected))
            self.assertEqual(sum(complete["from"] < factor < complete["to"] for factor in factors), len(expected))
            self.assertEqual((complete["from"] != low) + (complete["to"] != high), moved)
            warned = "end-on-value" in [warning["code"] for warning in document["warnings"]]
            self.assertEqual(warned, moved > 0)
            self.assertLessEqual(document["work"]["factorizations"], 24)
        # Whether a factor of exactly 2 is below 2 is not decided by anything that rounds.
        for below, code, none in ((2, 3, None), (1.9, 0, True), (2.1, 1, False), (-3, 3, None)):
            document = self.bracket(code, path, "--geometric", geometric, "--below", below, "--expect", "none-below")
            self.assertIs(document["none_below"], none)

    def test_estimates_that_rounding_spoils_do_not_pass_for_values(self):
        # Close to singular the estimates are off by parts in a hundred; an end in front of every value then counts none.
        for below, rows in ((2, 24), (3, 16), (3, 18), (4, 14), (5, 14), (5, 12)):
            factors = [1000 + (7 * k) % rows for k in range(rows)]
            path = self.matrix("I.mtx", rows, congruent(factors, below))
            geometric = self.matrix("J.mtx", rows, congruent([-1] * rows, below))
            document = self.bracket(0, path, "--geometric", geometric, "--first", 1)
            self.assertNotIn("fewer-than-asked", [warning["code"] for warning in document["warnings"]])
            self.assertGreaterEqual(len(document["critical"]), 1)
            for value in document["critical"]:
                self.assertGreaterEqual(sum(value["low"] <= factor <= value["high"] for factor in factors), value["multiplicity"])

    def test_no_range_is_complete_beyond_what_was_counted(self):
        # So badly conditioned that no count behind the values is exact: nothing is known of what lies there.
        for method, first, below, factors in (
                ("counts", 1, 6, [7, -1001, 100000, -10**8, -1000, -10000, -100000, -5, 9, 5, 3, -7, 5]),
                ("residual", 3, 5, [1004, -1000, -2, 7, 10**8, -1000, -10**7, -1005, -1005, 7, 1008, -1006, -1002, 10, -10, 3])):
            rows = len(factors)
            path = self.matrix("W.mtx", rows, congruent([abs(factor) for factor in factors], below))
            geometric = self.matrix("V.mtx", rows, congruent([-1 if factor > 0 else 1 for factor in factors], below))
            document = self.bracket(3, path, "--geometric", geometric, "--first", first, "--side", "negative", "--method", method)
            self.assertIsNone(document["complete"])
            self.assertGreaterEqual(len(document["critical"]), 1)
            for value in document["critical"]:
                self.assertGreaterEqual(sum(value["low"] <= factor <= value["high"] for factor in factors), value["multiplicity"])

    def test_values_far_behind_the_zeros_are_seen(self):
        # Rows without stiffness have the scale of their mass; what follows their zeros is 1e17 times the first guess of a shift.
        stiffness = self.matrix("K9.mtx", 9, diagonal([0, 0, 0, 1.4e10, 1.4e10, 3e10, 4e10, 5e10, 6e10]))
        mass = self.matrix("M9.mtx", 9, diagonal([1] * 9))
        document = self.bracket(0, stiffness, "--mass", mass, "--first", 3)
        self.assertEqual([value["multiplicity"] for value in document["critical"]], [3, 2, 1])
        self.assertEqual([value["rigid_body"] for value in document["critical"]], [True, False, False])
        for value, true in zip(document["critical"], (0, 1.4e10, 3e10), strict=True):
            self.assertTrue(value["low"] <= true <= value["high"])
        self.assertNotIn("fewer-than-asked", [warning["code"] for warning in document["warnings"]])

    def test_counts_look_far_enough_where_a_row_has_mass_alone(self):
        # The heavy row without stiffness makes the norm of the scaled mass 1e15 times that of the stiffness.
        stiffness = self.matrix("Kh.mtx", 6, diagonal([1, 2, 3, 4, 5, 0]))
        mass = self.matrix("Mh.mtx", 6, diagonal([1, 1, 1, 1, 1, 1e15]))
        document = self.bracket(0, stiffness, "--mass", mass, "--first", 3, "--method", "counts")
        self.assertEqual(document["complete"]["count"], 4)
        self.assertEqual([value["rigid_body"] for value in document["critical"]], [True, False, False, False])
        for value, true in zip(document["critical"], (0, 1, 2, 3), strict=True):
            self.assertEqual(value["multiplicity"], 1)
            self.assertTrue(value["low"] <= true <= value["high"])

    def test_values_below_where_the_mass_is_indefinite_are_those_between_0_and_the_end(self):
        # K = I and M diagonal: the values are the reciprocals of the masses, two of them negative.
        masses = [-4.0, -2.0, 1.0, 2.0, 8.0]
        stiffness = self.matrix("K2.mtx", 5, diagonal([1] * 5))
        mass = self.matrix("M2.mtx", 5, diagonal(masses))
        for method in ("residual", "counts"):
            for end, values in ((0.75, [0.125, 0.5]), (-0.2, []), (-0.3, [-0.25]), (-0.6, [-0.5, -0.25])):
                document = self.bracket(0, stiffness, "--mass", mass, f"--below={end}", "--method", method)
                self.assertEqual(self.hold(document, values), len(values))
                complete = document["complete"]
                self.assertEqual((complete["from"], complete["to"]), (min(end, 0), max(end, 0)), method)
                self.assertIn("mass-not-definite", [warning["code"] for warning in document["warnings"]])

    def test_the_first_factors_by_both_methods(self):
        for method in ("residual", "counts"):
            document = self.bracket(0, self.stiffness, "--geometric", self.geometric, "--first", 5, "--method", method)
            self.assertEqual(self.hold(document, VALUES), 5)
            self.assertEqual({critical["proof"] for critical in document["critical"]}, {method})
            self.assertLess(document["complete"]["to"], VALUES[5])
            self.assertEqual(document["other_side"]["count"], 0)
            for critical in document["critical"]:
                self.assertLessEqual(critical["high"] - critical["low"], 1e-8 * critical["high"])

    def test_a_range_off_zero(self):
        low, high = (VALUES[3] + VALUES[4]) / 2, (VALUES[8] + VALUES[9]) / 2
        for method in ("residual", "counts"):
            document = self.bracket(0, self.stiffness, "--geometric", self.geometric, "--from", repr(low), "--to", repr(high),
                                    "--method", method)
            self.assertEqual(self.hold(document, VALUES), 5)

    def test_multiplicity_is_that_of_the_closed_form(self):
        n = 7
        rows, entries = cube(n)
        chain_values = chain_eigenvalues(n)
        values = sorted(a + b + c for a in chain_values for b in chain_values for c in chain_values)
        path = self.matrix("C.mtx", rows, entries)
        document = self.bracket(0, path, "--below", 2)
        self.assertEqual(self.hold(document, values), sum(value < 2 for value in values))
        self.assertIn(6, [critical["multiplicity"] for critical in document["critical"]])
        self.assertIn(3, [critical["multiplicity"] for critical in document["critical"]])

    def test_a_cluster_at_the_end_is_taken_in_whole(self):
        path = self.matrix("D.mtx", 4, diagonal([1, 2, 2, 5]))
        for method in ("residual", "counts"):
            document = self.bracket(0, path, "--first", 2, "--method", method)
            self.assertEqual([critical["multiplicity"] for critical in document["critical"]], [1, 2])
            self.assertEqual(document["more_than_asked"], 1)

    def test_glued_clusters_are_told_apart_or_not_but_never_lost(self):
        for exponent in (4, 6, 8, 10, 12, 14):
            values = [1, 3, 3 * (1 + 10.0**-exponent), 3 * (1 + 2 * 10.0**-exponent), 7]
            path = self.matrix(f"glued{exponent}.mtx", 5, diagonal(values))
            for method in ("residual", "counts"):
                with self.subTest((exponent, method)):
                    document = self.bracket(0, path, "--below", 6.5, "--method", method)
                    self.assertEqual(self.hold(document, values), 4)

    def test_both_signs_of_the_factor(self):
        path = self.matrix("D.mtx", 4, diagonal([1, 2, 3, 4]))
        geometric = self.matrix("B.mtx", 4, diagonal([-1, 1, -0.5, 1]))  # factors 1, -2, 6, -4
        values = [1, -2, 6, -4]
        document = self.bracket(0, path, "--geometric", geometric, "--from", -5, "--to", 7)
        self.assertEqual(self.hold(document, values), 4)
        self.assertIsNone(document["other_side"])
        for side, first in (("negative", [-2]), ("positive", [1]), ("both", [1])):
            for method in ("residual", "counts"):
                document = self.bracket(0, path, "--geometric", geometric, "--first", 1, "--side", side, "--method", method)
                self.assertEqual(self.hold(document, values), 1)
                self.assertAlmostEqual(document["critical"][0]["value"], first[0])
        document = self.bracket(0, path, "--geometric", geometric, "--load-sign", "minus", "--below", -1.5)
        self.assertEqual(self.hold(document, [-value for value in values]), 1)

    def test_factors_on_the_other_side_only_are_warned_of(self):
        wrong = self.matrix("W.mtx", ROWS, diagonal([1] * ROWS))
        document = self.bracket(0, self.stiffness, "--geometric", wrong, "--below", 1)
        self.assertEqual(document["critical"], [])
        self.assertGreater(document["other_side"]["count"], 0)
        self.assertIn("factors-only-on-the-other-side", [warning["code"] for warning in document["warnings"]])

    def test_the_safety_question_takes_two_factorizations(self):
        safe = repr(VALUES[0] * 0.9)
        document = self.bracket(0, self.stiffness, "--geometric", self.geometric, "--below", safe, "--expect", "none-below")
        self.assertEqual(document["work"]["factorizations"], 2)
        self.assertEqual((document["none_below"], document["complete"]["count"]), (True, 0))
        self.assertTrue(any("convexity" in sentence for sentence in document["sentences"]))
        document = self.bracket(1, self.stiffness, "--geometric", self.geometric, "--below", 0.05, "--expect", "none-below")
        self.assertEqual(document["none_below"], False)
        self.assertEqual(self.hold(document, VALUES), sum(value < 0.05 for value in VALUES))

    def test_safe_here_but_not_on_the_other_side(self):
        wrong = self.matrix("W.mtx", ROWS, diagonal([1] * ROWS))
        document = self.bracket(0, self.stiffness, "--geometric", wrong, "--below", 1, "--expect", "none-below")
        self.assertEqual(document["none_below"], True)
        self.assertGreater(document["other_side"]["count"], 0)
        self.assertIn("factors-only-on-the-other-side", [warning["code"] for warning in document["warnings"]])

    def test_a_factor_at_the_limit_itself_is_left_open(self):
        path = self.matrix("D.mtx", 2, diagonal([1.5, 4]))
        geometric = self.matrix("B.mtx", 2, diagonal([-1, -1]))
        document = self.bracket(3, path, "--geometric", geometric, "--below", 1.5, "--expect", "none-below")
        self.assertIsNone(document["none_below"])

    def test_k_not_definite_is_said_first(self):
        path = self.matrix("I.mtx", 3, diagonal([-1, 2, 3]))
        geometric = self.matrix("B.mtx", 3, diagonal([-1, -1, -1]))
        document = self.bracket(3, path, "--geometric", geometric, "--below", 2.5)
        self.assertEqual((document["critical"], document["complete"]), ([], None))
        self.assertEqual([warning["code"] for warning in document["warnings"]].count("stiffness-not-definite"), 1)
        self.assertIn("K itself is not positive definite (1 negative, 0 zero directions)", document["in_words"][1])
        self.assertIn("negative directions of K + f G at the shift 2.5: 2;", document["in_words"][2])

    def test_common_null_vectors_are_said(self):
        path = self.matrix("S.mtx", 3, diagonal([0, 2, 3]))
        geometric = self.matrix("B.mtx", 3, diagonal([0, -1, -1]))
        document = self.bracket(3, path, "--geometric", geometric, "--below", 2.5)
        self.assertEqual([warning["code"] for warning in document["warnings"]].count("common-null-vectors"), 1)
        self.assertIn("singular at every f, so that no critical factor is defined", document["in_words"][2])
        (remedy,) = {warning["message"].rsplit("Remedy: ", 1)[1] for warning in document["warnings"]
                     if warning["code"] == "shift-at-eigenvalue"}
        self.assertIn("at every shift", remedy)
        self.assertNotIn("move the shift", remedy)

    def test_frequencies_of_a_free_body(self):
        path = self.matrix("F.mtx", ROWS, chain(ROWS, held=0))
        mass = self.matrix("M.mtx", ROWS, diagonal([2] * ROWS))
        values = [(2 - 2 * math.cos(math.pi * k / ROWS)) / 2 for k in range(1, ROWS)]  # free chain, closed form
        for method in ("residual", "counts"):
            document = self.bracket(0, path, "--mass", mass, "--first", 3, "--unit", "hertz", "--method", method)
            rigid, *elastic = document["critical"]
            self.assertTrue(rigid["rigid_body"])
            self.assertEqual((rigid["value"], rigid["multiplicity"]), (0, 1))
            self.assertTrue(rigid["low"] <= 0 <= rigid["high"])
            self.assertEqual(len(elastic), 3)
            for critical, value in zip(elastic, values):
                self.assertFalse(critical["rigid_body"])
                self.assertTrue(critical["low"] <= value * (1 + 1e-12) and value * (1 - 1e-12) <= critical["high"])
                self.assertAlmostEqual(critical["hertz"]["value"], math.sqrt(value) / (2 * math.pi), places=9)
            self.assertNotRegex(document["in_words"][0], r"-\d[^ ]* Hz")  # below 0 there is no frequency
            if method == "residual":  # what was found at 0 while looking for a definite base is not counted again
                self.assertLessEqual(document["work"]["factorizations"], 12)

    def test_frequencies_with_massless_dofs(self):
        # K = [2 -1 0; -1 2 -1; 0 -1 1], M = diag(1, 0, 4), condensed by hand: s = (1.625 -+ sqrt(1.625^2 - 0.5)) / 2
        path = self.matrix("H.mtx", 3, chain(3, held=1))
        mass = self.matrix("M.mtx", 3, diagonal([1, 0, 4]))
        root = math.sqrt(1.625**2 - 0.5)
        document = self.bracket(0, path, "--mass", mass, "--below", 100)
        self.assertEqual(self.hold(document, [(1.625 - root) / 2, (1.625 + root) / 2]), 2)

    def test_fewer_than_asked_is_said(self):
        path = self.matrix("D.mtx", 3, diagonal([1, 2, 3]))
        geometric = self.matrix("B.mtx", 3, diagonal([-1, 1, 1]))
        for method in ("residual", "counts"):
            document = self.bracket(0, path, "--geometric", geometric, "--first", 3, "--method", method)
            self.assertEqual(self.hold(document, [1, -2, -3]), 1)
            self.assertIn("fewer-than-asked", [warning["code"] for warning in document["warnings"]])

    def test_mode_shapes(self):
        dofs = self.folder / "dofs.csv"
        dofs.write_text("".join(f"{i + 1},{i + 1},ux\n" for i in range(ROWS)), encoding="ascii")
        nodes = self.folder / "nodes.csv"
        nodes.write_text("".join(f"{i + 1},{i}.0,0,0\n" for i in range(ROWS)), encoding="ascii")
        common = (self.stiffness, "--geometric", self.geometric, "--first", 2, "--dofs", dofs, "--nodes", nodes)
        document = self.bracket(0, *common, "--modes", "modes.csv", "--vtu", "modes.vtu")
        self.assertEqual(len(document["critical"][0]["modes"]), 1)
        lines = [line for line in (self.folder / "modes.csv").read_text().splitlines() if not line.startswith("#")]
        self.assertEqual(lines[0], "equation,node,dof,mode1,mode2")
        shape = [float(line.split(",")[4]) for line in lines[1:]]
        exact = [math.sin(2 * math.pi * (i + 1) / (ROWS + 1)) for i in range(ROWS)]  # closed form of the second mode
        scale = shape[9] / exact[9]
        self.assertLess(max(abs(a - scale * b) for a, b in zip(shape, exact)), 1e-9)
        self.assertAlmostEqual(max(map(abs, shape)), 1)
        root = xml.etree.ElementTree.parse(self.folder / "modes.vtu").getroot()
        arrays = [element for element in root.iter("DataArray") if element.get("Name", "").startswith("mode")]
        self.assertEqual(len(arrays), 2)
        self.assertEqual(len(arrays[0].text.split()), 3 * ROWS)
        self.bracket(0, *common, "--modes", "modes.npy")
        data = (self.folder / "modes.npy").read_bytes()
        self.assertEqual(data[:8], b"\x93NUMPY\x01\x00")
        length = struct.unpack("<H", data[8:10])[0]
        self.assertIn(f"'shape': ({ROWS}, 2)".encode(), data[10:10 + length])
        numbers = struct.unpack(f"<{2 * ROWS}d", data[10 + length:])
        self.assertAlmostEqual(numbers[ROWS + 9], shape[9])

    def test_digits_of_the_file_widen_what_is_certain(self):
        document = self.bracket(0, self.stiffness, "--geometric", self.geometric, "--first", 1, "--digits", 8)
        self.assertEqual(document["critical"][0]["proof"], "counts")
        self.assertEqual(self.hold(document, VALUES), 1)

    def test_the_same_for_any_number_of_threads(self):
        arguments = (self.stiffness, "--geometric", self.geometric, "--first", 4)
        one, two = (self.bracket(0, *arguments, "--threads", threads) for threads in (1, 2))
        for key in ("critical", "complete", "other_side", "sentences", "risk"):
            self.assertEqual(one[key], two[key])

    def test_bad_questions(self):
        both = ("--geometric", self.geometric)
        for arguments, code in (((), "missing-argument"), (("--first", 0), "out-of-range"),
                                (("--first", 2, "--below", 1), "contradiction"), (("--from", 2, "--to", 1), "out-of-range"),
                                (("--below", 1, "--unit", "hertz"), "contradiction"), (("--below", 0), "out-of-range"),
                                (("--below", 1, "--side", "both"), "contradiction"), (("--first", 1, "--width", 2), "out-of-range"),
                                (("--first", 1, "--method", "guess"), "bad-word"),
                                (("--first", 1, "--expect", "none-below"), "contradiction"),
                                (("--first", 1, "--expect", "zero:6"), "expectation-not-applicable"),
                                (("--first", 1, "--vtu", "a.vtu"), "contradiction")):
            with self.subTest(arguments):
                self.expect_failure(2, code, "bracket", self.stiffness, *both, *arguments)


if __name__ == "__main__":
    unittest.main()
