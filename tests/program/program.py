"""Runs the program and looks at what it leaves behind; writes small matrices whose answers are known."""

import json
import math
import os
import pathlib
import subprocess
import tempfile
import unittest

import jsonschema

PROGRAM = os.environ["STANCHION_PROGRAM"]
SOURCE = pathlib.Path(os.environ["STANCHION_SOURCE"])


def validator(schema):
    text = (SOURCE / f"data/schemas/{schema}.json").read_text(encoding="utf-8")
    return jsonschema.Draft202012Validator(json.loads(text))


VALIDATORS = {schema: validator(schema) for schema in ("outcome-1", "certificate-1", "recheck-1", "view-1")}


def refuse_constant(text):
    raise ValueError(f"{text} is not JSON")


def read_json(text, schema="outcome-1"):
    """The document in `text`, checked against a shipped schema."""
    document = json.loads(text, parse_constant=refuse_constant)
    problems = [f"{list(error.absolute_path)}: {error.message}" for error in VALIDATORS[schema].iter_errors(document)]
    if problems:
        raise AssertionError("the document breaks its schema:\n" + "\n".join(problems))
    return document


def write_matrix(path, rows, entries):
    """`entries` maps (row, column), from 0 and in the lower triangle, to a value."""
    lines = ["%%MatrixMarket matrix coordinate real symmetric", f"{rows} {rows} {len(entries)}"]
    lines += [f"{i + 1} {j + 1} {value!r}" for (i, j), value in entries.items()]
    path.write_text("\n".join(lines) + "\n", encoding="ascii")
    return str(path)


def chain(rows, held=1):
    """Springs of stiffness 1 in a row, the first `held` ends (0, 1 or 2) tied to the ground."""
    entries = {}
    for i in range(rows):
        entries[i, i] = 2.0
        if i + 1 < rows:
            entries[i + 1, i] = -1.0
    if held < 2:
        entries[rows - 1, rows - 1] -= 1.0
    if held < 1:
        entries[0, 0] -= 1.0
    return entries


def chain_eigenvalues(rows):
    """Of a chain with both ends held, ascending."""
    return [2 - 2 * math.cos(math.pi * k / (rows + 1)) for k in range(1, rows + 1)]


def diagonal(values):
    return {(i, i): float(value) for i, value in enumerate(values)}


class ProgramTest(unittest.TestCase):
    """Each test works in a folder of its own."""

    def setUp(self):
        folder = tempfile.TemporaryDirectory()
        self.addCleanup(folder.cleanup)
        self.folder = pathlib.Path(folder.name)

    def matrix(self, name, rows, entries):
        return write_matrix(self.folder / name, rows, entries)

    def run_program(self, *arguments, **options):
        return subprocess.run([PROGRAM, *map(str, arguments)], capture_output=True, text=True, timeout=240,
                              cwd=self.folder, check=False, **options)

    def expect(self, code, *arguments):
        """Runs with --json, expects the exit code and silence on standard error; returns the document."""
        answer = self.folder / "answer.json"
        run = self.run_program(*arguments, "--json", answer)
        self.assertEqual((run.returncode, run.stderr), (code, ""), run.stdout)
        self.assertTrue(run.stdout, "no text on standard output")
        return read_json(answer.read_text(encoding="utf-8"))

    def expect_failure(self, code, kind, *arguments):
        """Expects the exit code, an empty standard output and one complaint of that kind; returns it."""
        run = self.run_program(*arguments)
        self.assertEqual((run.returncode, run.stdout), (code, ""), run.stderr)
        first, *rest = run.stderr.splitlines()
        self.assertRegex(first, rf"^stanchion: .*\[{kind}\]$")
        self.assertRegex("\n".join(rest), r"^  remedy: \S")
        return run.stderr
