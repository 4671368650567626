"""stanchion check: verdicts, inertia, expectations and exit codes."""

import unittest

from program import ProgramTest, chain, chain_eigenvalues, diagonal


class CheckTest(ProgramTest):
    def test_positive_definite(self):
        path = self.matrix("K.mtx", 50, chain(50, held=2))
        document = self.expect(0, "check", path)
        self.assertEqual(document["command"], "check")
        self.assertEqual(document["verdict"], "positive_definite")
        self.assertEqual(document["inertia"], {"negative": 0, "zero": 0, "positive": 50, "undecided": 0})
        self.assertEqual(document["rows_analysed"], 50)
        self.assertEqual(document["certificate"]["level"], "proved")
        self.assertEqual(document["inputs"]["stiffness"]["rows"], 50)
        self.assertEqual(document["inputs"]["stiffness"]["entries"], 99)
        self.assertEqual(document["arguments"][:2], ["check", path])
        self.assertEqual(document["risk"], 0)

    def test_the_bounds_on_the_smallest_eigenvalue_hold(self):
        document = self.expect(0, "check", self.matrix("K.mtx", 20, chain(20, held=2)))
        bound = document["certificate"]["smallest_eigenvalue_of_k_above"]
        self.assertIsNotNone(document["certificate"]["smallest_eigenvalue_above"])
        if bound is not None:
            self.assertLess(0, bound)
            self.assertLess(bound, chain_eigenvalues(20)[0])

    def test_free_body_is_semidefinite(self):
        path = self.matrix("K.mtx", 50, chain(50, held=0))
        document = self.expect(1, "check", path)
        self.assertEqual(document["verdict"], "positive_semidefinite")
        self.assertEqual(document["inertia"], {"negative": 0, "zero": 1, "positive": 49, "undecided": 0})
        self.assertEqual(self.expect(0, "check", path, "--expect", "zero:1")["verdict"], "positive_semidefinite")
        self.expect(1, "check", path, "--expect", "zero:2")
        self.expect(1, "check", path, "--expect", "positive-definite")

    def test_indefinite(self):
        path = self.matrix("K.mtx", 4, diagonal([3, -1, 2, -5]))
        document = self.expect(1, "check", path)
        self.assertEqual(document["verdict"], "indefinite")
        self.assertEqual(document["inertia"]["negative"], 2)
        self.expect(0, "check", path, "--expect", "negative:2")
        self.expect(1, "check", path, "--expect", "negative:1")

    def test_negative_definite(self):
        document = self.expect(1, "check", self.matrix("K.mtx", 3, diagonal([-1, -2, -3])))
        self.assertEqual(document["verdict"], "negative_definite")
        self.assertEqual(document["inertia"]["negative"], 3)

    def test_added_matrices_join_the_sum(self):
        stiffness = self.matrix("K.mtx", 3, diagonal([1, 2, 3]))
        added = self.matrix("G.mtx", 3, diagonal([1, 1, 1]))
        document = self.expect(1, "check", stiffness, "--add", f"{added}:-2.5")
        self.assertEqual(document["inertia"]["negative"], 2)
        self.assertEqual(document["inputs"]["added"][0]["factor"], -2.5)
        self.expect(0, "check", stiffness, "--add", f"{added}:-2.5", "--add", f"{added}:2")

    def test_same_answer_for_every_number_of_threads(self):
        path = self.matrix("K.mtx", 3000, chain(3000, held=0))
        documents = [self.expect(1, "check", path, "--threads", threads) for threads in (1, 2, 3)]
        for document in documents[1:]:
            self.assertEqual(document["certificate"], documents[0]["certificate"])
            self.assertEqual(document["inertia"], documents[0]["inertia"])

    def test_symmetric_part_is_never_good_by_itself(self):
        path = self.matrix("K.mtx", 5, chain(5, held=2))
        self.expect(1, "check", path, "--symmetric-part")
        self.expect(0, "check", path, "--symmetric-part", "--expect", "positive-definite")

    def test_the_text_starts_with_the_verdict(self):
        run = self.run_program("check", self.matrix("K.mtx", 50, chain(50)))
        self.assertEqual(run.returncode, 0, run.stderr)
        self.assertEqual(run.stdout.splitlines()[0],
                         "K is positive definite: no negative and no zero direction in 50 equations.")
        self.assertIn("\nNot checked\n", run.stdout)
        self.assertTrue(all(len(line) <= 100 or "K.mtx" in line for line in run.stdout.splitlines()))

    def test_title_and_reference(self):
        path = self.matrix("K.mtx", 5, chain(5))
        document = self.expect(0, "check", path, "--title", "Span 2", "--reference", "sheet 14")
        self.assertEqual((document["title"], document["reference"]), ("Span 2", "sheet 14"))


if __name__ == "__main__":
    unittest.main()
