"""stanchion forecast: a figure for memory before anything is factored, and one that holds."""

import os
import unittest

from program import ProgramTest, chain


class ForecastTest(ProgramTest):
    def test_figures(self):
        path = self.matrix("K.mtx", 2000, chain(2000))
        document = self.expect(0, "forecast", path)
        forecast = document["forecast"]
        self.assertGreaterEqual(forecast["factor_entries"], 3999)
        self.assertGreater(forecast["factor_flops"], 0)
        self.assertGreater(forecast["peak_bytes_count"], 0)
        self.assertGreaterEqual(forecast["peak_bytes_solve"], forecast["peak_bytes_count"])
        self.assertGreater(forecast["peak_bytes_locate"], forecast["peak_bytes_solve"])
        self.assertEqual(document["work"]["factorizations"], 0)

    def test_an_indefinite_matrix_is_forecast_as_well(self):
        entries = chain(100)
        entries[50, 50] = -7.0
        self.expect(0, "forecast", self.matrix("K.mtx", 100, entries))

    def test_text(self):
        run = self.run_program("forecast", self.matrix("K.mtx", 200, chain(200)))
        self.assertEqual(run.returncode, 0, run.stderr)
        self.assertRegex(run.stdout.splitlines()[0], r"^One count will take (about|less than) .*s and .*B of memory\.$")

    def test_the_forecast_of_a_sweep_holds_and_is_not_loose(self):
        for model, pencil, matrix, ends in (("plate", "--geometric", "G.mtx", (1, 6)), ("solid", "--mass", "M.mtx", (1e4, 1e6))):
            with self.subTest(model):
                made = self.run_program("specimen", model, "--unknowns", 12000, "--out", self.folder / model, "--quiet")
                self.assertEqual(made.returncode, 0, made.stderr)
                folder = self.folder / model
                files = (folder / "K.mtx", pencil, folder / matrix, "--threads", 2)
                forecast = self.expect(0, "forecast", *files)["forecast"]
                self.assertEqual(forecast["side_by_side"], 2)
                self.assertGreater(forecast["seconds_side_by_side"], 0)
                sweep = self.expect(0, "sweep", *files, "--from", ends[0], "--to", ends[1], "--points", 4)
                self.assertEqual(sweep["side_by_side"], 2)
                memory = sweep["memory_bytes"]
                if not os.environ.get("STANCHION_SANITIZED"):  # a sanitizer holds memory of its own
                    self.assertLessEqual(memory["peak"], 1.05 * memory["forecast"])
                    self.assertLessEqual(memory["forecast"], 2 * memory["peak"])
                    self.assertGreater(forecast["peak_bytes_side_by_side"], forecast["peak_bytes_count"])
                alone = self.expect(0, "forecast", *files, "--memory-cap", "1M")["forecast"]
                self.assertEqual(alone["side_by_side"], 1)


if __name__ == "__main__":
    unittest.main()
