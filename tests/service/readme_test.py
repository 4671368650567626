"""What README.md and the help tell users to type is typed here, but for the port and a job's id."""

import json
import re
import shlex
import shutil
import subprocess
import unittest

from client import PROGRAM, SOURCE, ServiceTest, check_answer


def commands_of(block):
    """The commands of a block; one goes on over lines until its quotes close."""
    commands, open_lines = [], ""
    for line in block.splitlines():
        open_lines += line + "\n"
        try:
            words = shlex.split(open_lines, comments=True)
        except ValueError:
            continue
        if words and not open_lines.rstrip().endswith("\\"):
            commands.append(open_lines)
        if not open_lines.rstrip().endswith("\\"):
            open_lines = ""
    return commands


@unittest.skipUnless(shutil.which("curl"), "curl is not installed")
class ReadmeTest(ServiceTest):
    def setUp(self):
        super().setUp()
        for name in ("K.mtx", "G.mtx"):
            shutil.copy(SOURCE / "data/demo" / name, self.models / name)

    def type(self, command, service, seconds=60):
        """The status and the body of what a command of curl gets."""
        self.assertIn("http://127.0.0.1:8420/", command)
        here = command.replace("127.0.0.1:8420", f"127.0.0.1:{service.port}")
        run = subprocess.run(["bash", "-c", here.replace("curl ", f"timeout {seconds} curl -s -S -i ", 1)],
                             capture_output=True, text=True, cwd=self.models, check=False)
        self.assertIn(run.returncode, (0, 124), command + run.stderr)
        head, _, body = run.stdout.partition("\n\n")
        return int(head.split()[1]), head, body

    def test_every_line_of_the_readme(self):
        text = (SOURCE / "README.md").read_text(encoding="utf-8")
        section = text.split("\n## As a service\n")[1].split("\n## ")[0]
        start, block, unit = re.findall(r"```\n(.*?)```", section, re.DOTALL)
        proposed = (SOURCE / "data/systemd/stanchion.service").read_text(encoding="utf-8")
        typed = re.findall(r"# ([A-Z]\w+=.+)", unit)
        self.assertEqual(len(typed), 2)
        for line in typed:
            self.assertIn("#" + line + "\n", proposed)
        self.assertEqual(start, "stanchion serve --root models=/srv/models\n")
        service = self.serve()
        submit, ask, result, events, upload = commands_of(block)
        status, _, body = self.type(submit, service)
        self.assertEqual(status, 202)
        job = json.loads(body)["id"]
        self.assertEqual(service.wait(job)["exit_code"], 0)
        for command in (ask, result):
            status, head, body = self.type(command.replace("/ID", "/" + job), service)
            path = re.search(r"8420(\S+)", command)[1].replace("/ID", "/" + job)
            check_answer("GET", path, status, re.search(r"content-type: (\S+)", head, re.IGNORECASE)[1], body)
            self.assertEqual(status, 200)
        # Counts of data/demo/expected.json, whose sources data/demo/README.md names.
        self.assertEqual([count["below"] for count in json.loads(body)["counts"]], [0, 0])
        # The other files that the line names are files a job can have.
        for name in re.search(r"also (.*)", result)[1].split(", "):
            answer = service.ask("GET", f"/v1/jobs/{job}/{name.split()[0]}")
            self.assertIn((answer.status, answer.headers["Content-Type"] == "application/problem+json"),
                          ((200, False), (404, True)), name)
            if answer.status == 404:
                self.assertEqual(answer.json()["code"], "no-such-file", name)
        status, head, body = self.type(events, service, seconds=2)
        self.assertEqual((status, body.splitlines()[0]), (200, ": begin"))
        status, _, body = self.type(upload, service)
        self.assertEqual(status, 201)
        named = service.submit({"command": "check", "inputs": {"stiffness": "sha256:" + json.loads(body)["digest"]}})
        self.assertEqual(service.wait(named["id"])["exit_code"], 0)

    def test_the_example_of_the_help(self):
        text = subprocess.run([PROGRAM, "serve", "--help"], capture_output=True, text=True, check=True).stdout
        example = [command for command in commands_of(text.split("Example:\n")[1]) if command.lstrip().startswith("curl")]
        service = self.serve()
        self.assertEqual([self.type(command.lstrip(), service)[0] for command in example], [202])


if __name__ == "__main__":
    unittest.main()
