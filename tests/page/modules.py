"""Runs modules_test.mjs with node, from version 18 on; skipped, with the reason, where there is none."""

import pathlib
import shutil
import subprocess
import sys

SKIPPED, OLDEST = 77, 18


def main():
    node = shutil.which("node")
    if node is None:
        print("skipped: there is no node on this machine")
        return SKIPPED
    version = subprocess.run([node, "--version"], capture_output=True, text=True, check=True).stdout.strip()
    if int(version.lstrip("v").split(".")[0]) < OLDEST:
        print(f"skipped: node {version} has no test runner")
        return SKIPPED
    return subprocess.run([node, "--test", str(pathlib.Path(__file__).parent / "modules_test.mjs")], check=False).returncode


if __name__ == "__main__":
    sys.exit(main())
