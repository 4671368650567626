"""One service with its roots and one browser before it, for tests of the page; what they share of reading and asking."""

import json
import os
import pathlib
import re
import shutil
import subprocess
import sys
import tempfile
import time
import unittest
import urllib.request

import browser
import real_service

PROGRAM = os.environ["STANCHION_PROGRAM"]
SOURCE = pathlib.Path(os.environ["STANCHION_SOURCE"])
LOOK = (pathlib.Path(__file__).parent / "accessibility.js").read_text(encoding="utf-8")
SKIPPED = 77


def quoted(text):
    return json.dumps(text)


def make_roots(folder):
    """A root with the shipped footbridge, and a frame whose part hangs loose."""
    root = folder / "models"
    shutil.copytree(SOURCE / "data/demo", root / "footbridge")
    subprocess.run([PROGRAM, "specimen", "frame", "--unknowns", "900", "--fault", "loose-part", "--out", str(root / "frame"), "--quiet"], check=True)
    (root / "footbridge/list.csv").write_text("value\n1.6164418908\n1.6185006117\n1.680585488\n", encoding="ascii")
    return root


class PageCase(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.folder = tempfile.TemporaryDirectory(prefix="page_test_")
        cls.root = make_roots(pathlib.Path(cls.folder.name))
        cls.service = real_service.RealService(PROGRAM, SOURCE, cls.root, pathlib.Path(cls.folder.name) / "store")
        cls.service.start()
        cls.browser = browser.Browser(browser.find_chromium())

    @classmethod
    def tearDownClass(cls):
        cls.browser.close()
        cls.service.stop()
        cls.folder.cleanup()

    def setUp(self):
        self.browser.events.clear()
        self.browser.size(1280, 900)
        self.browser.open(self.service.address + "/")
        self.browser.wait("document.querySelector('#connection').dataset.state === 'live'", what="live events")

    def tearDown(self):
        self.assertEqual([text for text in self.browser.complaints() if not re.search(self.may_fail, text)], [])
        asked = [event["params"]["request"]["url"] for event in self.browser.events if event["method"] == "Network.requestWillBeSent"]
        self.assertEqual([url for url in asked if not url.startswith((self.service.address, "http://127.0.0.1:", "blob:", "data:"))], [], "nothing is asked of anybody else")

    may_fail = r"^$"

    # What stands in the service, from outside of the browser.

    def api(self, path, body=None):
        request = urllib.request.Request(self.service.address + path, data=None if body is None else json.dumps(body).encode(),
                                         headers={} if body is None else {"Content-Type": "application/json"})
        with urllib.request.urlopen(request, timeout=60) as answer:
            return json.load(answer)

    def ask(self, command, inputs, options, **more):
        return self.api("/v1/jobs", {"command": command, "inputs": inputs, "options": options, **more})["id"]

    def finished(self, job):
        for _ in range(1200):
            record = self.api(f"/v1/jobs/{job}")
            if record["state"] not in ("queued", "running"):
                return record
            time.sleep(0.05)
        raise AssertionError(f"{job} does not end")

    def result(self, job):
        self.assertEqual(self.finished(job)["state"], "done")
        return self.api(f"/v1/jobs/{job}/result")

    def footbridge(self, **more):
        return {"stiffness": "models/footbridge/K.mtx", "dofs": "models/footbridge/dofs.csv", **more}

    def pencil(self):
        return self.footbridge(geometric="models/footbridge/G.mtx")

    def frame(self):
        return {"stiffness": "models/frame/K.mtx", "dofs": "models/frame/dofs.csv", "nodes": "models/frame/nodes.csv"}

    def open_job(self, job):
        self.browser.run(f"location.hash = {quoted(f'#/job/{job}')}")
        self.browser.wait(f"document.querySelector('#detail .band, #detail .problem') && document.querySelector('#detail').innerText.includes({quoted(job)})", 60, f"the view of {job}")

    def text(self, selector):
        return self.browser.run(f"document.querySelector({quoted(selector)}).innerText")

    def settle(self):
        self.browser.run("new Promise((go) => requestAnimationFrame(() => requestAnimationFrame(go)))")


def main():
    if browser.find_chromium() is None:
        print("skipped: there is no chromium on this machine")
        sys.exit(SKIPPED)
    unittest.main()
