"""What whoever runs the service meets: its log, its configuration, its unit."""

import configparser
import json
import os
import re
import shutil
import subprocess
import unittest

from client import PROGRAM, SOURCE, Service, ServiceTest, chain_text

CHECK = {"command": "check", "inputs": {"stiffness": "models/K.mtx"}}
TIME = re.compile(r"\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\.\d{3}Z")


class LogTest(ServiceTest):
    def setUp(self):
        super().setUp()
        (self.models / "K.mtx").write_text(chain_text(6))
        (self.models / "bad.mtx").write_text("no matrix\n")

    def records(self, path):
        records = [json.loads(line) for line in path.read_text(encoding="utf-8").splitlines()]
        for record in records:
            self.assertLessEqual({"time", "level", "event", "message"}, set(record))
            self.assertRegex(record["time"], TIME)
            self.assertIn(record["level"], ("info", "warning", "error"))
        return records

    def test_each_line_is_an_object_with_the_job(self):
        service = self.serve("--log-format", "json")
        good = service.submit({**CHECK, "options": {"title": 'a "title"\nof two lines'}})["id"]
        bad = service.submit({"command": "check", "inputs": {"stiffness": "models/bad.mtx"}})["id"]
        service.wait(good)
        service.wait(bad)
        self.assertEqual(service.stop(), 0)
        records = self.records(service.log)
        self.assertEqual([record["event"] for record in records if record.get("job") == good], ["job-started", "job-ended"])
        ended = {record["job"]: record for record in records if record["event"] == "job-ended"}
        self.assertEqual((ended[good]["level"], ended[good]["message"]), ("info", "done, exit code 0"))
        self.assertEqual(ended[bad]["level"], "warning")
        self.assertEqual([records[0]["event"], records[-2]["event"], records[-1]["event"]],
                         ["listening", "ending", "ended"])
        # What the next run says comes behind it.
        self.assertEqual(self.serve("--log-format", "json").stop(), 0)
        self.assertEqual(self.records(service.log)[:len(records)], records)

    def test_old_files_make_room(self):
        service = self.serve("--log-format", "json", "--log-size", "3k", "--log-files", "2")
        for job in [service.submit(CHECK)["id"] for _ in range(40)]:
            service.wait(job)
        self.assertEqual(service.stop(), 0)
        files = sorted(path.name for path in self.folder.glob("service*.log"))
        self.assertEqual(files, ["service.1.log", "service.2.log", "service.log"])
        for name in files:
            self.assertLessEqual((self.folder / name).stat().st_size, 3 << 10)
            self.assertTrue(self.records(self.folder / name))

    def test_words_that_are_refused(self):
        for option, value in (("--log-format", "xml"), ("--log-size", "x"), ("--log-files", "-1"), ("--heartbeat", "0")):
            run = subprocess.run([PROGRAM, "serve", "--store", self.store, "--log", self.folder / "l", option, value],
                                 capture_output=True, text=True, timeout=60, check=False)
            self.assertEqual((run.returncode, run.stdout), (2, ""), run.stderr)


class ConfigurationTest(ServiceTest):
    def setUp(self):
        super().setUp()
        self.tokens = self.folder / "tokens"
        self.tokens.write_text("admin " + "a" * 32 + "\n")
        self.tokens.chmod(0o600)
        self.config = self.folder / "config.json"
        self.config.write_text(json.dumps({"serve": {
            "log": str(self.folder / "from-file.log"), "log_format": "json", "log_size": "1M", "log_files": 3,
            "token_file": str(self.tokens), "root": [f"models={self.models}"], "processors": 1}}), encoding="utf-8")

    def shown(self, *options, **variables):
        run = subprocess.run([PROGRAM, "serve", "--config", self.config, "--print-config", *options], text=True,
                             capture_output=True, timeout=60, env={**os.environ, **variables}, check=False)
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        return {key: (option["value"], option["from"].split()[0])
                for key, option in json.loads(run.stdout)["options"].items()}

    def test_the_log_and_the_tokens_are_configured_like_the_rest(self):
        shown = self.shown("--log-files", "5", STANCHION_LOG_SIZE="2M")
        self.assertEqual(shown, {
            "log": ([str(self.folder / "from-file.log")], "file"), "log_format": (["json"], "file"),
            "log_size": (["2M"], "environment"), "log_files": (["5"], "typed"), "processors": (["1"], "file"),
            "token_file": ([str(self.tokens)], "file"), "root": ([f"models={self.models}"], "file")})

    def test_what_is_configured_holds(self):
        # The log that the tests name is typed, and so wins over the file's.
        service = Service(self.store, "--config", self.config)
        self.addCleanup(lambda: service.process.poll() is None and service.kill())
        self.assertEqual(service.ask("GET", "/v1/jobs").status, 401)
        self.assertEqual(service.ask("GET", "/v1/service", headers={"Authorization": "Bearer " + "a" * 32}).json()["roots"],
                         ["models"])
        self.assertEqual(service.stop(), 0)
        self.assertEqual(json.loads(service.log.read_text().splitlines()[0])["event"], "listening")
        self.assertFalse((self.folder / "from-file.log").exists())
        named = Service(self.store, "--config", self.config, log=self.folder / "from-environment.log",
                        environment={"STANCHION_LOG": str(self.folder / "from-environment.log")}, type_log=False)
        self.assertEqual(named.stop(), 0)
        self.assertTrue(named.log.exists())
        self.assertFalse((self.folder / "from-file.log").exists())


class UnitTest(unittest.TestCase):
    UNIT = SOURCE / "data/systemd/stanchion.service"

    def test_its_options_are_the_programs(self):
        parser = configparser.ConfigParser(strict=False, interpolation=None)
        parser.optionxform = str
        parser.read(self.UNIT)
        program, *words = parser["Service"]["ExecStart"].split()
        self.assertEqual((program, words[0]), ("/usr/bin/stanchion", "serve"))
        run = subprocess.run([PROGRAM, *words, "--print-config"], capture_output=True, text=True, timeout=60, check=False)
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        self.assertEqual(parser["Service"]["DynamicUser"], "yes")

    def test_it_is_verified_and_shuts_the_service_in(self):
        analyze = shutil.which("systemd-analyze")
        if not analyze:
            self.skipTest("systemd-analyze is not installed")
        import tempfile
        with tempfile.TemporaryDirectory() as folder:
            copy = f"{folder}/stanchion.service"
            with open(copy, "w", encoding="utf-8") as file:
                text = self.UNIT.read_text(encoding="utf-8").replace("/usr/bin/stanchion", PROGRAM)
                # With what it only proposes, too.
                file.write(re.sub(r"^#(?=[A-Z][A-Za-z]+=)", "", text, flags=re.MULTILINE))
            run = subprocess.run([analyze, "verify", "--man=no", copy], capture_output=True, text=True, timeout=60, check=False)
            self.assertEqual((run.returncode, run.stdout + run.stderr), (0, ""))
            # systemd's own measure of exposure from 0 to 10; below 2 it says "OK".
            run = subprocess.run([analyze, "security", "--offline=true", "--threshold=15", copy], capture_output=True, text=True,
                                 timeout=60, check=False)
            self.assertEqual(run.returncode, 0, run.stdout[-400:])


if __name__ == "__main__":
    unittest.main()
