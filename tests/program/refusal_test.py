"""A run that is refused: the files asked for say so, and nothing of an earlier run is left in their place."""

import os
import signal
import subprocess
import time
import unittest
import xml.etree.ElementTree

from page_outline import outline
from program import PROGRAM, ProgramTest, chain

NAMES = ("page.html", "suite.xml", "answer.json", "table.csv", "proof.json", "vector.csv")
PLACES = tuple(word for pair in zip(("--html", "--junit", "--json", "--csv", "--certificate", "--witness"), NAMES) for word in pair)


class RefusalTest(ProgramTest):
    def setUp(self):
        super().setUp()
        self.stiffness = self.matrix("K.mtx", 30, chain(30))
        (self.folder / "damaged.mtx").write_text("%%MatrixMarket matrix coordinate real symmetric\n2 2 3\n1 1 2\n2 1 abc\n2 2 2\n")
        (self.folder / "leaning.mtx").write_text("%%MatrixMarket matrix coordinate real general\n2 2 4\n1 1 2\n2 1 1\n1 2 1.5\n2 2 2\n")
        (self.folder / "broken.conf").write_text("[[[")

    def leave_answers_of_an_earlier_run(self):
        run = self.run_program("check", self.stiffness, *PLACES, "--quiet")
        self.assertEqual(run.returncode, 0, run.stderr)
        self.assertIn("positive definite", " ".join(outline(self.folder / "page.html").text))
        (self.folder / "vector.csv").write_text("equation,value\n", encoding="ascii")

    def complaint_of(self, code, *arguments):
        """Message with place, code and remedy as on standard error."""
        run = self.run_program(*arguments)
        self.assertEqual((run.returncode, run.stdout), (code, ""), run.stderr)
        first, *rest = run.stderr.removeprefix("stanchion: ").splitlines()
        remedy = " ".join(rest).strip().removeprefix("remedy: ")
        message, kind = first.rsplit(" [", 1)
        return message, kind.rstrip("]"), remedy

    def expect_said(self, code, command, message, kind, remedy):
        page = outline(self.folder / "page.html")
        text = " ".join(" ".join(page.text).split())
        case, = xml.etree.ElementTree.parse(self.folder / "suite.xml").getroot().findall("testsuite/testcase")
        error = case.find("error")
        suite = xml.etree.ElementTree.parse(self.folder / "suite.xml").getroot().find("testsuite")
        self.assertEqual([suite.get(name) for name in ("tests", "failures", "errors", "skipped")], ["1", "0", "1", "0"])
        self.assertEqual((case.get("name"), error.get("type")), (f"{command} answers well", kind))
        for part in (error.get("message"), kind, remedy, f"{code}"):
            self.assertIn(" ".join(part.split()), text)
            self.assertIn(part, error.text)
        self.assertTrue(message.endswith(error.get("message")), message)
        place = message.removesuffix(error.get("message")).rstrip(": ")
        self.assertIn(place, text.replace("\u200b", ""))
        self.assertIn(place, error.text)
        self.assertIn("Nothing was counted, and nothing is certified.", text)
        for word in ("Positive definite", "positive_definite", "proved"):
            self.assertNotIn(word, text)
        self.assertEqual(page.headings[0], "Why")
        self.assertEqual(page.headings[-1], "Not checked")
        return text

    def test_every_refusal_is_told_to_page_and_build_server(self):
        missing = str(self.folder / "no/such.mtx")
        for code, command, arguments in (
                (2, "check", ["damaged.mtx"]), (2, "check", [missing]), (2, "locate", ["leaning.mtx"]), (2, "check", ["K.mtx", "--dofs", "nowhere.csv"]),
                (2, "count", ["damaged.mtx", "--at", "1"]), (2, "forecast", ["damaged.mtx"]), (4, "check", ["K.mtx", "--memory-cap", "1k"]),
                (2, "check", ["K.mtx", "--risk", "2"]), (2, "check", ["K.mtx", "--threads", "two"]), (2, "check", ["K.mtx", "--no-such-option"]),
                (2, "check", []), (2, "check", ["K.mtx", "K.mtx", "damaged.mtx"]), (2, "sweep", ["K.mtx", "--geometric", "nowhere.mtx", "--from", "0", "--to", "1", "--points", "3"]),
                (2, "bracket", ["damaged.mtx", "--first", "3"]), (2, "audit", ["K.mtx", "--values", "nowhere.csv"]), (2, "check", ["K.mtx", "--config", "broken.conf"]),
                (2, "check", ["K.mtx", "--expect", "stable"])):
            with self.subTest(command=command, arguments=arguments):
                self.leave_answers_of_an_earlier_run()
                takes = {"--html", "--junit", "--json", "--csv"} | ({"--certificate"} if command not in ("locate", "forecast") else set()) | ({"--witness"} if command == "check" and len(arguments) != 3 else set())
                places = [word for k in range(0, len(PLACES), 2) if PLACES[k] in takes for word in PLACES[k:k + 2]]
                if "--certificate" in takes and arguments.count("K.mtx") == 2:  # a load path has none
                    places = places[:-2]
                silent = self.run_program(command, *arguments)
                said = self.complaint_of(code, command, *arguments, *places)
                if arguments:
                    self.assertEqual(silent.returncode, code)
                self.expect_said(code, command, *said)
                left = [name for name in NAMES[2:] if name in places and (self.folder / name).exists()]
                self.assertEqual(left, [], "of an earlier run")
                self.assertEqual([name for name in os.listdir(self.folder) if name.startswith(NAMES) and name not in NAMES], [], "parts")

    def test_the_page_names_inputs_title_and_reference(self):
        self.complaint_of(2, "check", "damaged.mtx", "--dofs", "K.mtx", "--html", "page.html", "--title", "Store & yard", "--reference", "sheet <14>")
        text = " ".join(outline(self.folder / "page.html").text)
        for part in ("Store & yard", "sheet <14>", "K.mtx:5", "damaged.mtx", "dofs", "Is K positive definite?"):
            self.assertIn(part, text)

    def test_nothing_that_is_read_is_touched(self):
        before = (self.folder / "K.mtx").read_bytes()
        (self.folder / "steps.txt").write_text("K.mtx\n", encoding="ascii")
        for arguments in (["K.mtx", "--html", "K.mtx"], ["K.mtx", "--threads", "two", "--html", "K.mtx"], ["--bad", "--junit", "K.mtx", "K.mtx"],
                          ["K.mtx", "--csv=K.mtx", "--risk", "2"], ["damaged.mtx", "--dofs=K.mtx", "--bad", "--html", "K.mtx"], ["damaged.mtx", "--add", "K.mtx:1", "--bad", "--html", "K.mtx"],
                          ["--list", "steps.txt", "--risk", "2", "--html", "K.mtx"], ["--html", "K.mtx", "K.mtx", "--title"], ["K.mtx", "--html", "K.mtx", "--json", "K.mtx"]):
            with self.subTest(arguments):
                self.complaint_of(2, "check", *arguments)
                self.assertEqual((self.folder / "K.mtx").read_bytes(), before)

    def test_a_run_that_is_stopped_or_killed_leaves_no_older_answer(self):
        path = self.matrix("long.mtx", 20000, chain(20000))
        shifts = [f"--at={','.join(repr(k / 100000 + part) for k in range(1, 5001))}" for part in range(4)]
        for number in (signal.SIGTERM, signal.SIGKILL):
            with self.subTest(number):
                self.leave_answers_of_an_earlier_run()
                with subprocess.Popen([PROGRAM, "count", path, *shifts, *PLACES[:8], "--log", "run.log"], cwd=self.folder, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL) as process:
                    while "count" not in (self.folder / "run.log").read_text() if (self.folder / "run.log").exists() else True:
                        time.sleep(0.01)
                    process.send_signal(number)
                (self.folder / "run.log").unlink()
                there = [name for name in NAMES[:4] if (self.folder / name).exists()]
                self.assertEqual(there, ["page.html", "suite.xml"] if number == signal.SIGTERM else [])
                if there:
                    self.assertIn("The run was stopped", " ".join(outline(self.folder / "page.html").text))

    def test_a_witness_that_is_none_leaves_no_older_one(self):
        self.leave_answers_of_an_earlier_run()
        self.assertEqual(self.run_program("check", self.stiffness, "--witness", "vector.csv").returncode, 0)
        self.assertFalse((self.folder / "vector.csv").exists())

    def test_a_recheck_of_other_bytes_leaves_no_older_agreement(self):
        self.assertEqual(self.run_program("check", self.stiffness, "--certificate", "proof.json", "--quiet").returncode, 0)
        self.assertEqual(self.run_program("recheck", "proof.json", "--json", "agreed.json", "--quiet").returncode, 0)
        self.assertTrue((self.folder / "agreed.json").exists())
        with open(self.stiffness, "a", encoding="ascii") as matrix:
            matrix.write("\n")
        self.assertEqual(self.run_program("recheck", "proof.json", "--json", "agreed.json", "--quiet").returncode, 2)
        self.assertFalse((self.folder / "agreed.json").exists())

    def test_what_could_not_be_written_certifies_nothing(self):
        run = self.run_program("check", self.stiffness, "--certificate", "/dev/full", "--html", "page.html", "--junit", "suite.xml")
        self.assertEqual(run.returncode, 4)
        text = " ".join(outline(self.folder / "page.html").text)
        self.assertIn("The answer was reached, but not all of it could be written.", text)
        self.assertIn("This page certifies nothing.", text)


if __name__ == "__main__":
    unittest.main()
