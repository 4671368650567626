"""stanchion check on a sequence of matrices: where the inertia changes along a load path."""

import hashlib
import pathlib
import unittest

from program import ProgramTest, chain, chain_eigenvalues

ROWS = 30
VALUES = chain_eigenvalues(ROWS)


def loaded(load):
    """The chain with a load that takes `load` off every diagonal entry: value k turns negative at load = VALUES[k]."""
    entries = chain(ROWS, held=2)
    return {key: value - load * (key[0] == key[1]) for key, value in entries.items()}


class LoadPathTest(ProgramTest):
    def steps(self, loads):
        return [self.matrix(f"step{k}.mtx", ROWS, loaded(load)) for k, load in enumerate(loads)]

    def test_the_step_where_the_first_negative_appears(self):
        loads = [0, VALUES[0] / 2, (VALUES[0] + VALUES[1]) / 2, (VALUES[0] + VALUES[1]) / 2.1, (VALUES[2] + VALUES[3]) / 2, 0]
        document = self.expect(1, "check", *self.steps(loads))
        expected = [sum(value < load for value in VALUES) for load in loads]
        self.assertEqual([step["inertia"]["negative"] for step in document["steps"]], expected)
        self.assertEqual((document["first_not_definite"], document["first_negative"]), (3, 3))
        self.assertEqual([step["changed"] for step in document["steps"]], [False, False, True, False, True, True])
        self.assertEqual(document["verdict"], "indefinite")
        self.assertTrue(any("between two of the matrices" in text for text in document["not_checked"]))

    def test_every_file_is_named_once_with_its_digest(self):
        paths = self.steps([0, VALUES[0] / 2, VALUES[0] * 1.5])
        dofs = self.folder / "dofs.csv"
        dofs.write_text("equation,node,dof\n" + "".join(f"{k + 1},{k + 1},ux\n" for k in range(ROWS)), encoding="ascii")
        page = self.folder / "path.html"
        document = self.expect(1, "check", *paths, "--dofs", str(dofs), "--html", str(page))
        text_of_page = page.read_text(encoding="utf-8")
        self.assertIn("Which step of the load path is the first that is not positive definite?", text_of_page)
        for role in ("stiffness, step 1", "step 2", "step 3"):
            self.assertEqual(text_of_page.count(f"<td>{role}</td>"), 1)
        self.assertEqual([table["role"] for table in document["tables"]], ["dofs"])
        text = page.read_text(encoding="utf-8")
        for path in [*paths, dofs]:
            digest = hashlib.sha256(pathlib.Path(path).read_bytes()).hexdigest()
            self.assertEqual(text.count(digest), 1, path)

    def test_all_definite(self):
        document = self.expect(0, "check", *self.steps([0, 0.001, 0.002]))
        self.assertIsNone(document["first_not_definite"])
        self.assertEqual(document["verdict"], "positive_definite")
        self.assertEqual(document["work"]["factorizations"], 3)
        self.assertNotIn("pattern-changes", [warning["code"] for warning in document["warnings"]])

    def test_a_list_names_the_steps_beside_itself(self):
        self.steps([0, VALUES[0] * 1.5])
        folder = self.folder / "lists"
        folder.mkdir()
        (folder / "path.txt").write_text("# the way up\n../step0.mtx\n\n../step1.mtx\n", encoding="ascii")
        document = self.expect(1, "check", "--list", "lists/path.txt")
        self.assertEqual(document["first_negative"], 2)

    def test_expectation_holds_for_every_step(self):
        paths = self.steps([0, VALUES[0] * 1.5])
        self.expect(1, "check", *paths, "--expect", "positive-definite")
        self.expect(0, "check", paths[1], paths[1], "--expect", "negative:1")

    def test_another_pattern_is_analysed_anew(self):
        diagonal_only = self.matrix("D.mtx", ROWS, {(i, i): 1.0 for i in range(ROWS)})
        document = self.expect(0, "check", *self.steps([0]), diagonal_only)
        self.assertIn("pattern-changes", [warning["code"] for warning in document["warnings"]])

    def test_bad_paths(self):
        paths = self.steps([0, 0])
        other = self.matrix("O.mtx", 3, chain(3, held=2))
        self.expect_failure(2, "size-mismatch", "check", *paths, other)
        self.expect_failure(2, "contradiction", "check", *paths, "--witness", "w.csv")
        self.expect_failure(2, "contradiction", "check", *paths, "--certificate", "c.json")
        self.expect_failure(2, "contradiction", "check", paths[0], "--list", "x.txt")
        self.expect_failure(2, "file-not-found", "check", "--list", "x.txt")
        self.expect_failure(2, "contradiction", "check", *paths, "--json", paths[1])


if __name__ == "__main__":
    unittest.main()
