"""stanchion convert: the same matrix in every format gives the same answer."""

import unittest

from program import ProgramTest, chain

FORMATS = ("mtx.gz", "npz", "h5", "rb", "csv", "txt")


class ConvertTest(ProgramTest):
    def setUp(self):
        super().setUp()
        entries = chain(40, held=0)
        entries[7, 7] += 1 / 3
        entries[7, 6] -= 0.1
        self.stiffness = self.matrix("K.mtx", 40, entries)

    def test_there_and_back_keeps_every_bit(self):
        self.convert("K.mtx", "K0.mtx")
        reference = (self.folder / "K0.mtx").read_bytes()
        for extension in FORMATS:
            with self.subTest(extension):
                self.convert("K0.mtx", f"K.{extension}")
                self.convert(f"K.{extension}", "back.mtx")
                self.assertEqual((self.folder / "back.mtx").read_bytes(), reference)

    def test_answers_do_not_depend_on_the_format(self):
        wanted = self.expect(1, "check", self.stiffness, "--expect", "zero:40")
        for extension in FORMATS:
            with self.subTest(extension):
                self.convert("K.mtx", f"K.{extension}")
                document = self.expect(1, "check", f"K.{extension}", "--expect", "zero:40")
                self.assertEqual(document["certificate"], wanted["certificate"])

    def test_errors(self):
        self.expect_failure(2, "unknown-extension", "convert", self.stiffness, "K.docx")
        self.expect_failure(2, "missing-argument", "convert", self.stiffness)
        self.expect_failure(2, r"[a-z-]+", "convert", "nowhere.mtx", "K.npz")
        self.expect_failure(2, "cannot-write", "convert", self.stiffness, "no/such/folder/K.npz")

    def convert(self, source, target):
        run = self.run_program("convert", source, target)
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        self.assertIn(f"{target} written: 40 equations, 79 entries in the lower triangle", run.stdout)


if __name__ == "__main__":
    unittest.main()
