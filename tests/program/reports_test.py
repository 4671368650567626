"""--html, --csv, --junit, --vtu, --view: well formed, alone, and saying what the JSON says."""

import csv
import importlib
import re
import shutil
import struct
import subprocess
import unittest
import xml.etree.ElementTree

from page_outline import outline
from program import ProgramTest, read_json
from spoiled import push_along

NUMBER = re.compile(r"\d+(?:[.,]\d+)*(?:e[+-]?\d+)?")


def lead_of(page):
    """What a page says before anything else: title, verdict, what backs it."""
    return " ".join(" ".join(page.text[:page.text.index("Question")]).split())


def disagreement(document, lead):
    """The sentences of the document that the lead lacks, and the numbers that are the lead's own."""
    sentences = document["in_words"]
    known = set(NUMBER.findall(" ".join(sentences))) | {document["program"]["version"]}
    return [sentence for sentence in sentences if sentence not in lead] + sorted(set(NUMBER.findall(lead)) - known)


def with_one_digit_changed(lead):
    """Every text that differs from the lead in one digit."""
    for match in re.finditer(r"\d", lead):
        yield lead[:match.start()] + str((int(match.group()) + 1) % 10) + lead[match.end():]


def numpy_single(text):
    """The single precision number that `text` stands for, as a reader of Float32 arrays gives it."""
    return struct.unpack("f", struct.pack("f", float(text)))[0]


class ReportsTest(ProgramTest):
    def validate(self, page):
        """By an HTML5 parser that tolerates no error, and by HTML Tidy, where they are there."""
        try:
            html5lib = importlib.import_module("html5lib")  # python3-html5lib
            html5lib.HTMLParser(strict=True).parse(page.read_bytes())
        except ImportError:
            pass
        if shutil.which("tidy"):
            run = subprocess.run(["tidy", "-quiet", "-errors", "--drop-empty-elements", "no", str(page)],
                                 capture_output=True, text=True, check=False)
            self.assertEqual((run.returncode, run.stderr.strip()), (0, ""))

    def located(self, name="frame", fault="loose-part", code=1, pushed=False):
        folder = self.folder / "model"
        run = self.run_program("specimen", name, "--unknowns", 900, "--fault", fault, "--out", folder, "--quiet")
        self.assertEqual(run.returncode, 0, run.stderr)
        if pushed:
            push_along(folder / "K.mtx", folder / "K.mtx")
        files = {kind: self.folder / f"answer.{kind}" for kind in ("html", "csv", "xml", "vtu", "view")}
        document = self.expect(code, "locate", folder / "K.mtx", "--dofs", folder / "dofs.csv", "--nodes",
                               folder / "nodes.csv", "--html", files["html"], "--csv", files["csv"], "--junit",
                               files["xml"], "--vtu", files["vtu"], "--view", files["view"], "--title", "Store & yard", "--reference", "sheet <14>")
        return document, files

    def two_causes(self):
        """A frame with a part that hangs on nothing, and a spring at one node that pushes along."""
        document, files = self.located(pushed=True)
        self.assertEqual([direction["kind"] for direction in document["directions"]], ["negative_spring", "loose_part"])
        return document, files

    def test_html(self):
        document, files = self.two_causes()
        self.validate(files["html"])
        page = outline(files["html"])
        text = " ".join(page.text)
        for direction in document["directions"]:
            self.assertIn(direction["explanation"], text)
            self.assertIn(direction["remedy"], text)
        for record in document["inputs"].values():
            if record:
                self.assertIn(record["sha256"], text)
        for sentence in document["not_checked"]:
            self.assertIn(sentence, text)
        self.assertIn("Store & yard", text)
        self.assertIn("sheet <14>", text)
        # Nothing is loaded: no attribute of the page names a place elsewhere.
        for name, value in page.attributes:
            self.assertNotIn(name, ("src", "href", "xlink:href"))
        causes = text[text.index("Where and why"):text.index("Answer")]
        self.assertNotIn("pivot", causes)
        self.assertEqual(page.headings, ["Question", "Where and why", "Answer", "Local accuracy", "Connected parts", "Warnings",
                                         "Inputs, work, time", "Not checked"])
        self.assertEqual(page.tags.count("figure"), 1 + len(document["directions"]))
        self.assertEqual(page.tags.count("figcaption"), page.tags.count("figure"))

    def rows_of(self, path):
        with open(path, newline="", encoding="utf-8") as file:
            return list(csv.DictReader(file))

    def test_csv_says_what_the_json_says(self):
        document, files = self.two_causes()
        rows = self.rows_of(files["csv"])
        value = {(row["table"], row["item"], row["quantity"]): row["value"] for row in rows}
        self.assertEqual(value["check", "K", "verdict"], document["verdict"])
        for number, direction in enumerate(document["directions"], 1):
            self.assertEqual(value["directions", str(number), "kind"], direction["kind"])
            self.assertEqual(float(value["directions", str(number), "energy"]), direction["energy"])
            shares = [row for row in rows if row["table"] == "shares" and row["item"] == str(number)]
            self.assertEqual([float(row["value"]) for row in shares], [node["share"] for node in direction["nodes"]])
        self.assertEqual(len([key for key in value if key[0] == "directions" and key[2] == "kind"]), len(document["directions"]))
        for spot in document["local_accuracy"]["histogram"]:
            self.assertIn({"table": "accuracy", "item": "histogram", "quantity": f"{spot['from']:g}", "value": str(spot["equations"])}, rows)

    def test_junit(self):
        document, files = self.two_causes()
        suite = xml.etree.ElementTree.parse(files["xml"]).getroot().find("testsuite")
        cases = suite.findall("testcase")
        self.assertEqual(int(suite.get("tests")), len(cases))
        self.assertEqual(len(cases), 1 + len(document["directions"]))
        for case, direction in zip(cases[1:], document["directions"]):
            self.assertIn(direction["explanation"], case.find("failure").get("message"))
        self.assertEqual(int(suite.get("failures")), len(suite.findall("testcase/failure")))
        self.assertEqual(len(suite.findall("testcase/failure")), len(cases))
        self.assertEqual(suite.get("name"), "Store & yard")

    def test_vtu_is_read_by_another_reader(self):
        document, files = self.two_causes()
        piece = xml.etree.ElementTree.parse(files["vtu"]).getroot().find("UnstructuredGrid/Piece")
        points, cells = int(piece.get("NumberOfPoints")), int(piece.get("NumberOfCells"))
        arrays = {array.get("Name"): array.text.split() for array in piece.iter("DataArray")}
        motions = [f"motion_{k}" for k in range(1, 1 + len(document["directions"]))]
        self.assertEqual([array.get("Name") for array in piece.iterfind("PointData/DataArray")], ["node", "component", "digits_lost", *motions])
        for name in ("node", "component", "digits_lost"):
            self.assertEqual(len(arrays[name]), points, name)
        for name, direction in zip(motions, document["directions"]):
            self.assertEqual(len(arrays[name]), 3 * points)
            moving = sum(any(abs(float(v)) > 0 for v in arrays[name][3 * k:3 * k + 3]) for k in range(points))
            if direction["kind"] == "loose_part":
                self.assertEqual(moving, direction["moving_nodes"])
            self.assertGreater(moving, 0)
        # Vertices have one point and lines two, which differ; the offsets are where each ends.
        ends, sizes = 0, {"1": 1, "3": 2}
        for kind, offset in zip(arrays["types"], arrays["offsets"]):
            cell = arrays["connectivity"][ends:int(offset)]
            ends += sizes[kind]
            self.assertEqual((int(offset), len(set(cell))), (ends, sizes[kind]))
        self.assertEqual((len(arrays["types"]), len(arrays["offsets"]), ends), (cells, cells, len(arrays["connectivity"])))
        self.assertEqual(set(map(int, arrays["connectivity"])), set(range(points)))
        # Places are those of the node file.
        with open(self.folder / "model" / "nodes.csv", newline="", encoding="utf-8") as file:
            place = {row["node"]: [float(row[axis]) for axis in "xyz"] for row in csv.DictReader(file)}
        given = [float(value) for value in piece.find("Points/DataArray").text.split()]
        for k, node in enumerate(arrays["node"]):
            self.assertEqual(given[3 * k:3 * k + 3], place[node], node)
        worst = document["local_accuracy"]["worst"][0]
        self.assertAlmostEqual(float(arrays["digits_lost"][arrays["node"].index(str(worst["node"]))]), worst["digits"], places=4)
        self.read_with_meshio(files["vtu"], arrays)
        self.read_with_vtk(files["vtu"], points, cells, arrays)

    def read_with_meshio(self, path, arrays):
        try:
            meshio = importlib.import_module("meshio")  # python3-meshio
        except ImportError:
            return
        grid = meshio.read(path)
        self.assertEqual([str(number) for number in grid.point_data["node"]], arrays["node"])
        self.assertEqual(grid.point_data["motion_1"].shape, (len(grid.points), 3))
        self.assertEqual(grid.point_data["motion_1"].ravel().tolist(), [float(numpy_single(v)) for v in arrays["motion_1"]])
        self.assertEqual(sum(len(block.data) for block in grid.cells), len(arrays["types"]))
        self.assertEqual({block.type for block in grid.cells} - {"line", "vertex"}, set())

    def read_with_vtk(self, path, points, cells, arrays):
        try:
            vtk = importlib.import_module("vtk")  # python3-vtk9: some hundred megabytes with what it needs
        except ImportError:
            return
        reader = vtk.vtkXMLUnstructuredGridReader()
        reader.SetFileName(str(path))
        reader.Update()
        grid = reader.GetOutput()
        self.assertEqual((grid.GetNumberOfPoints(), grid.GetNumberOfCells()), (points, cells))
        self.assertEqual(grid.GetPointData().GetArray("motion_1").GetNumberOfComponents(), 3)
        self.assertEqual(grid.GetPointData().GetArray("node").GetValue(points - 1), int(arrays["node"][-1]))

    def test_view_says_what_the_grid_says(self):
        document, files = self.located()
        view = read_json(files["view"].read_text(encoding="utf-8"), "view-1")
        piece = xml.etree.ElementTree.parse(files["vtu"]).getroot().find("UnstructuredGrid/Piece")
        arrays = {array.get("Name"): array.text.split() for array in piece.iter("DataArray")}
        self.assertIsNone(view["cell"], "few nodes: all are there")
        self.assertEqual([str(node) for node in view["node"]], arrays["node"])
        points = [float(value) for value in piece.find("Points/DataArray").text.split()]
        for k, place in enumerate(view["place"]):
            self.assertAlmostEqual(place + view["centre"][k % 3], points[k], delta=1e-5 * view["size"])
        self.assertEqual(len(view["motions"]), len(document["directions"]))
        motion = view["motions"][0]
        self.assertEqual(len(motion["nodes"]), document["directions"][0]["moving_nodes"])
        self.assertEqual(len(motion["moved"]), 3 * len(motion["nodes"]))
        self.assertEqual(view["node"][motion["marks"][0]], document["directions"][0]["nodes"][0]["node"])

    def answered(self, code, *arguments):
        """The JSON of a command, its page, the rows of its table, the cases of its suite."""
        page, table, suite = (self.folder / f"{arguments[0]}.{kind}" for kind in ("html", "csv", "xml"))
        document = self.expect(code, *arguments, "--html", page, "--csv", table, "--junit", suite)
        self.validate(page)
        cases = xml.etree.ElementTree.parse(suite).getroot().findall("testsuite/testcase")
        return document, outline(page), [tuple(row.values()) for row in self.rows_of(table)], cases

    def test_every_command_says_the_same_everywhere(self):
        folder = self.folder / "plate"
        self.run_program("specimen", "plate", "--unknowns", 600, "--out", folder, "--quiet")
        stiffness, pencil = folder / "K.mtx", [folder / "K.mtx", "--geometric", folder / "G.mtx"]
        found = self.expect(0, "bracket", *pencil, "--first", 3)["critical"]
        incomplete = self.folder / "list.csv"
        incomplete.write_text("".join(f"{entry['value']!r}\n" for entry in (found[0], found[2])), encoding="ascii")
        buckled = self.folder / "buckled.mtx"
        push_along(stiffness, buckled)
        of_count = {"below": "below", "level": "level"}
        of_value = {"value": "value", "low": "low", "high": "high", "multiplicity": "multiplicity", "level": "level"}
        for code, arguments, key, table, columns in (
                (0, ["check", stiffness], None, None, None),
                (0, ["forecast", stiffness], None, None, None),
                (0, ["count", *pencil, "--at", "1,2,-1,4"], "counts", "counts", of_count),
                (0, ["sweep", *pencil, "--from", 0, "--to", 8, "--points", 5], "jumps", "jumps", {"low": "low", "high": "high", "count": "count"}),
                (0, ["bracket", *pencil, "--first", 3], "critical", "critical", of_value),
                (1, ["audit", *pencil, "--values", incomplete, "--find-missing"], "gaps", "gaps",
                 {"low": "low", "high": "high", "listed": "listed", "counted": "counted"}),
                (1, ["audit", *pencil, "--values", incomplete, "--find-missing"], "missing", "missing", of_value),
                (1, ["check", stiffness, buckled], "steps", "steps", {"verdict": "verdict", "path": "path"})):
            with self.subTest(command=arguments[0], table=table):
                document, page, rows, cases = self.answered(code, *arguments)
                here = str(self.folder)  # where the files happen to lie
                document["in_words"] = [sentence.replace(here, "") for sentence in document["in_words"]]
                lead = lead_of(page).replace(here, "")
                self.assertEqual(disagreement(document, lead), [], lead)
                for changed in with_one_digit_changed(lead):
                    self.assertNotEqual(disagreement(document, changed), [], changed)
                self.assertEqual(page.headings[:1] + page.headings[-2:], ["Question", "Inputs, work, time", "Not checked"])
                self.assertEqual(cases[0].get("name"), f"{arguments[0]} answers well")
                self.assertEqual(cases[0].find("failure") is None, code == 0)
                if key is None:
                    continue
                self.assertTrue(document[key])
                entries = document[key]
                names = [f"{entry['shift']:g}" for entry in entries] if key == "counts" else [str(k + 1) for k in range(len(entries))]
                expected = {(table, name, quantity, str(entry[member])) for name, entry in zip(names, entries) for quantity, member in columns.items()}
                written = {row for row in rows if row[0] == table and row[2] in columns}
                same = lambda row: (*row[:3], float(row[3]) if row[2] not in ("verdict", "level", "path") else row[3])
                self.assertEqual(set(map(same, written)), set(map(same, expected)))
                if key in ("counts", "gaps", "steps"):
                    self.assertEqual(len(cases), 1 + len(entries))

    def test_no_grid_without_places(self):
        folder = self.folder / "solid"
        self.run_program("specimen", "solid", "--unknowns", 600, "--out", folder, "--quiet")
        grid = self.folder / "grid.vtu"
        document = self.expect(0, "locate", folder / "K.mtx", "--vtu", grid)
        self.assertIn("no-grid", [warning["code"] for warning in document["warnings"]])
        self.assertFalse(grid.exists())
        document = self.expect(0, "locate", folder / "K.mtx", "--view", grid)
        self.assertIn("no-grid", [warning["code"] for warning in document["warnings"]])
        self.assertFalse(grid.exists())
        self.expect_failure(2, "contradiction", "check", folder / "K.mtx", "--vtu", grid)
        self.expect_failure(2, "contradiction", "check", folder / "K.mtx", "--view", grid)
        self.expect_failure(2, "bad-argument", "check", folder / "K.mtx", "--html", "-")
        self.expect_failure(2, "contradiction", "check", folder / "K.mtx", "--html", grid, "--csv", grid)


if __name__ == "__main__":
    unittest.main()
