"""Options from a file and from the environment; pages and completion made from the options."""

import json
import os
import shutil
import subprocess
import unittest

from program import ProgramTest, chain


class ConfigurationTest(ProgramTest):
    def setUp(self):
        super().setUp()
        self.stiffness = self.matrix("K.mtx", 40, chain(40))
        self.config = self.folder / "config.json"

    def run_with(self, *arguments, **variables):
        surroundings = {name: value for name, value in os.environ.items() if not name.startswith("STANCHION_")}
        surroundings |= {"HOME": str(self.folder), "XDG_CONFIG_HOME": str(self.folder / "none")} | variables
        return self.run_program(*arguments, env=surroundings)

    def options(self, *arguments, **variables):
        run = self.run_with("check", self.stiffness, "--print-config", *arguments, **variables)
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        return {key: (option["value"], option["from"].split()[0])
                for key, option in json.loads(run.stdout)["options"].items()}

    def test_what_is_typed_wins_over_the_environment_and_that_over_the_file(self):
        self.config.write_text(json.dumps({"all": {"risk": 1e-7, "seed": 4, "threads": 1},
                                           "check": {"seed": 5, "strike_held": True, "digits": 12}}), encoding="utf-8")
        given = ("--config", self.config)
        self.assertEqual(self.options(*given), {"risk": (["1e-07"], "file"), "seed": (["5"], "file"),
                                                "threads": (["1"], "file"), "strike_held": (["true"], "file"),
                                                "digits": (["12"], "file")})
        self.assertEqual(self.options(*given, "--digits", "11", STANCHION_SEED="6", STANCHION_DIGITS="10",
                                      STANCHION_STRIKE_HELD="false"),
                         {"risk": (["1e-07"], "file"), "seed": (["6"], "environment"), "threads": (["1"], "file"),
                          "digits": (["11"], "typed"), "strike_held": ([], "environment")})
        self.assertEqual(self.options(STANCHION_CONFIG=str(self.config))["seed"], (["5"], "file"))
        self.assertEqual(self.options(), {})
        run = self.run_with("check", self.stiffness, "--json", "-", *given)
        self.assertEqual(json.loads(run.stdout)["risk_allowed"], 1e-7)

    def test_the_usual_place(self):
        place = self.folder / "home/stanchion/config.json"
        place.parent.mkdir(parents=True)
        place.write_text('{"check": {"seed": 9}}', encoding="utf-8")
        self.assertEqual(self.options(XDG_CONFIG_HOME=str(self.folder / "home")), {"seed": (["9"], "file")})

    def test_what_is_wrong_is_named(self):
        for text, kind in (("{", "bad-json"), ("[]", "bad-config"), ('{"solve": {}}', "bad-config"),
                           ('{"check": {"sed": 1}}', "bad-config"), ('{"check": {"port": 1}}', "bad-config"),
                           ('{"check": {"dofs": "d.csv"}}', "bad-config"), ('{"check": {"seed": [1]}}', "bad-config"),
                           ('{"check": {"quiet": "yes"}}', "bad-config"), ('{"check": {"seed": "x"}}', "bad-number"),
                           ('{"check": {"seed": 1, "seed": 2}}', "bad-json")):
            self.config.write_text(text, encoding="utf-8")
            run = self.run_with("check", self.stiffness, "--config", self.config)
            self.assertEqual((run.returncode, run.stdout), (2, ""), text)
            self.assertRegex(run.stderr, rf"\[{kind}\]\n  remedy: ")
        self.assertEqual(self.run_with("check", self.stiffness, "--config", "none.json").returncode, 2)
        self.assertIn("bad-number", self.run_with("check", self.stiffness, STANCHION_SEED="x").stderr)

    def test_a_child_takes_everything_from_its_runner(self):
        run = self.run_with("check", self.stiffness, "--progress-fd", "9", "--json", "-", STANCHION_SEED="77")
        self.assertEqual(json.loads(run.stdout)["seed"], 1)


class DescribeTest(ProgramTest):
    def describe(self, what):
        run = self.run_program("describe", what)
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        return run.stdout

    def complete(self, *words):
        script = self.folder / "completion"
        script.write_text(self.describe("bash"), encoding="utf-8")
        line = " ".join(f"'{word}'" for word in ("stanchion", *words))
        run = subprocess.run(["bash", "--norc", "-c", f"source {script}; COMP_WORDS=({line}); "
                              f"COMP_CWORD={len(words)}; _stanchion 2>/dev/null; printf '%s\\n' \"${{COMPREPLY[@]}}\""],
                             capture_output=True, text=True, cwd=self.folder, check=False)
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        return run.stdout.split()

    def test_completion_in_bash(self):
        self.matrix("Kbridge.mtx", 2, chain(2))
        self.assertEqual(self.complete("ch"), ["check"])
        self.assertEqual(self.complete("check", "--mem"), ["--memory-cap"])
        self.assertEqual(self.complete("check", "--precision", "e"), ["extended"])
        self.assertEqual(self.complete("check", "Kb"), ["Kbridge.mtx"])
        self.assertEqual(self.complete("check", "--dofs", "Kb"), ["Kbridge.mtx"])
        self.assertEqual(self.complete("check", "--find"), [])
        self.assertEqual(self.complete("audit", "--find"), ["--find-missing"])
        for command in self.describe("commands").split():
            listed = self.complete(command, "--")
            for option in self.run_program(command, "--help").stdout.split():
                if option.startswith("--") and option.rstrip(",") in listed:
                    listed.remove(option.rstrip(","))
            self.assertEqual([option for option in listed if option != "--help"], [], command)

    def test_other_shells_read_theirs(self):
        for shell, check in (("zsh", ["zsh", "-n"]), ("fish", ["fish", "--no-execute"])):
            script = self.folder / shell
            script.write_text(self.describe(shell), encoding="utf-8")
            self.assertIn("--memory-cap" if shell == "zsh" else "-l memory-cap", script.read_text(encoding="utf-8"))
            if shutil.which(shell):
                run = subprocess.run([*check, str(script)], capture_output=True, text=True, check=False)
                self.assertEqual((run.returncode, run.stderr), (0, ""))

    def test_pages_for_man(self):
        pages = ["man"] + [f"man-{name}" for name in self.describe("commands").split()]
        for page in pages:
            text = self.describe(page)
            self.assertTrue(text.startswith(".TH STANCHION"))
            if shutil.which("mandoc"):
                run = subprocess.run(["mandoc", "-T", "lint", "-W", "warning"], input=text, capture_output=True,
                                     text=True, check=False)
                problems = [line for line in run.stdout.splitlines() if "missing date" not in line]
                self.assertEqual(problems, [], page)
        self.assertIn(r"\-\-memory\-cap", self.describe("man-check"))

    def test_the_build_tells_of_itself(self):
        self.assertRegex(self.describe("build"), r"^stanchion \d+\.\d+\.\d+\n(optimized|debug) build by (gcc|clang) \d")
        self.expect_failure(2, "bad-word", "describe", "nothing")


if __name__ == "__main__":
    unittest.main()
