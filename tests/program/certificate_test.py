"""--certificate: what the document says, and stanchion recheck: agreed, contradicted, not repeated, refused."""

import hashlib
import json
import pathlib
import shutil
import subprocess
import unittest

from program import PROGRAM, ProgramTest, chain, diagonal, read_json


def digest(path):
    return hashlib.sha256(pathlib.Path(path).read_bytes()).hexdigest()


class CertificateTest(ProgramTest):
    def certify(self, code, *arguments):
        """Runs with --certificate; returns the document, checked against its schema."""
        run = self.run_program(*arguments, "--certificate", "claim.json", "--quiet")
        self.assertEqual((run.returncode, run.stdout, run.stderr), (code, "", ""))
        return read_json((self.folder / "claim.json").read_text(encoding="utf-8"), "certificate-1")

    def recheck(self, code, *arguments):
        run = self.run_program("recheck", "claim.json", "--json", "recheck.json", *arguments)
        self.assertEqual((run.returncode, run.stderr), (code, ""), run.stdout)
        self.text = run.stdout
        return read_json((self.folder / "recheck.json").read_text(encoding="utf-8"), "recheck-1")

    def tamper(self, change):
        """Applies `change` to the certificate's document, in place."""
        document = json.loads((self.folder / "claim.json").read_text(encoding="utf-8"))
        change(document)
        (self.folder / "claim.json").write_text(json.dumps(document), encoding="utf-8")


class ContentTest(CertificateTest):
    def test_a_check(self):
        path = self.matrix("K.mtx", 50, chain(50, held=2))
        document = self.certify(0, "check", path, "--seed", 7, "--risk", "1e-5", "--title", "Span 2")
        self.assertEqual(document["question"]["pencil"], "stiffness")
        self.assertEqual((document["seed"], document["risk"]["allowed"]), (7, 1e-5))
        self.assertEqual((document["title"], document["struck"]), ("Span 2", {"equations": 0, "sha256": None}))
        self.assertEqual(document["files"], [{"role": "stiffness", "path": path, "absolute_path": path,
                                              "sha256": digest(path), "rows": 50, "entries": 99, "factor": None}])
        claim, = document["claims"]
        self.assertEqual(claim["verdict"], "positive_definite")
        self.assertEqual(claim["certificate"]["method"], "offsets")
        self.assertTrue(claim["certificate"]["runs"])

    def test_the_certificate_says_what_the_answer_says(self):
        path = self.matrix("K.mtx", 6, diagonal([3, -1, 2, -5, 1, 1]))
        claim, = self.certify(1, "check", path)["claims"]
        answer = self.expect(1, "check", path)
        for key in ("verdict", "verdict_for_all_roundings", "inertia", "certificate", "constrained"):
            self.assertEqual(claim[key], answer[key])

    def test_every_file_is_named_with_its_digest(self):
        stiffness = self.matrix("K.mtx", 5, chain(5))
        added = self.matrix("soil.mtx", 5, diagonal([1] * 5))
        mass = self.matrix("M.mtx", 5, diagonal([2] * 5))
        (self.folder / "fix.csv").write_text("equation\n2\n5\n")
        document = self.certify(0, "count", stiffness, "--add", f"{added}:0.5", "--mass", mass, "--fix", "fix.csv",
                                "--at", "0.1,-1")
        files = {file["role"]: file for file in document["files"]}
        self.assertEqual(sorted(files), ["added", "fix", "mass", "stiffness"])
        for file in files.values():
            self.assertEqual(file["sha256"], digest(file["absolute_path"]))
        self.assertEqual(files["fix"]["path"], "fix.csv")
        self.assertEqual(files["added"]["factor"], 0.5)
        self.assertEqual(document["struck"], {"equations": 2, "sha256": hashlib.sha256(b"2\n5\n").hexdigest()})
        self.assertEqual([claim["shift"] for claim in document["claims"]], [0.1, -1.0])

    def test_nothing_is_overwritten_or_half_written(self):
        path = self.matrix("K.mtx", 5, chain(5))
        self.expect_failure(2, "contradiction", "check", path, "--certificate", path)
        self.expect_failure(2, "contradiction", "check", path, "--certificate", "a", "--json", "./a")
        self.expect_failure(2, "cannot-write", "check", "nowhere.mtx", "--certificate", "no/such/folder/x")
        self.expect_failure(2, "bad-argument", "check", path, "--certificate", "-")
        self.expect_failure(2, r"[a-z-]+", "check", "nowhere.mtx", "--certificate", "claim.json")
        self.assertEqual([entry.name for entry in self.folder.iterdir()], ["K.mtx"])

    def test_forecast_claims_nothing(self):
        path = self.matrix("K.mtx", 5, chain(5))
        self.expect_failure(2, "unknown-argument", "forecast", path, "--certificate", "claim.json")


class AgreedTest(CertificateTest):
    def test_checks(self):
        for name, rows, entries, code in [("definite", 300, chain(300), 0), ("free", 40, chain(40, held=0), 1),
                                          ("indefinite", 4, diagonal([3, -1, 2, -5]), 1)]:
            with self.subTest(name):
                self.certify(code, "check", self.matrix("K.mtx", rows, entries))
                document = self.recheck(0)
                self.assertEqual((document["agreed"], document["result"]), (True, "agreed"))
                self.assertEqual(document["second_path"], {"ordering": "minimum degree", "kernels": "baseline", "seed": 2})
                self.assertTrue(self.text.startswith("Agreed: "), self.text)

    def test_counts(self):
        stiffness = self.matrix("K.mtx", 60, chain(60, held=2))
        geometric = self.matrix("G.mtx", 60, diagonal([-1] * 60))
        self.certify(0, "count", stiffness, "--geometric", geometric, "--at", "0.5,2.5,-1")
        document = self.recheck(0)
        self.assertEqual([claim["result"] for claim in document["claims"]], ["agreed"] * 3)
        self.assertEqual([claim["shift"] for claim in document["claims"]], [0.5, 2.5, -1.0])

    def test_what_follows_from_the_counts(self):
        geometric = self.matrix("G.mtx", 60, diagonal([-1] * 60))
        self.certify(0, "count", self.matrix("K.mtx", 60, chain(60, held=2)), "--geometric", geometric, "--at", "0.001")
        self.recheck(0)
        self.tamper(lambda document: document["sentences"].append("K + f G is positive definite at every f."))
        self.assertEqual([claim["result"] for claim in self.recheck(3)["claims"]], ["agreed", "not_repeated"])

    def test_a_range_of_counts(self):
        self.certify(3, "count", self.matrix("D.mtx", 3, diagonal([1, 2, 3])), "--at", "2")
        claim, = self.recheck(0)["claims"]
        self.assertEqual((claim["claimed"], claim["found"]), ("1 to 2", "1 to 2"))

    def test_the_band_of_a_range_of_counts(self):
        self.certify(3, "count", self.matrix("D.mtx", 3, diagonal([1, 2, 3])), "--at", "2")
        self.recheck(0)
        # Narrower than the resolution gives, but true: counts at its ends show the eigenvalue 2 inside.
        self.tamper(lambda document: document["claims"][0].update(holds_outside=[2 - 1e-15, 2 + 1e-15]))
        self.recheck(0)
        self.tamper(lambda document: document["claims"][0].update(holds_outside=[1.5, 1.75]))
        self.recheck(3)

    def test_constraints(self):
        path = self.matrix("A.mtx", 3, {(0, 0): -1.0, (1, 1): 1.0, (2, 1): 1.0})
        (self.folder / "m.csv").write_text("equation\n3\n")
        self.certify(1, "check", path, "--multipliers", "m.csv")
        self.recheck(0)
        self.tamper(lambda document: document["claims"][0]["constrained"].update(rank=0))
        self.assertEqual(self.recheck(1)["result"], "contradicted")

    def test_an_unreadable_certificate_leaves_no_older_agreement(self):
        self.certify(0, "check", self.matrix("K.mtx", 5, chain(5)))
        matrix = self.folder / "K.mtx"
        whole, before = (self.folder / "claim.json").read_bytes(), matrix.read_bytes()
        for name, change in (("cut", lambda file: file.write_bytes(whole[:100])), ("gone", lambda file: file.unlink())):
            with self.subTest(name):
                (self.folder / "claim.json").write_bytes(whole)
                self.recheck(0)
                change(self.folder / "claim.json")
                self.assertEqual(self.run_program("recheck", "claim.json", "--json", "recheck.json").returncode, 2)
                self.assertFalse((self.folder / "recheck.json").exists())
                self.run_program("recheck", "claim.json", "--json", "K.mtx")
                self.assertEqual(matrix.read_bytes(), before, "an input that the certificate might name")
        (self.folder / "claim.json").write_bytes(whole)
        self.recheck(0)
        self.assertEqual(self.run_program("recheck", "claim.json", "--json", "claim.json", "--bad").returncode, 2)
        self.assertEqual((self.folder / "claim.json").read_bytes(), whole)

    def test_from_another_folder(self):
        self.certify(0, "check", self.matrix("K.mtx", 5, chain(5)))
        elsewhere = self.folder / "elsewhere"
        elsewhere.mkdir()
        shutil.move(self.folder / "K.mtx", elsewhere / "K.mtx")
        self.expect_failure(2, "input-not-found", "recheck", "claim.json")
        self.assertEqual(self.recheck(0, "--root", "elsewhere")["inputs"][0]["path"], "elsewhere/K.mtx")

    def test_digits_and_extended_precision_are_asked_again(self):
        path = self.matrix("K.mtx", 5, chain(5))
        self.certify(0, "check", path, "--digits", "12", "--precision", "extended")
        self.recheck(0)
        self.tamper(lambda document: document["claims"][0].update(verdict_for_all_roundings="indefinite"))
        self.assertEqual(self.recheck(1)["result"], "contradicted")


def module():
    """Where the module for MUMPS lies, if it was built."""
    return next(pathlib.Path(PROGRAM).resolve().parent.parent.glob("lib*/**/stanchion/recheck_mumps.so"), None)


class OtherLibraryTest(CertificateTest):
    @unittest.skipUnless(module(), "the module for MUMPS was not built")
    def test_mumps_makes_the_factorizations_again(self):
        stiffness = self.matrix("K.mtx", 60, chain(60, held=2))
        self.certify(0, "check", stiffness)
        for arguments in ([], ["--with", "mumps"]):
            library = self.recheck(0, *arguments)["other_library"]
            self.assertEqual((library["name"], library["result"]), ("MUMPS", "agreed"))
            self.assertEqual([(count["claimed"], count["found"]) for count in library["counts"]], [(0, 0)])
        self.assertIn("the same number of negative pivots in 1 of 1 factorization", self.text)
        self.certify(0, "count", stiffness, "--at", "0.5,2.5")
        counts = self.recheck(0)["other_library"]["counts"]
        self.assertEqual([count["shift"] for count in counts], [0.5, 0.5, 2.5, 2.5])
        self.assertTrue(all(count["claimed"] == count["found"] > 0 for count in counts))

    def test_it_can_be_left_out(self):
        self.certify(0, "check", self.matrix("K.mtx", 5, chain(5)))
        self.assertIsNone(self.recheck(0, "--with", "own")["other_library"])
        self.assertNotIn("other library", self.text)

    def test_a_word_it_does_not_know(self):
        self.certify(0, "check", self.matrix("K.mtx", 5, chain(5)))
        self.expect_failure(2, "bad-with", "recheck", "claim.json", "--with", "luck")

    def test_a_program_without_the_module(self):
        self.certify(0, "check", self.matrix("K.mtx", 5, chain(5)))
        alone = shutil.copy(PROGRAM, self.folder / "alone")
        run = subprocess.run([alone, "recheck", "claim.json"], capture_output=True, text=True, cwd=self.folder, check=False)
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        self.assertNotIn("other library", run.stdout)
        run = subprocess.run([alone, "recheck", "claim.json", "--with", "mumps"], capture_output=True, text=True,
                             cwd=self.folder, check=False)
        self.assertEqual((run.returncode, run.stdout), (2, ""))
        self.assertIn("[no-such-library]", run.stderr)


class ContradictedTest(CertificateTest):
    def contradict(self, change):
        self.tamper(change)
        document = self.recheck(1)
        self.assertEqual((document["agreed"], document["result"]), (False, "contradicted"))
        self.assertTrue(self.text.startswith("NOT AGREED"), self.text)
        return document["claims"]

    def test_a_count_changed_by_one(self):
        path = self.matrix("D.mtx", 6, diagonal([1, 2, 3, 4, 5, 6]))
        for step in (1, -1):
            with self.subTest(step):
                self.certify(0, "count", path, "--at", "3.5,5.5")

                def change(document, by=step):
                    claim = document["claims"][1]
                    claim["below"] += by
                    claim["below_range"] = [claim["below"]] * 2

                claims = self.contradict(change)
                self.assertEqual([claim["result"] for claim in claims], ["agreed", "contradicted"])

    def test_a_count_that_its_own_range_denies(self):
        self.certify(0, "count", self.matrix("D.mtx", 3, diagonal([1, 2, 3])), "--at", "1.5")
        self.contradict(lambda document: document["claims"][0].update(below=2))

    def test_a_distance_too_wide(self):
        # diag(1, 2, ..., 40): the nearest eigenvalue to 7.25 is 0.25 away.
        entries = {(i, i): float(i + 1) for i in range(40)}
        self.certify(0, "count", self.matrix("D.mtx", 40, entries), "--at", "7.25")

        def change(document, radius):
            document["claims"][0]["no_eigenvalue_within"] = radius

        self.tamper(lambda document: change(document, 0.2))
        self.assertEqual(self.recheck(0)["result"], "agreed")
        self.contradict(lambda document: change(document, 0.3))
        self.assertIn("an eigenvalue lies within 0.3", self.text)

    def test_a_risk_that_was_not_spent(self):
        self.certify(0, "count", self.matrix("D.mtx", 3, diagonal([1, 2, 3])), "--at", "1.5")
        self.contradict(lambda document: document["risk"].update(spent=1e-9))

    def test_an_inertia_changed_by_one(self):
        path = self.matrix("D.mtx", 6, diagonal([3, -1, 2, -5, 1, 1]))
        for negative, positive in ((3, 3), (1, 5), (3, 4), (2, 3)):
            with self.subTest(negative=negative, positive=positive):
                self.certify(1, "check", path)
                self.contradict(lambda document: document["claims"][0]["inertia"].update(
                    negative=negative, positive=positive))

    def test_consistent_changes_of_the_whole_claim(self):
        self.certify(1, "check", self.matrix("D.mtx", 6, diagonal([3, -1, 2, -5, 1, 1])))

        def change(document):
            claim = document["claims"][0]
            claim["inertia"].update(negative=1, positive=5)
            for run in claim["certificate"]["runs"]:
                run["negative"] = 1

        self.contradict(change)

    def test_zero_directions_changed_by_one(self):
        path = self.matrix("K.mtx", 40, chain(40, held=0))
        for zeros, verdict in ((2, "positive_semidefinite"), (0, "positive_definite")):
            with self.subTest(zeros):
                self.certify(1, "check", path)

                def change(document, zeros=zeros, verdict=verdict):
                    claim = document["claims"][0]
                    claim["verdict"] = verdict
                    claim["inertia"].update(zero=zeros, positive=40 - zeros)
                    for run in claim["certificate"]["runs"]:
                        if run["offset"] > 0:
                            run["negative"] = zeros

                self.contradict(change)

    def test_a_verdict_that_does_not_follow(self):
        self.certify(1, "check", self.matrix("K.mtx", 40, chain(40, held=0)))
        self.contradict(lambda document: document["claims"][0].update(verdict="positive_definite"))


class RefusedTest(CertificateTest):
    def setUp(self):
        super().setUp()
        self.stiffness = self.matrix("K.mtx", 5, chain(5))
        (self.folder / "fix.csv").write_text("1\n")
        self.certify(0, "check", self.stiffness, "--fix", "fix.csv")

    def test_a_changed_input(self):
        self.matrix("K.mtx", 5, chain(5, held=2))
        text = self.expect_failure(2, "input-changed", "recheck", "claim.json")
        self.assertIn("K.mtx", text)

    def test_a_changed_list(self):
        (self.folder / "fix.csv").write_text("2\n")
        self.assertIn("fix.csv", self.expect_failure(2, "input-changed", "recheck", "claim.json"))

    def test_a_changed_digest(self):
        self.tamper(lambda document: document["files"][0].update(sha256="0" * 64))
        self.expect_failure(2, "input-changed", "recheck", "claim.json")

    def test_a_changed_list_of_struck_equations(self):
        self.tamper(lambda document: document["struck"].update(sha256="0" * 64))
        self.expect_failure(2, "input-changed", "recheck", "claim.json")

    def test_damaged_certificates(self):
        whole = (self.folder / "claim.json").read_text(encoding="utf-8")
        for damage in (lambda d: d.pop("files"), lambda d: d["claims"].clear(), lambda d: d.update(seed=-1),
                       lambda d: d["files"][0].update(role="weather"), lambda d: d["claims"][0].pop("inertia"),
                       lambda d: d["claims"][0]["inertia"].update(negative=2 ** 40), lambda d: d.update(claims={}),
                       lambda d: d.update(document="letter"), lambda d: d.update(schema_version=2),
                       lambda d: d["claims"][0].update(verdict="stable"), lambda d: d["files"].clear()):
            (self.folder / "claim.json").write_text(whole, encoding="utf-8")
            self.tamper(damage)
            with self.subTest((self.folder / "claim.json").read_text(encoding="utf-8")[:200]):
                self.expect_failure(2, "bad-certificate", "recheck", "claim.json")
        (self.folder / "claim.json").write_text("K is fine")
        self.expect_failure(2, "bad-certificate", "recheck", "claim.json")
        self.expect_failure(2, "file-not-found", "recheck", "nowhere.json")

    def test_the_answer_overwrites_nothing(self):
        for target in ("claim.json", "K.mtx"):
            self.expect_failure(2, "contradiction", "recheck", "claim.json", "--json", target)


class NotRepeatedTest(CertificateTest):
    def test_a_claim_of_nothing(self):
        self.certify(3, "check", self.matrix("K.mtx", 40, chain(40, held=0)), "--resolution", "1e-30")
        document = self.recheck(3)
        self.assertEqual(document["result"], "not_repeated")
        self.assertTrue(self.text.startswith("Not repeated"), self.text)

    def test_a_claim_beyond_reach(self):
        self.certify(0, "check", self.matrix("K.mtx", 40, chain(40)))
        self.tamper(lambda document: document["question"].update(resolution=1e-30))
        self.assertEqual(self.recheck(3)["result"], "not_repeated")

    def test_too_little_memory_is_no_comparison(self):
        self.certify(0, "check", self.matrix("K.mtx", 3000, chain(3000)))
        self.expect_failure(4, r"[a-z-]+", "recheck", "claim.json", "--memory-cap", "1k")


if __name__ == "__main__":
    unittest.main()
