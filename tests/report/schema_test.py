"""The sample documents obey the schema, and damaged ones do not. Usage: schema_test.py SAMPLES SCHEMA"""

import copy
import json
import subprocess
import sys
import unittest

import jsonschema

SAMPLES, SCHEMA = sys.argv[1:3]


def no_constant(text):
    raise ValueError(f"{text} is not JSON")


def read_samples():
    output = subprocess.run([SAMPLES], check=True, capture_output=True, text=True).stdout
    documents = {}
    for block in output.split("== ")[1:]:
        name, text = block.split("\n", 1)
        documents[name] = json.loads(text, parse_constant=no_constant)
    return documents


class SchemaTest(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        with open(SCHEMA, encoding="utf-8") as file:
            schema = json.load(file)
        jsonschema.Draft202012Validator.check_schema(schema)
        cls.validator = jsonschema.Draft202012Validator(schema)
        cls.documents = read_samples()

    def test_every_sample_is_valid(self):
        self.assertEqual(len(self.documents), 12)
        for name, document in self.documents.items():
            with self.subTest(name):
                self.assertEqual([error.message for error in self.validator.iter_errors(document)], [])

    def test_every_missing_key_is_noticed(self):
        for name, document in self.documents.items():
            for path in paths_of_keys(document):
                with self.subTest(name, path=path):
                    self.assertFalse(self.validator.is_valid(without(document, path)))

    def test_every_added_key_is_noticed(self):
        for name, document in self.documents.items():
            for path in {path[:-1] for path in paths_of_keys(document)}:
                damaged = copy.deepcopy(document)
                parent_of(damaged, path + ("x",))["surplus"] = 1
                with self.subTest(name, path=path):
                    self.assertFalse(self.validator.is_valid(damaged))

    def test_wrong_values_are_noticed(self):
        for path, value in [
            (("schema_version",), 2),
            (("verdict",), "stable"),
            (("inertia", "negative"), -1),
            (("inertia", "negative"), 1.5),
            (("certificate", "level"), "certain"),
            (("inputs", "stiffness", "sha256"), "abc"),
            (("not_checked",), []),
            (("risk",), 1.5),
            (("command",), "count"),
        ]:
            damaged = copy.deepcopy(self.documents["definite"])
            parent_of(damaged, path)[path[-1]] = value
            with self.subTest(path=path):
                self.assertFalse(self.validator.is_valid(damaged))


def paths_of_keys(node, path=()):
    if isinstance(node, dict):
        for key, value in node.items():
            yield path + (key,)
            yield from paths_of_keys(value, path + (key,))
    elif isinstance(node, list):
        for position, value in enumerate(node):
            yield from paths_of_keys(value, path + (position,))


def parent_of(document, path):
    node = document
    for step in path[:-1]:
        node = node[step]
    return node


def without(document, path):
    damaged = copy.deepcopy(document)
    del parent_of(damaged, path)[path[-1]]
    return damaged


if __name__ == "__main__":
    unittest.main(argv=sys.argv[:1])
