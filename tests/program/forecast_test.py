"""stanchion forecast: a figure for memory before anything is factored, and one that holds."""

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


if __name__ == "__main__":
    unittest.main()
