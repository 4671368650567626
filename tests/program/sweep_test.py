"""stanchion sweep: the staircase, refinement, the picture, interruption and resumption."""

import json
import re
import unittest
import xml.etree.ElementTree

from program import ProgramTest, chain, chain_eigenvalues, diagonal

ROWS = 40
VALUES = chain_eigenvalues(ROWS)  # closed form: 2 - 2 cos(k pi / (n + 1))


class SweepTest(ProgramTest):
    def setUp(self):
        super().setUp()
        self.stiffness = self.matrix("K.mtx", ROWS, chain(ROWS, held=2))
        self.geometric = self.matrix("G.mtx", ROWS, diagonal([-1] * ROWS))

    def sweep(self, code, *arguments):
        return self.expect(code, "sweep", self.stiffness, *arguments)

    def test_counts_and_jumps_follow_the_closed_form(self):
        document = self.sweep(0, "--geometric", self.geometric, "--from", 0.001, "--to", 1.003, "--points", 9)
        self.assertEqual(len(document["counts"]), 9)
        for count in document["counts"]:
            self.assertEqual(count["below"], sum(value < count["shift"] for value in VALUES))
        for jump in document["jumps"]:
            self.assertEqual(jump["count"], sum(jump["low"] < value < jump["high"] for value in VALUES))
        self.assertEqual(sum(jump["count"] for jump in document["jumps"]), document["counts"][-1]["below"])
        self.assertEqual(document["contradictions"], [])
        self.assertTrue(any("convexity" in sentence for sentence in document["sentences"]))

    def test_refine_isolates_every_value(self):
        document = self.sweep(0, "--geometric", self.geometric, "--from", 0.001, "--to", 1.003, "--points", 3, "--refine")
        self.assertTrue(all(jump["count"] == 1 for jump in document["jumps"]))
        self.assertEqual(len(document["jumps"]), sum(0.001 < value < 1.003 for value in VALUES))

    def test_refine_stops_at_the_width_asked_for_a_double_value(self):
        path = self.matrix("D.mtx", 3, diagonal([1, 2 / 3, 2 / 3]))
        document = self.expect(0, "sweep", path, "--from", 0.1, "--to", 3, "--points", 2, "--refine", "--width", "1e-6")
        double = [jump for jump in document["jumps"] if jump["count"] == 2]
        self.assertEqual(len(double), 1)
        self.assertTrue(double[0]["low"] <= 2 / 3 <= double[0]["high"])
        self.assertLessEqual(double[0]["high"] - double[0]["low"], 1e-6)

    def test_stretches_that_overlap_are_said_to(self):
        # A shift on the double value, whose band reaches into the stretch behind it; then none on a value.
        path = self.matrix("D.mtx", 4, diagonal([1, 2, 2, 3]))
        for arguments, overlap in ((("--from", 0.5, "--to", 3.5, "--points", 3), True), (("--from", 0.5, "--to", 3.4, "--points", 3), False)):
            document = self.expect(0, "sweep", path, *arguments)
            self.assertEqual(sum(jump["count"] for jump in document["jumps"]), 4)
            self.assertTrue(all(jump["count"] <= sum(jump["low"] <= value <= jump["high"] for value in (1, 2, 2, 3))
                                for jump in document["jumps"]))
            text = self.run_program("sweep", path, *arguments).stdout
            self.assertEqual("Stretches overlap" in text, overlap, text)

    def test_both_signs_of_the_factor_in_one_sweep(self):
        geometric = self.matrix("B.mtx", 3, diagonal([-1, 1, 1]))  # factors 1, -2, -3
        path = self.matrix("D.mtx", 3, diagonal([1, 2, 3]))
        document = self.expect(0, "sweep", path, "--geometric", geometric, "--from", -4, "--to", 1.5, "--points", 12)
        jumps = [(jump["low"], jump["high"], jump["count"]) for jump in document["jumps"]]
        for value in (-3, -2, 1):
            self.assertTrue(any(low <= value <= high and count == 1 for low, high, count in jumps), jumps)
        self.assertEqual(sum(count for _, _, count in jumps), 3)

    def test_geometric_spacing(self):
        document = self.sweep(0, "--from", 0.01, "--to", 1.0, "--points", 3, "--spacing", "geometric")
        self.assertAlmostEqual(document["counts"][1]["shift"], 0.1)
        self.expect_failure(2, "contradiction", "sweep", self.stiffness, "--from", -1, "--to", 1, "--spacing", "geometric")

    def test_shifts_are_the_numbers_a_person_would_type_wherever_they_stand(self):
        # 1 + 0.9 * 0.75 is 1.6749999999999998 in double precision.
        typed = ["1.1125", "1.225", "1.3375", "1.45", "1.5625", "1.675", "1.7875"]
        arguments = ("--from", 1, "--to", 1.9, "--points", 9, "--results", "r.jsonl", "--csv", "r.csv")
        document = self.sweep(0, *arguments)
        self.assertEqual([repr(count["shift"]) for count in document["counts"]][1:-1], typed)
        journal = (self.folder / "r.jsonl").read_text(encoding="utf-8")
        table = (self.folder / "r.csv").read_text(encoding="utf-8")
        text = self.run_program("sweep", self.stiffness, *arguments[:-2]).stdout
        for value in typed:
            self.assertIn(f'"shift":{value},', journal.replace(" ", ""))
            self.assertIn(value + ",", table)
            self.assertRegex(text, rf"\b{re.escape(value)}\b")
        self.assertEqual(self.sweep(0, *arguments)["resumed"], 9)
        # Kept by a version that wrote the raw sum: that point is counted again, the others are taken over.
        (self.folder / "r.jsonl").write_text(journal.replace("1.675", "1.6749999999999998"), encoding="utf-8")
        again = self.sweep(0, *arguments)
        self.assertEqual(again["resumed"], 8)
        self.assertEqual(again["counts"], document["counts"])

    def test_the_picture_is_a_picture(self):
        self.sweep(0, "--geometric", self.geometric, "--from", 0.5, "--to", 1.0, "--points", 4, "--svg", "steps.svg")
        root = xml.etree.ElementTree.parse(self.folder / "steps.svg").getroot()
        self.assertTrue(root.tag.endswith("svg"))
        self.assertEqual(sum(element.tag.endswith("circle") for element in root.iter()), 4)

    def test_the_picture_in_the_page_takes_its_colours_from_the_page(self):
        # Else its words, which are the page's, cannot be read where the page is dark.
        self.sweep(0, "--geometric", self.geometric, "--from", 0.5, "--to", 1.0, "--points", 4, "--html", "steps.html")
        page = (self.folder / "steps.html").read_text()
        drawing = next(part for part in re.findall(r"<svg.*?</svg>", page, re.DOTALL) if "<title>Staircase" in part)
        coloured = [tag for tag in re.findall(r"<\w[^>]*>", drawing) if re.search("#[0-9a-f]{6}", tag)
                    and not tag.startswith("<text")]
        self.assertGreater(len(coloured), 10)
        for tag in coloured:
            name = re.search(r'class="(s-\w+)"', tag)
            self.assertTrue(name, tag)
            self.assertRegex(page, re.escape("." + name[1]) + r" \{ \w+: var\(")

    def test_the_small_picture_is_a_staircase(self):
        path = self.matrix("S.mtx", 4, diagonal([1.1, 2.1, 2.1, 3.1]))
        run = self.run_program("sweep", path, "--from", 0.5, "--to", 3.5, "--points", 13)
        rows = [line for line in run.stdout.splitlines() if line[8:11].strip().endswith("|") and line.lstrip()[0].isdigit()]
        self.assertEqual([line.split("|")[0].strip() for line in rows], ["4", "3", "2", "1", "0"])  # top first
        cells = {int(line.split("|")[0]): line.split("|")[1].ljust(72) for line in rows}
        shifts = [0.5 + 0.25 * k for k in range(13)]
        counts = [sum(value < shift for value in (1.1, 2.1, 2.1, 3.1)) for shift in shifts]
        column = [min(int((shift - 0.5) / 3 * 72), 71) for shift in shifts]
        for k in range(12):
            for c in range(column[k] + 1, column[k + 1]):
                drawn = {count for count, line in cells.items() if line[c] != " "}
                if counts[k] == counts[k + 1]:  # known: one line at its height
                    self.assertEqual((drawn, cells[counts[k]][c]), ({counts[k]}, "_"))
                else:  # a rise, as high as the jump
                    self.assertEqual(drawn, set(range(counts[k], counts[k + 1] + 1)))
                    self.assertTrue(all(cells[count][c] == ":" for count in drawn))
        labels = next(line for line in run.stdout.splitlines() if line.split() == ["0.5", "3.5"])
        self.assertEqual(len(labels), 11 + 72)  # the ends stand below the ends of the picture

    def test_an_interrupted_sweep_goes_on_where_it_stopped(self):
        arguments = ("--geometric", self.geometric, "--from", 0.1, "--to", 1.0, "--points", 8, "--results", "r.jsonl")
        whole = self.sweep(0, *arguments)
        path = self.folder / "r.jsonl"
        lines = path.read_text(encoding="utf-8").splitlines(keepends=True)
        self.assertEqual(len(lines), 9)
        path.write_text("".join(lines[:4]) + lines[4][:25], encoding="utf-8")  # killed in the middle of a line
        resumed = self.sweep(0, *arguments)
        self.assertEqual(resumed["resumed"], 3)
        self.assertEqual(resumed["counts"], whole["counts"])
        self.assertEqual(resumed["jumps"], whole["jumps"])
        self.assertEqual(len(path.read_text(encoding="utf-8").splitlines()), 9)
        self.assertEqual(self.sweep(0, *arguments)["resumed"], 8)

    def test_results_of_another_sweep_are_refused(self):
        self.sweep(0, "--from", 0.1, "--to", 1.0, "--points", 3, "--results", "r.jsonl")
        before = (self.folder / "r.jsonl").read_bytes()
        self.expect_failure(2, "other-sweep", "sweep", self.stiffness, "--from", 0.1, "--to", 1.1, "--points", 3,
                            "--results", "r.jsonl")
        self.assertEqual((self.folder / "r.jsonl").read_bytes(), before)
        text = before.decode().splitlines(keepends=True)
        (self.folder / "r.jsonl").write_text(text[0] + '{"number": 1}\n', encoding="utf-8")
        self.expect_failure(2, "bad-journal", "sweep", self.stiffness, "--from", 0.1, "--to", 1.0, "--points", 3,
                            "--results", "r.jsonl")

    def test_results_of_another_model_are_refused(self):
        question = ("--from", 0.1, "--to", 1.0, "--points", 3, "--results", "r.jsonl")
        self.sweep(0, "--geometric", self.geometric, *question)
        before = (self.folder / "r.jsonl").read_bytes()
        other = self.matrix("other.mtx", ROWS, diagonal([-1.0000001] * ROWS))
        held = self.folder / "fix.csv"
        held.write_text("3\n", encoding="ascii")
        dofs = self.folder / "dofs.csv"
        dofs.write_text("equation,node,dof\n" + "".join(f"{k},{k},ux\n" for k in range(1, ROWS + 1)), encoding="ascii")
        for changed in (("--geometric", other), ("--geometric", self.geometric, "--fix", held), ("--geometric", self.geometric, "--load-sign", "minus"),
                        ("--geometric", self.geometric, "--seed", 2), ("--geometric", self.geometric, "--digits", 12),
                        ("--geometric", self.geometric, "--dofs", dofs)):
            self.expect_failure(2, "other-sweep", "sweep", self.stiffness, *changed, *question)
            self.assertEqual((self.folder / "r.jsonl").read_bytes(), before)

    def forged(self, change):
        """A finished sweep whose kept counts are altered, and asked again."""
        question = ("--geometric", self.geometric, "--from", 0.1, "--to", 1.0, "--points", 4, "--results", "r.jsonl")
        self.sweep(0, *question)
        path = self.folder / "r.jsonl"
        lines = path.read_text(encoding="utf-8").splitlines()
        altered = json.loads(lines[2])
        change(altered)
        path.write_text("\n".join([*lines[:2], json.dumps(altered), *lines[3:]]) + "\n", encoding="utf-8")
        return question

    def test_a_kept_count_that_its_certificate_denies_is_refused(self):
        question = self.forged(lambda line: line.update(below=line["below"] + 1, below_range=[line["below"] + 1] * 2))
        self.expect_failure(2, "bad-journal", "sweep", self.stiffness, *question)

    def test_certified_counts_that_contradict_each_other_are_a_reported_defect(self):
        """A machine that counted wrongly once, and certified it: more values below a smaller factor than below a larger one."""

        def miscount(line):
            many = 40
            line.update(below=many, below_range=[many] * 2)
            for run in line["certificate"]["runs"]:
                run["negative"] = many

        question = self.forged(miscount)
        document = self.sweep(5, *question)
        self.assertIn("counts-contradict", [warning["code"] for warning in document["warnings"]])
        self.assertTrue(document["contradictions"])
        for pair in document["contradictions"]:
            self.assertGreater(pair["least"], pair["most"])
            shifts = [count["shift"] for count in document["counts"]]
            for shift in (pair["shift"], pair["other_shift"]):  # both certificates are in the document
                certificate = document["counts"][shifts.index(shift)]["certificate"]
                self.assertEqual(certificate["level"], "proved")
                self.assertTrue(certificate["runs"])
        text = self.run_program("sweep", self.stiffness, *question).stdout
        self.assertIn("contradict", text)

    def test_the_answer_is_the_same_for_any_number_of_threads(self):
        arguments = ("--geometric", self.geometric, "--from", 0.1, "--to", 1.0, "--points", 5, "--refine")
        one, two = (self.sweep(0, *arguments, "--threads", threads) for threads in (1, 2))
        for key in ("counts", "jumps", "sentences", "risk"):
            self.assertEqual(one[key], two[key])

    def test_a_shift_on_a_value_is_told_by_its_band(self):
        path = self.matrix("D.mtx", 3, diagonal([1, 2, 3]))
        document = self.expect(0, "sweep", path, "--from", 0.5, "--to", 3.5, "--points", 3)
        middle = document["counts"][1]
        self.assertEqual((middle["below"], middle["below_range"]), (None, [1, 2]))
        self.assertTrue(any(jump["low"] <= 2 <= jump["high"] and jump["count"] == 1 for jump in document["jumps"]))

    def test_k_not_definite_reports_the_inertia_only(self):
        path = self.matrix("I.mtx", 3, diagonal([-1, 2, 3]))
        geometric = self.matrix("B.mtx", 3, diagonal([1, -1, -1]))
        document = self.expect(0, "sweep", path, "--geometric", geometric, "--from", 0.45, "--to", 4.1, "--points", 8)
        self.assertIn("stiffness-not-definite", [warning["code"] for warning in document["warnings"]])
        self.assertTrue(all("negative directions" in count["meaning"] for count in document["counts"]))
        self.assertIn(-1, [jump["count"] for jump in document["jumps"]])
        document = self.expect(0, "sweep", path, "--geometric", geometric, "--from", 0.45, "--to", 0.9, "--points", 3)
        self.assertEqual(([count["below"] for count in document["counts"]], document["jumps"]), ([1, 1, 1], []))
        self.assertIn("The number of negative directions is the same at every shift", " ".join(document["in_words"]))
        self.assertIn("K itself is not positive definite (1 negative, 0 zero directions)", document["in_words"][1])

    def test_ranges_are_not_called_the_same_number(self):
        # Zero in K and G alike: nowhere one number of negative directions, though they grow from 0 to 2.
        path = self.matrix("S.mtx", 3, diagonal([0, 2, 3]))
        geometric = self.matrix("B.mtx", 3, diagonal([0, -1, -1]))
        document = self.expect(3, "sweep", path, "--geometric", geometric, "--from", 0.5, "--to", 3.1, "--points", 3)
        self.assertEqual([count["below_range"] for count in document["counts"]], [[0, 1], [0, 1], [2, 3]])
        words = " ".join(document["in_words"])
        self.assertIn("No change of the number of negative directions is certain: it is known only as a range at "
                      "3 of 3 shifts", words)
        self.assertNotIn("is the same", words)
        self.assertIn("singular at every f", document["in_words"][2])

    def test_bad_questions(self):
        for arguments, code in ((("--from", 1), "missing-argument"), (("--from", 2, "--to", 1), "out-of-range"),
                                (("--from", 1, "--to", 2, "--points", 1), "out-of-range"),
                                (("--from", 1, "--to", 2, "--spacing", "cubic"), "bad-word"),
                                (("--from", 1, "--to", 2, "--width", 0), "out-of-range"),
                                (("--from", 1, "--to", 2, "--svg", "-"), "bad-argument")):
            with self.subTest(arguments):
                self.expect_failure(2, code, "sweep", self.stiffness, *arguments)


if __name__ == "__main__":
    unittest.main()
