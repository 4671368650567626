"""Runs the benchmark ladder: every specimen and question by every program in turn, and writes tables.

scripts/bench builds the programs and calls this file. Each run is one process and one repetition; ours and theirs
alternate, so that a busy machine slows both alike.
"""

import argparse
import json
import os
import pathlib
import statistics
import subprocess
import sys
import time
from dataclasses import dataclass

import picture
import tables


@dataclass(frozen=True)
class Question:
    """One row of the ladder. `text` is what a person asks; `options` select matrix and mode."""

    model: str
    unknowns: int
    text: str
    options: tuple
    definite: bool


def definite(model, unknowns):
    return Question(model, unknowns, "positive definite?", ("--definite",), True)


def count(model, unknowns, pencil, shift):
    text = {"geometric": f"factors below {shift:g}", "mass": f"omega^2 below {shift:g}",
            "stiffness": f"eigenvalues of K below {shift:g}"}[pencil]
    return Question(model, unknowns, text, ("--pencil", pencil, "--shift", str(shift)), False)


QUICK = [
    definite("solid", 10_000), definite("plate", 20_000), definite("frame", 10_000),
    count("solid", 10_000, "mass", 3e6), count("plate", 20_000, "geometric", 3.0),
    count("frame", 10_000, "geometric", 20.0), count("saddle", 10_000, "stiffness", 0.0),
]

FULL = [
    definite("solid", 3_000), definite("solid", 30_000), definite("solid", 100_000), definite("solid", 200_000),
    definite("plate", 3_000), definite("plate", 50_000), definite("plate", 200_000), definite("plate", 600_000),
    definite("plate-coupled", 200_000), definite("plate-coupled", 600_000),
    definite("frame", 3_000), definite("frame", 20_000), definite("frame", 100_000),
    count("solid", 30_000, "mass", 3e6), count("solid", 100_000, "mass", 3e6),
    count("plate", 50_000, "geometric", 3.0), count("plate", 200_000, "geometric", 3.0),
    count("plate-coupled", 200_000, "geometric", 3.0),
    count("frame", 20_000, "geometric", 20.0), count("frame", 100_000, "geometric", 20.0),
    count("laplace", 30_000, "stiffness", 2.01), count("column", 300_000, "geometric", 30.0),
    count("saddle", 30_000, "stiffness", 0.0), count("saddle", 100_000, "stiffness", 0.0),
]


def contenders(question):
    """(label, program, options): one factorization each, and ours with the whole certificate, without a dof map, with
    one, and with one and no factor kept."""
    yield "stanchion", "bench_factor", question.options
    yield "stanchion, certified", "bench_factor", question.options + ("--certified",)
    yield "stanchion, certified, nodes given", "bench_factor", question.options + ("--certified", "--node-map")
    if not question.definite:
        yield "stanchion, certified, no factor kept", "bench_factor", question.options + (
            "--certified", "--node-map", "--least-memory")
    if question.definite:
        yield "CHOLMOD", "peer_cholmod", ()
        yield "CHOLMOD, our order", "peer_cholmod", ("--our-order",)
    yield "MUMPS", "peer_mumps", question.options
    yield "MUMPS, our order", "peer_mumps", question.options + ("--our-order",)


def environment(variant):
    """`preset`: as the shell has it; `native`: the BLAS chooses its own kernels."""
    values = dict(os.environ)
    if variant == "native":
        for name in ("OPENBLAS_CORETYPE", "OPENBLAS_L2_SIZE"):
            values.pop(name, None)
    return values


class Runner:
    def __init__(self, arguments):
        self.arguments = arguments
        self.programs = pathlib.Path(arguments.programs)

    def call(self, program, options, variant):
        """The program's JSON lines; none when it failed (said on standard error)."""
        path = self.programs / program
        if not path.exists():
            return []
        done = subprocess.run([path, *options], env=environment(variant), capture_output=True, text=True,
                              timeout=self.arguments.timeout)
        if done.returncode != 0:
            print(f"{program} {' '.join(options)}: exit {done.returncode}: {done.stderr.strip()}", file=sys.stderr)
            return []
        return [json.loads(line) for line in done.stdout.splitlines()]

    def dgemm(self, variant):
        return self.call("bench_dgemm", (), variant)[0]

    def repetitions(self, first_seconds):
        """At least five for runs under two seconds, fewer for long ones, unless --repeat says."""
        if self.arguments.repeat:
            return self.arguments.repeat
        return 5 if first_seconds < 2 else 3 if first_seconds < 20 else 2

    def question(self, question, threads, variant):
        """Medians by contender. The first round decides how many there are."""
        lines = {}
        rounds, wanted = 0, 1
        while rounds < wanted:
            for label, program, options in contenders(question):
                common = (question.model, str(question.unknowns), "--threads", str(threads), "--repeat", "1")
                for line in self.call(program, common + options, variant):
                    lines.setdefault(label, []).append(line)
            rounds += 1
            if rounds == 1 and "stanchion" in lines:
                line = lines["stanchion"][0]
                wanted = self.repetitions(line["numeric_seconds"] + line["order_seconds"])
        return {label: median_line(found) for label, found in lines.items()}


def median_line(lines):
    """The first line with every timing and size replaced by its median over the repetitions."""
    result = dict(lines[0], repetitions=len(lines))
    for key in lines[0]:
        if key.endswith("_seconds") or key.endswith("_bytes") or key == "gflops":
            result[key] = statistics.median(line[key] for line in lines)
    for key in ("order_seconds", "analyse_seconds", "numeric_seconds"):
        result["least_" + key] = min(line[key] for line in lines)
    result["valid"] = all(line["valid"] for line in lines)
    return result


def read_arguments():
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--programs", required=True, help="folder of the built benchmark programs")
    parser.add_argument("--out", required=True, help="folder for results.json and results.md")
    parser.add_argument("--quick", action="store_true", help="a small ladder")
    parser.add_argument("--models", default="", help="only these, separated by commas")
    parser.add_argument("--repeat", type=int, default=0, help="repetitions of everything; default by duration")
    parser.add_argument("--threads", default="", help="numbers separated by commas; default 1 and all processors")
    parser.add_argument("--variants", default="preset,native", help="preset, native or both")
    parser.add_argument("--timeout", type=float, default=900, help="seconds for one process")
    return parser.parse_args()


def main():
    arguments = read_arguments()
    runner = Runner(arguments)
    wanted = set(filter(None, arguments.models.split(",")))
    ladder = [q for q in (QUICK if arguments.quick else FULL) if not wanted or q.model in wanted]
    all_processors = len(os.sched_getaffinity(0))
    threads = [int(t) for t in arguments.threads.split(",") if t] or sorted({1, all_processors})
    out = pathlib.Path(arguments.out)
    blocks = []
    for variant in arguments.variants.split(","):
        for count_of_threads in threads:
            block = {"variant": variant, "threads": count_of_threads, "dgemm": [runner.dgemm(variant)], "rows": []}
            blocks.append(block)
            for question in ladder:
                started = time.monotonic()
                found = runner.question(question, count_of_threads, variant)
                block["rows"].append({"model": question.model, "unknowns": question.unknowns,
                                      "question": question.text, "load_average": os.getloadavg()[0],
                                      "results": found})
                block["dgemm"].append(runner.dgemm(variant))
                print(f"{variant}, {count_of_threads} threads: {question.model} {question.unknowns} "
                      f"{question.text}: {time.monotonic() - started:.1f} s", file=sys.stderr)
                (out / "results.json").write_text(json.dumps(blocks, indent=1) + "\n")
                (out / "results.md").write_text(tables.markdown(blocks))
                (out / "results.svg").write_text(picture.svg(blocks))
    print((out / "results.md").read_text())


if __name__ == "__main__":
    main()
