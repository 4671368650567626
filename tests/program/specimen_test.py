"""stanchion specimen: models on disk, and the program's own answers about them."""

import json
import os
import unittest

from program import ProgramTest


class SpecimenTest(ProgramTest):
    def make(self, name, unknowns, *options):
        folder = self.folder / "model"
        run = self.run_program("specimen", name, "--unknowns", unknowns, "--out", folder, *options)
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        self.assertIn("known", run.stdout)
        return folder, json.loads((folder / "expected.json").read_text())

    def test_list(self):
        run = self.run_program("specimen", "--list")
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        for name in ("solid", "plate", "cylinder", "frame", "lattice", "column", "saddle", "laplace"):
            self.assertIn(f"  {name} ", run.stdout)

    def test_a_sound_model_is_definite(self):
        folder, _ = self.make("lattice", 2000)
        self.assertEqual(sorted(os.listdir(folder)),
                         ["G.mtx", "K.mtx", "M.mtx", "dofs.csv", "expected.json", "nodes.csv"])
        document = self.expect(0, "check", folder / "K.mtx", "--dofs", folder / "dofs.csv")
        self.assertEqual(document["verdict"], "positive_definite")

    def test_a_free_model_has_its_six_motions(self):
        folder, expected = self.make("frame", 1000, "--fault", "free")
        self.assertEqual(expected["inertia"]["zero"], 6)
        self.expect(0, "check", folder / "K.mtx", "--expect", "zero:6")

    def test_a_negative_spring_is_found(self):
        folder, _ = self.make("solid", 1000, "--fault", "negative-spring", "--format", "npz")
        self.expect(0, "check", folder / "K.npz", "--expect", "negative:1")

    def test_same_arguments_same_files(self):
        first, _ = self.make("plate", 500)
        texts = {path.name: path.read_bytes() for path in first.iterdir()}
        second, _ = self.make("plate", 500)
        self.assertEqual({path.name: path.read_bytes() for path in second.iterdir()}, texts)

    def test_errors(self):
        self.expect_failure(2, "missing-argument", "specimen")
        self.expect_failure(2, "missing-argument", "specimen", "plate")
        self.expect_failure(2, "unknown-specimen", "specimen", "bridge", "--unknowns", 10, "--out", "x")
        self.expect_failure(2, "unknown-fault", "specimen", "plate", "--unknowns", 10, "--out", "x", "--fault", "rust")
        self.expect_failure(2, "unknown-extension", "specimen", "plate", "--unknowns", 10, "--out", "x",
                            "--format", "docx")
        (self.folder / "file").write_text("")
        self.expect_failure(2, "cannot-write", "specimen", "plate", "--unknowns", 10, "--out", "file/x")


if __name__ == "__main__":
    unittest.main()
