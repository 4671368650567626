"""stanchion count: the three pencils, shifts as people write them, exit codes."""

import unittest

from program import ProgramTest, chain, chain_eigenvalues, diagonal

ROWS = 40
VALUES = chain_eigenvalues(ROWS)


def between(index):
    """A number between the eigenvalues number `index` and `index` + 1 of the chain."""
    return (VALUES[index] + VALUES[index + 1]) / 2


class CountTest(ProgramTest):
    def setUp(self):
        super().setUp()
        self.stiffness = self.matrix("K.mtx", ROWS, chain(ROWS, held=2))

    def counts(self, code, *arguments):
        document = self.expect(code, "count", self.stiffness, *arguments)
        for count in document["counts"]:
            least, most = count["below_range"]
            self.assertLessEqual(least, most)
            if count["below"] is not None:
                self.assertEqual([least, most], [count["below"]] * 2)
        return document["counts"]

    def test_stiffness_alone(self):
        shifts = [0.0, between(4), 5.0, between(0), -1.0]
        counts = self.counts(0, "--at", ",".join(map(repr, shifts)))
        self.assertEqual([count["shift"] for count in counts], shifts)
        self.assertEqual([count["below"] for count in counts], [0, 5, ROWS, 1, 0])
        self.assertTrue(all(count["level"] in ("proved", "statistical") for count in counts))

    def test_mass(self):
        mass = self.matrix("M.mtx", ROWS, diagonal([0.5] * ROWS))
        counts = self.counts(0, "--mass", mass, "--at", repr(2 * between(6)), "--at", repr(2 * between(2)))
        self.assertEqual([count["below"] for count in counts], [7, 3])

    def test_geometric_on_both_sides_of_zero(self):
        geometric = self.matrix("G.mtx", ROWS, diagonal([-1] * ROWS))
        counts = self.counts(0, "--geometric", geometric, "--at", f"{between(3)!r},-2.5")
        self.assertEqual([count["below"] for count in counts], [4, 0])
        counts = self.counts(0, "--geometric", geometric, "--load-sign", "minus", "--at", f"-{between(3)!r},2.5")
        self.assertEqual([count["below"] for count in counts], [4, 0])

    def test_definite_at_a_factor_means_definite_up_to_it(self):
        geometric = self.matrix("G.mtx", ROWS, diagonal([-1] * ROWS))
        document = self.expect(0, "count", self.stiffness, "--geometric", geometric, "--at", VALUES[0] / 2)
        self.assertTrue(any("definite at every f" in sentence for sentence in document["sentences"]))

    def test_a_shift_on_an_eigenvalue_is_no_answer(self):
        path = self.matrix("D.mtx", 3, diagonal([1, 2, 3]))
        document = self.expect(3, "count", path, "--at", 2)
        self.assertIsNone(document["counts"][0]["below"])
        self.assertEqual(document["counts"][0]["below_range"], [1, 2])

    def test_negative_shifts_in_every_spelling(self):
        for arguments in (["--at", "-1.5,2"], ["--at=-1.5,2"], ["--at", "-1.5", "--at", "+2"], ["--at", "-15e-1,2."]):
            with self.subTest(arguments):
                self.assertEqual([count["shift"] for count in self.counts(0, *arguments)], [-1.5, 2.0])

    def test_expectation(self):
        self.counts(0, "--at", between(1), "--expect", "negative:2")
        self.counts(1, "--at", between(1), "--expect", "negative:3")
        self.counts(0, "--at", "0", "--expect", "positive-definite")
        self.counts(1, "--at", f"0,{between(0)!r}", "--expect", "positive-definite")


if __name__ == "__main__":
    unittest.main()
