"""--witness: a vector that proves to anyone, with exact arithmetic, that the matrix is not positive definite."""

import csv
from fractions import Fraction
import unittest

from program import ProgramTest, chain, chain_eigenvalues, diagonal


def read_table(path):
    """The comment, and the rows as dictionaries."""
    comment, *lines = path.read_text(encoding="utf-8").splitlines()
    return comment, list(csv.DictReader(lines))


def quadratic_form(entries, x):
    """x^T A x, exactly: doubles are fractions."""
    exact = [Fraction(value) for value in x]
    return sum((1 if i == j else 2) * Fraction(value) * exact[i] * exact[j] for (i, j), value in entries.items())


class WitnessTest(ProgramTest):
    def setUp(self):
        super().setUp()
        eigenvalues = chain_eigenvalues(30)
        self.entries = chain(30, held=2)
        for i in range(30):
            self.entries[i, i] -= (eigenvalues[1] + eigenvalues[2]) / 2
        self.indefinite = self.matrix("K.mtx", 30, self.entries)

    def test_the_form_is_negative_exactly(self):
        document = self.expect(1, "check", self.indefinite, "--witness", "x.csv")
        comment, rows = read_table(self.folder / "x.csv")
        self.assertEqual([int(row["equation"]) for row in rows], list(range(1, 31)))
        value = quadratic_form(self.entries, [float(row["value"]) for row in rows])
        self.assertLess(value, 0)
        witness = document["witness"]
        self.assertEqual((witness["path"], witness["x"]), ("x.csv", None))
        self.assertLessEqual(abs(value - Fraction(witness["quadratic_form"])), Fraction(witness["error_bound"]))
        self.assertLess(witness["quadratic_form"] + witness["error_bound"], 0)
        self.assertTrue(comment.startswith("# x^T A x = -"), comment)

    def test_the_sum_is_what_counts(self):
        stiffness = self.matrix("S.mtx", 3, diagonal([1, 2, 3]))
        added = self.matrix("G.mtx", 3, {(0, 0): 1.0, (1, 0): 0.5, (2, 2): 1.0})
        self.expect(1, "check", stiffness, "--add", f"{added}:-1.75", "--witness", "x.csv")
        x = [float(row["value"]) for row in read_table(self.folder / "x.csv")[1]]
        total = {(0, 0): Fraction(1) - Fraction(7, 4), (1, 0): Fraction(-7, 8), (1, 1): Fraction(2),
                 (2, 2): Fraction(3) - Fraction(7, 4)}
        self.assertLess(quadratic_form(total, x), 0)

    def test_struck_equations_are_zero_in_it(self):
        (self.folder / "fix.csv").write_text("3\n30\n")
        self.expect(1, "check", self.indefinite, "--fix", "fix.csv", "--witness", "x.csv")
        x = [float(row["value"]) for row in read_table(self.folder / "x.csv")[1]]
        self.assertEqual((len(x), x[2], x[29]), (30, 0, 0))
        self.assertLess(quadratic_form(self.entries, x), 0)

    def test_node_and_dof_columns(self):
        path = self.matrix("D.mtx", 3, diagonal([1, -2, 3]))
        (self.folder / "dofs.csv").write_text('equation,node,dof\n1,7,ux\n2,7,"warp, left"\n3,8,rz\n')
        self.expect(1, "check", path, "--dofs", "dofs.csv", "--witness", "x.csv")
        _, rows = read_table(self.folder / "x.csv")
        self.assertEqual([(row["node"], row["dof"]) for row in rows], [("7", "ux"), ("7", "warp, left"), ("8", "rz")])
        self.assertEqual([float(row["value"]) != 0 for row in rows], [False, True, False])

    def test_none_is_said_and_no_file_appears(self):
        path = self.matrix("D.mtx", 5, chain(5))
        document = self.expect(0, "check", path, "--witness", "x.csv")
        self.assertIsNone(document["witness"])
        self.assertEqual([warning["code"] for warning in document["warnings"]], ["no-witness"])
        quiet = self.run_program("check", path, "--witness", "x.csv", "--quiet")
        self.assertEqual((quiet.returncode, quiet.stdout), (0, ""))
        self.assertIn("no-witness", quiet.stderr)
        self.assertEqual(sorted(entry.name for entry in self.folder.iterdir()), ["D.mtx", "K.mtx", "answer.json"])

    def test_the_text_names_the_file(self):
        run = self.run_program("check", self.indefinite, "--witness", "x.csv")
        self.assertRegex(run.stdout, r"\n  witness +x\^T K x = -\S+")
        self.assertIn("x.csv", run.stdout)

    def test_the_place_is_made_sure_of_before_the_work(self):
        self.expect_failure(2, "cannot-write", "check", "nowhere.mtx", "--witness", "no/such/folder/x")
        self.expect_failure(2, "contradiction", "check", self.indefinite, "--witness", self.indefinite)
        self.expect_failure(2, "contradiction", "check", self.indefinite, "--witness", "x", "--json", "x")
        self.expect_failure(2, "unknown-argument", "count", self.indefinite, "--at", "1", "--witness", "x.csv")


if __name__ == "__main__":
    unittest.main()
