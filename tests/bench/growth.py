"""Growth of the definite check with the number of equations, and fitted exponents beside those of nested dissection.

scripts/bench builds the program and calls this file. A surface cut in halves again and again needs n^(3/2) operations and
n log n entries in L, a body n^2 and n^(4/3) (A. George, SIAM J. Numer. Anal. 10, 1973, for the grid; R. J. Lipton,
D. J. Rose, R. E. Tarjan, SIAM J. Numer. Anal. 16, 1979, for graphs with small separators).
"""

import argparse
import json
import math
import pathlib
import statistics
import subprocess

import picture
import tables

LADDERS = {
    "plate": [12_500, 25_000, 50_000, 100_000, 200_000, 400_000, 800_000],
    "solid": [12_500, 25_000, 50_000, 100_000, 200_000],
}
COLUMNS = [("operations", "factor_flops"), ("entries in L", "factor_entries"), ("seconds", "seconds"),
           ("bytes over the matrix", "increase_over_matrix_bytes")]
THEORY = {
    "plate": {"operations": lambda n: n**1.5, "entries in L": lambda n: n * math.log(n)},
    "solid": {"operations": lambda n: n**2, "entries in L": lambda n: n ** (4 / 3)},
}


def measure(program, model, unknowns, threads):
    """One process, one repetition."""
    command = [program, model, str(unknowns), "--definite", "--certified", "--node-map", "--threads", str(threads), "--repeat", "1"]
    record = json.loads(subprocess.run(command, check=True, capture_output=True, text=True).stdout)
    return {**record, "seconds": tables.whole(record)}


def rows_of(program, model, repeat, threads):
    """Medians of `repeat` runs at each size of the ladder."""
    for unknowns in LADDERS[model]:
        runs = [measure(program, model, unknowns, threads) for _ in range(repeat)]
        yield {"rows": runs[0]["rows"], **{key: statistics.median(run[key] for run in runs) for _, key in COLUMNS}}


def fitted(rows, key):
    return picture.exponent([(row["rows"], row[key]) for row in rows])


def expected(rows, model, name):
    """The exponent that a fit over the same sizes gives the theory's own function; None where theory is silent."""
    theory = THEORY[model].get(name)
    return picture.exponent([(row["rows"], theory(row["rows"])) for row in rows]) if theory else None


def table(model, rows):
    lines = [f"| {model}, equations | Gflop | 10^6 entries in L | seconds | MB over the matrix |", "|---|---|---|---|---|"]
    for row in rows:
        lines.append(f"| {row['rows']:,} | {row['factor_flops'] / 1e9:.3g} | {row['factor_entries'] / 1e6:.3g} "
                     f"| {row['seconds']:.3f} | {row['increase_over_matrix_bytes'] / 1e6:.0f} |")
    lines.append("| exponent | " + " | ".join(f"{fitted(rows, key):.2f}" for _, key in COLUMNS) + " |")
    theory = [expected(rows, model, name) for name, _ in COLUMNS]
    lines.append("| nested dissection | " + " | ".join("" if value is None else f"{value:.2f}" for value in theory) + " |")
    return "\n".join(lines) + "\n"


def main():
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--programs", type=pathlib.Path, required=True, help="folder of bench_factor")
    parser.add_argument("--out", type=pathlib.Path, required=True, help="folder for growth.md and growth.json")
    parser.add_argument("--models", default=",".join(LADDERS), help="which of " + ", ".join(LADDERS))
    parser.add_argument("--repeat", type=int, default=3)
    parser.add_argument("--threads", type=int, default=2)
    arguments = parser.parse_args()
    found = {}
    for model in arguments.models.split(","):
        found[model] = list(rows_of(str(arguments.programs / "bench_factor"), model, arguments.repeat, arguments.threads))
        print(table(model, found[model]), flush=True)
    (arguments.out / "growth.md").write_text("\n".join(table(model, rows) for model, rows in found.items()))
    (arguments.out / "growth.json").write_text(json.dumps(found, indent=1) + "\n")


if __name__ == "__main__":
    main()
