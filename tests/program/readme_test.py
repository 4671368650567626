"""The output shown in README.md is what the program prints today, but for times, memory and the machine."""

import re
import shlex
import subprocess
import unittest

from program import PROGRAM, SOURCE, ProgramTest

BLOCK = re.compile(r"```console\n\$ stanchion ([^\n]*)\n(.*?)```", re.DOTALL)
# Lines that differ between machines and runs, with what may follow on the next line.
VARYING = re.compile(r"^  (memory|time|machine|work|fronts) .*\n(?: {16}.*\n)?", re.MULTILINE)
BOUND = re.compile(r"rounding errors at most \S+|exceeds \S+|K itself\s+\S+|offset \S+|^  resolution .*", re.MULTILINE)
# How a count is backed may change with the method; the count itself may not.
BACKING = re.compile(r"^( +[-\d.]+ +\d+ ).*(?:\n {14}.*)?$|^Statistics: .*\n|^  backed by .*$", re.MULTILINE)

# Ends of intervals agree in their first digits; the last ones are rounding.
INTERVAL = re.compile(r"^ +(\d\.\d{6})\S* +(\d\.\d{6})\S* +(\d\.\d{6})\S* +(\d+)$|^ +value +low +high +times$", re.MULTILINE)


def stable(text):
    text = INTERVAL.sub(lambda found: " ".join(found[k] or "" for k in (1, 2, 3, 4)), text)
    return BACKING.sub(lambda found: found[1] or "", BOUND.sub("...", VARYING.sub("", text)))


class ReadmeTest(ProgramTest):
    def test_every_console_block(self):
        blocks = BLOCK.findall((SOURCE / "README.md").read_text(encoding="utf-8"))
        self.assertEqual(len(blocks), 3)
        for command, shown in blocks:
            with self.subTest(command):
                run = subprocess.run([PROGRAM, *shlex.split(command)], cwd=SOURCE, capture_output=True, text=True,
                                     check=False, timeout=60)
                self.assertEqual((run.returncode, run.stderr), (0, ""))
                self.assertEqual(stable(run.stdout), stable(shown))


if __name__ == "__main__":
    unittest.main()
