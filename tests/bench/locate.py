"""What locating costs beside one count that keeps its factor (`scripts/bench locate`).

A count is ordering, analysis, and the certified inertia with the factor kept, in the same precision and number of threads:
that of the sound model (one factorization, without pivots to search), and that of the model itself. Locating is everything of `stanchion locate` but reading. Models:
sound, one loose part (6 directions), soft springs (6 weak ones), and two loose parts side by side (12).
"""

import argparse
import json
import pathlib
import shutil
import statistics
import subprocess

import numpy

CASES = ("sound", "loose-part", "soft-spring", "two-parts")


def specimen(program, folder, model, unknowns, fault):
    if not (folder / "K.npz").exists():
        subprocess.run([program, "specimen", model, "--unknowns", str(unknowns), "--out", folder, "--fault", fault,
                        "--format", "npz", "--quiet"], check=True)
        for name in ("M.npz", "G.npz"):
            (folder / name).unlink(missing_ok=True)
    return folder


def side_by_side(half, folder):
    """The model in `half` twice, 100 m apart."""
    if (folder / "K.npz").exists():
        return folder
    folder.mkdir(parents=True)
    with numpy.load(half / "K.npz") as once:
        rows, entries = int(once["shape"][0]), len(once["data"])
        numpy.savez(folder / "K.npz", data=numpy.tile(once["data"], 2), shape=numpy.array([2 * rows, 2 * rows]),
                    indices=numpy.concatenate([once["indices"], once["indices"] + rows]),
                    indptr=numpy.concatenate([once["indptr"], once["indptr"][1:] + entries]), format=once["format"])
    far = 10_000_000
    for name in ("dofs.csv", "nodes.csv"):
        shutil.copy(half / name, folder / name)
        with open(half / name, encoding="utf-8") as lines, open(folder / name, "a", encoding="utf-8") as out:
            next(lines)
            for line in lines:
                field = line.rstrip("\n").split(",")
                if name == "dofs.csv":
                    out.write(f"{int(field[0]) + rows},{int(field[1]) + far},{field[2]}\n")
                else:
                    out.write(f"{int(field[0]) + far},{field[1]},{float(field[2]) + 100},{field[3]}\n")
    return folder


def prepare(program, out, model, unknowns, case):
    folder = out / f"locate_{model}_{unknowns}_{case}"
    if case == "two-parts":
        half = specimen(program, out / f"locate_{model}_{unknowns}_half", model, unknowns // 2, "loose-part")
        return side_by_side(half, folder)
    return specimen(program, folder, model, unknowns, "none" if case == "sound" else case)


def run(program, folder, threads):
    done = subprocess.run([program, "locate", "K.npz", "--dofs", "dofs.csv", "--nodes", "nodes.csv", "--threads", str(threads),
                           "--json", "-"], cwd=folder, capture_output=True, text=True, check=False)
    if done.returncode not in (0, 1):
        raise SystemExit(f"{folder}: exit {done.returncode}: {done.stderr}")
    document = json.loads(done.stdout)
    times = document["timings_seconds"]
    return {"count": times["order"] + times["analyse"] + times["factor"] + times["certify"],
            "locate": times["total"] - times["read"], "factorizations": document["work"]["factorizations"],
            "found": sum(direction["count"] for direction in document["directions"])}


def main():
    parser = argparse.ArgumentParser(prog="scripts/bench locate", description=__doc__.splitlines()[0])
    parser.add_argument("--program", required=True, help=argparse.SUPPRESS)
    parser.add_argument("--out", required=True, help=argparse.SUPPRESS)
    parser.add_argument("--models", default="plate,solid", help="separated by commas")
    parser.add_argument("--cases", default=",".join(CASES[1:]), help="beside the sound model")
    parser.add_argument("--unknowns", type=int, default=200_000)
    parser.add_argument("--repeat", type=int, default=3)
    parser.add_argument("--threads", type=int, default=2)
    options = parser.parse_args()
    out, program = pathlib.Path(options.out), pathlib.Path(options.program).resolve()
    lines = ["| model | directions | factorizations | locating, s | count, s | times | sound model's count, s | times |",
             "|---|---|---|---|---|---|---|---|"]
    results = []
    cases = ["sound", *filter(None, options.cases.split(","))]
    for model in options.models.split(","):
        folders = {case: prepare(program, out, model, options.unknowns, case) for case in cases}
        runs = {case: [] for case in cases}
        for _ in range(options.repeat):  # in turn, so that a busy machine slows all alike
            for case in cases:
                runs[case].append(run(program, folders[case], options.threads))
        count = statistics.median(one["count"] for one in runs["sound"])
        for case in cases:
            locate = statistics.median(one["locate"] for one in runs[case])
            last = runs[case][-1]
            own = statistics.median(one["count"] for one in runs[case])
            lines.append(f"| {model}, {options.unknowns:,}, {case} | {last['found']} | {last['factorizations']} | {locate:.2f} "
                         f"| {own:.2f} | {locate / own:.1f} | {count:.2f} | {locate / count:.1f} |")
            results.append({"model": model, "unknowns": options.unknowns, "case": case, "runs": runs[case]})
    (out / "locate.json").write_text(json.dumps(results, indent=1) + "\n", encoding="utf-8")
    (out / "locate.md").write_text("\n".join(lines) + "\n", encoding="utf-8")
    print("\n".join(lines))


if __name__ == "__main__":
    main()
