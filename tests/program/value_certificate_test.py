"""Certificates of sweep, bracket and audit, and stanchion recheck: agreed, contradicted, refused."""

import unittest

from certificate_test import CertificateTest
from program import chain, chain_eigenvalues, diagonal

ROWS = 60
VALUES = chain_eigenvalues(ROWS)  # closed form: 2 - 2 cos(k pi / (n + 1))


class ValueCertificateTest(CertificateTest):
    def setUp(self):
        super().setUp()
        self.stiffness = self.matrix("K.mtx", ROWS, chain(ROWS, held=2))
        self.geometric = self.matrix("G.mtx", ROWS, diagonal([-1] * ROWS))
        self.pencil = (self.stiffness, "--geometric", self.geometric)

    def contradict(self, change):
        self.tamper(change)
        document = self.recheck(1)
        self.assertEqual(document["result"], "contradicted")
        return [claim["result"] for claim in document["claims"]]


class AgreedTest(ValueCertificateTest):
    def test_a_sweep_is_its_counts(self):
        document = self.certify(0, "sweep", *self.pencil, "--from", 0.001, "--to", 0.05, "--points", 3, "--refine")
        shifts = [claim["shift"] for claim in document["claims"]]
        self.assertEqual(shifts, document["question"]["shifts"])
        self.assertEqual(shifts, sorted(shifts))
        self.assertEqual(len(self.recheck(0)["claims"]), len(shifts))

    def test_brackets_of_every_kind(self):
        mass = self.matrix("M.mtx", ROWS, diagonal([1] * ROWS))
        for question in (("--geometric", self.geometric, "--first", 5), ("--geometric", self.geometric, "--first", 3, "--side", "both"),
                         ("--geometric", self.geometric, "--below", 0.1, "--method", "counts", "--width", "1e-6"),
                         ("--mass", mass, "--from", 0.1, "--to", 0.3), ("--mass", mass, "--below", 0.04, "--unit", "hertz")):
            with self.subTest(question):
                document = self.certify(0, "bracket", self.stiffness, *question)
                values = [claim for claim in document["claims"] if claim["statement"] == "values"]
                for claim in values:
                    self.assertTrue(any(claim["low"] <= exact * (1 + 1e-12) and exact * (1 - 1e-12) <= claim["high"]
                                        for exact in VALUES))
                found = self.recheck(0)["claims"]
                self.assertEqual(len(found), len(document["claims"]))

    def test_no_mass_on_some_dofs_and_a_free_body(self):
        free = self.matrix("F.mtx", ROWS, chain(ROWS))
        mass = self.matrix("M.mtx", ROWS, diagonal([1] * ROWS))
        self.certify(0, "bracket", free, "--mass", mass, "--first", 4)
        document = self.recheck(0)
        self.assertEqual({claim["result"] for claim in document["claims"]}, {"agreed"})

    def test_the_safety_question(self):
        self.certify(0, "bracket", *self.pencil, "--below", VALUES[0] * 0.9, "--expect", "none-below")
        self.assertEqual([claim["claimed"][0] for claim in self.recheck(0)["claims"]], ["0", "0"])

    def test_a_double_value(self):
        path, second = self.matrix("D.mtx", 5, diagonal([1, 2, 2, 3, 9])), self.matrix("I.mtx", 5, diagonal([1] * 5))
        document = self.certify(0, "bracket", path, "--mass", second, "--below", 5)
        self.assertEqual([claim["multiplicity"] for claim in document["claims"] if claim["statement"] == "values"], [1, 2, 1])
        self.recheck(0)

    def test_audits(self):
        listed = VALUES[:4] + VALUES[5:8]
        (self.folder / "list.csv").write_text("value\n" + "".join(f"{value!r}\n" for value in listed), encoding="ascii")
        for more in ((), ("--digits", 13)):
            document = self.certify(1, "audit", *self.pencil, "--values", "list.csv", "--find-missing", *more)
            self.assertEqual(document["claims"][0]["verdict"], "missing")
            self.assertIn("values", {file["role"] for file in document["files"]})
            self.recheck(0)

    def test_k_not_definite_claims_nothing(self):
        path = self.matrix("N.mtx", 3, diagonal([1, -1, 2]))
        second = self.matrix("I.mtx", 3, diagonal([-1] * 3))
        self.run_program("bracket", path, "--geometric", second, "--first", 1, "--certificate", "claim.json", "--quiet")
        document = self.recheck(3)
        self.assertEqual(document["result"], "not_repeated")


class ContradictedTest(ValueCertificateTest):
    def certify_first(self):
        return self.certify(0, "bracket", *self.pencil, "--first", 4)

    def test_an_interval_moved_off_its_value(self):
        self.certify_first()

        def move(document):
            claim = document["claims"][1]
            for key in ("value", "low", "high"):
                claim[key] *= 1 + 1e-5

        self.assertEqual(self.contradict(move)[1], "contradicted")

    def test_a_value_left_out(self):
        self.certify_first()

        def leave_out(document):
            del document["claims"][2]
            document["claims"][3]["count"] -= 1

        self.assertIn("contradicted", self.contradict(leave_out))

    def test_a_multiplicity_raised(self):
        self.certify_first()

        def double(document):
            document["claims"][0]["multiplicity"] += 1
            document["claims"][4]["count"] += 1

        self.assertEqual(self.contradict(double)[0], "contradicted")

    def test_values_that_do_not_add_up(self):
        self.certify_first()
        self.contradict(lambda document: document["claims"][4].update(count=3))

    def test_none_on_the_other_side_where_there_are(self):
        both = self.matrix("B.mtx", ROWS, diagonal([(-1) ** k for k in range(ROWS)]))
        document = self.certify(0, "bracket", self.stiffness, "--geometric", both, "--first", 2)
        self.assertGreater(document["claims"][3]["count"], 0)
        self.contradict(lambda claim: claim["claims"][3].update(count=0))

    def test_a_verdict_that_the_gaps_deny_and_one_that_they_do_not(self):
        (self.folder / "list.csv").write_text("value\n" + "".join(f"{value!r}\n" for value in VALUES[1:5]), encoding="ascii")
        self.certify(1, "audit", *self.pencil, "--values", "list.csv")
        self.contradict(lambda document: document["claims"][0].update(verdict="complete"))
        self.contradict(lambda document: document["claims"][0].update(verdict="complete", gaps=[], count=4))

    def test_a_changed_list_is_another_question(self):
        (self.folder / "list.csv").write_text("value\n" + "".join(f"{value!r}\n" for value in VALUES[:5]), encoding="ascii")
        self.certify(0, "audit", *self.pencil, "--values", "list.csv")
        (self.folder / "list.csv").write_text(f"value\n{VALUES[0]!r}\n", encoding="ascii")
        run = self.run_program("recheck", "claim.json")
        self.assertEqual(run.returncode, 2)
        self.assertIn("input-changed", run.stderr)

    def test_damaged_statements_are_refused(self):
        for change in (lambda document: document["claims"][0].update(statement="count"),
                       lambda document: document["claims"][0].update(low=None),
                       lambda document: document["claims"][4].update(which="elsewhere"),
                       lambda document: document["claims"].append({"statement": "audit"})):
            self.certify_first()
            self.tamper(change)
            run = self.run_program("recheck", "claim.json")
            self.assertEqual(run.returncode, 2, run.stdout)
            self.assertIn("bad-certificate", run.stderr)

    def test_a_library_counts_at_shifts_only(self):
        self.certify_first()
        self.assertEqual(self.run_program("recheck", "claim.json", "--with", "mumps").returncode, 2)


if __name__ == "__main__":
    unittest.main()
