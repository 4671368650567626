"""The stand-in answers in the shapes that data/openapi.json gives, so that what is tried on it holds for the service."""

import json
import os
import pathlib
import threading
import unittest
import urllib.error
import urllib.request

import jsonschema

import stand_in

SOURCE = pathlib.Path(os.environ["STANCHION_SOURCE"])


class StandInTest(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.server = stand_in.serve(0, SOURCE / "data/demo", 7)
        cls.address = f"http://127.0.0.1:{cls.server.server_address[1]}"
        threading.Thread(target=cls.server.serve_forever, daemon=True).start()
        cls.description = json.loads((SOURCE / "data/openapi.json").read_text(encoding="utf-8"))

    @classmethod
    def tearDownClass(cls):
        cls.server.shutdown()
        cls.server.server_close()

    def test_shapes(self):
        job = "j-00000003"
        for path, name in (("/v1/jobs?limit=3", "JobList"), (f"/v1/jobs/{job}", "Job"), ("/v1/files", "FileList"), ("/v1/files?path=demo", "FileList"), ("/v1/commands", "CommandList")):
            with self.subTest(path), urllib.request.urlopen(self.address + path, timeout=30) as answer:
                schema = {"$ref": f"#/components/schemas/{name}", "components": self.description["components"]}
                errors = jsonschema.Draft202012Validator(schema).iter_errors(json.load(answer))
                self.assertEqual([f"{list(error.absolute_path)}: {error.message[:200]}" for error in errors], [])

    def test_problems(self):
        with self.assertRaises(urllib.error.HTTPError) as caught:
            urllib.request.urlopen(f"{self.address}/v1/jobs/j-none", timeout=30)
        with caught.exception as answer:
            schema = {"$ref": "#/components/schemas/Problem", "components": self.description["components"]}
            jsonschema.Draft202012Validator(schema).validate(json.load(answer))


if __name__ == "__main__":
    unittest.main()
