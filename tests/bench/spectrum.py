"""The lowest values side by side: ours with certificate, ARPACK through SciPy, and SLEPc's spectrum slicing with MUMPS.

`scripts/bench spectrum` builds the program and calls this file. Every run is a process of its own; ours and theirs
alternate, so that a busy machine slows both alike. Reading the files is in no one's time. The interval that slicing needs is
taken from our answer, a head start for it.
"""

import argparse
import json
import pathlib
import statistics
import subprocess
import sys

MODELS = {
    "plate_50k": ("plate", 50_000, "geometric"),
    "plate_200k": ("plate", 200_000, "geometric"),
    "cylinder_50k": ("cylinder", 50_000, "geometric"),
    "frame_20k": ("frame", 20_000, "geometric"),
    "solid_30k": ("solid", 30_000, "mass"),
    "solid_100k": ("solid", 100_000, "mass"),
}
SECOND = {"geometric": "G.mtx", "mass": "M.mtx"}
PEER = pathlib.Path(__file__).with_name("spectrum_peer.py")


def ours(program, folder, pencil, many, threads):
    command = [program, "bracket", folder / "K.mtx", f"--{pencil}", folder / SECOND[pencil], "--dofs", folder / "dofs.csv",
               "--first", many, "--threads", threads, "--json", "-"]
    run = subprocess.run([*map(str, command)], capture_output=True, text=True, check=True)
    document = json.loads(run.stdout)
    times = document["timings_seconds"]
    widths = [(value["high"] - value["low"]) / max(abs(value["low"]), abs(value["high"])) for value in document["critical"]
              if not value["rigid_body"]]
    values = [value["value"] for value in document["critical"] for _ in range(value["multiplicity"])]
    return {"seconds": times["total"] - times["read"], "values": values, "end": document["complete"]["to"],
            "factorizations": document["work"]["factorizations"], "widest": max(widths), "level": document["complete"]["level"],
            "clusters": len(document["critical"]), "peak_mb": document["memory_bytes"]["peak"] / 1e6}


def theirs(method, folder, pencil, many, end, threads):
    files = [(folder / name).with_suffix(".npz") for name in ("K.mtx", SECOND[pencil])]
    command = [sys.executable, PEER, method, *files, pencil, many, repr(end), threads]
    run = subprocess.run([*map(str, command)], capture_output=True, text=True, check=False)
    if run.returncode != 0:
        return {"failed": run.stderr.strip().splitlines()[-1] if run.stderr.strip() else f"exit {run.returncode}"}
    return json.loads(run.stdout)


def worst_difference(values, reference, asked):
    """Largest relative distance of the peer's values from our brackets' values; None where some of those asked are missing.
    Ours may be more: what is not told apart from the last one comes with it."""
    if len(values) < min(asked, len(reference)):
        return None
    return max(abs(a / b - 1) for a, b in zip(sorted(values), sorted(reference)))


def prepare(program, folder, specimen, unknowns, pencil):
    """The model's files, and copies that SciPy reads in a second."""
    if not (folder / "K.mtx").exists():
        folder.mkdir(parents=True, exist_ok=True)
        subprocess.run([program, "specimen", specimen, "--unknowns", str(unknowns), "--out", str(folder)],
                       check=True, stdout=subprocess.DEVNULL)
    for name in ("K.mtx", SECOND[pencil]):
        fast = (folder / name).with_suffix(".npz")
        if not fast.exists():
            subprocess.run([program, "convert", str(folder / name), str(fast)], check=True, stdout=subprocess.DEVNULL)


def main():
    parser = argparse.ArgumentParser(prog="scripts/bench spectrum", description=__doc__)
    parser.add_argument("--program", required=True, help=argparse.SUPPRESS)
    parser.add_argument("--out", required=True, help=argparse.SUPPRESS)
    parser.add_argument("--models", default="plate_50k,frame_20k,solid_30k", help="of " + ",".join(MODELS))
    parser.add_argument("--prepare", action="store_true", help="only make the models")
    parser.add_argument("--peers", default="arpack,slepc", help="of arpack,slepc")
    parser.add_argument("--many", type=int, default=20, help="values asked (20)")
    parser.add_argument("--repeat", type=int, default=3)
    parser.add_argument("--threads", type=int, default=2)
    options = parser.parse_args()
    out = pathlib.Path(options.out)
    lines = ["| model | who | seconds (median) | ratio ours / theirs | factorizations | clusters | widest bracket | agrees to |",
             "|---|---|---|---|---|---|---|---|"]
    peers = options.peers.split(",")
    results = {}
    for name in options.models.split(","):
        specimen, unknowns, pencil = MODELS[name]
        folder = out / name
        prepare(options.program, folder, specimen, unknowns, pencil)
        if options.prepare:
            continue
        runs = {"ours": [], **{method: [] for method in peers}}
        for _ in range(options.repeat):
            mine = ours(options.program, folder, pencil, options.many, options.threads)
            runs["ours"].append(mine)
            for method in peers:
                if runs[method] and "failed" in runs[method][-1]:
                    continue
                runs[method].append(theirs(method, folder, pencil, options.many, mine["end"], options.threads))
        results[name] = runs
        median = statistics.median(run["seconds"] for run in runs["ours"])
        mine = runs["ours"][-1]
        lines.append(f"| {name} | stanchion, {mine['level']} | {median:.2f} | | {mine['factorizations']} | {mine['clusters']} "
                     f"| {mine['widest']:.1e} | |")
        for method in peers:
            if "failed" in runs[method][-1]:
                lines.append(f"| {name} | {method} | failed: {runs[method][-1]['failed'][:60]} | | | | | |")
                continue
            theirs_median = statistics.median(run["seconds"] for run in runs[method])
            difference = worst_difference(runs[method][-1]["values"], mine["values"],
                                          options.many if method == "arpack" else len(mine["values"]))
            agrees = f"{difference:.0e}" if difference is not None else f"only {len(runs[method][-1]['values'])} found"
            lines.append(f"| {name} | {method} | {theirs_median:.2f} | {median / theirs_median:.2f} | | | none | {agrees} |")
        print("\n".join(lines[-1 - len(peers):]), flush=True)
    if options.prepare:
        return
    (out / "spectrum.json").write_text(json.dumps(results, indent=1), encoding="utf-8")
    (out / "spectrum.md").write_text("\n".join(lines) + "\n", encoding="utf-8")
    print(f"written: {out / 'spectrum.json'} and {out / 'spectrum.md'}")


if __name__ == "__main__":
    main()
