"""--html, --csv, --junit, --vtu, --view: well formed, alone, and saying what the JSON says."""

import csv
import html.parser
import importlib
import shutil
import struct
import subprocess
import unittest
import xml.etree.ElementTree

from program import ProgramTest, read_json

VOID = {"meta", "br", "wbr", "hr", "img", "input", "link", "path", "circle", "rect"}


class Outline(html.parser.HTMLParser):
    """Fails on tags that do not nest; collects text and attributes."""

    def __init__(self):
        super().__init__(convert_charrefs=True)
        self.open, self.text, self.attributes = [], [], []

    def handle_starttag(self, tag, attrs):
        self.attributes += attrs
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag, attrs):
        self.attributes += attrs

    def handle_endtag(self, tag):
        if tag in VOID:
            return
        assert self.open and self.open[-1] == tag, f"</{tag}> closes {self.open[-3:]}"
        self.open.pop()

    def handle_data(self, data):
        self.text.append(data)


def outline(path):
    page = Outline()
    page.feed(path.read_text(encoding="utf-8"))
    page.close()
    assert page.open == [], page.open
    return page


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

    def located(self, name="frame", fault="loose-part", code=1):
        folder = self.folder / "model"
        run = self.run_program("specimen", name, "--unknowns", 900, "--fault", fault, "--out", folder, "--quiet")
        self.assertEqual(run.returncode, 0, run.stderr)
        files = {kind: self.folder / f"answer.{kind}" for kind in ("html", "csv", "xml", "vtu", "view")}
        document = self.expect(code, "locate", folder / "K.mtx", "--dofs", folder / "dofs.csv", "--nodes",
                               folder / "nodes.csv", "--html", files["html"], "--csv", files["csv"], "--junit",
                               files["xml"], "--vtu", files["vtu"], "--view", files["view"], "--title", "Store & yard", "--reference", "sheet <14>")
        return document, files

    def test_html(self):
        document, files = self.located()
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

    def test_csv_says_what_the_json_says(self):
        document, files = self.located()
        with open(files["csv"], newline="", encoding="utf-8") as file:
            rows = list(csv.DictReader(file))
        value = {(row["table"], row["item"], row["quantity"]): row["value"] for row in rows}
        self.assertEqual(value["check", "K", "verdict"], document["verdict"])
        for number, direction in enumerate(document["directions"], 1):
            self.assertEqual(value["directions", str(number), "kind"], direction["kind"])
            self.assertEqual(float(value["directions", str(number), "energy"]), direction["energy"])
            shares = [row for row in rows if row["table"] == "shares" and row["item"] == str(number)]
            self.assertEqual([float(row["value"]) for row in shares], [node["share"] for node in direction["nodes"]])

    def test_junit(self):
        document, files = self.located()
        suite = xml.etree.ElementTree.parse(files["xml"]).getroot().find("testsuite")
        cases = suite.findall("testcase")
        self.assertEqual(int(suite.get("tests")), len(cases))
        self.assertEqual(len(cases), 1 + len(document["directions"]))
        self.assertEqual(int(suite.get("failures")), len(suite.findall("testcase/failure")))
        self.assertEqual(len(suite.findall("testcase/failure")), len(cases))
        self.assertEqual(suite.get("name"), "Store & yard")

    def test_vtu_is_read_by_another_reader(self):
        document, files = self.located()
        piece = xml.etree.ElementTree.parse(files["vtu"]).getroot().find("UnstructuredGrid/Piece")
        points, cells = int(piece.get("NumberOfPoints")), int(piece.get("NumberOfCells"))
        arrays = {array.get("Name"): array.text.split() for array in piece.iter("DataArray")}
        self.assertEqual(len(arrays["node"]), points)
        self.assertEqual(len(arrays["motion_1"]), 3 * points)
        self.assertEqual(len(arrays["types"]), cells)
        self.assertEqual(int(arrays["offsets"][-1]), len(arrays["connectivity"]))
        self.assertLess(max(map(int, arrays["connectivity"])), points)
        moving = sum(any(abs(float(v)) > 0 for v in arrays["motion_1"][3 * k:3 * k + 3]) for k in range(points))
        self.assertEqual(moving, document["directions"][0]["moving_nodes"])
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

    def test_every_command_has_a_page(self):
        folder = self.folder / "plate"
        self.run_program("specimen", "plate", "--unknowns", 600, "--out", folder, "--quiet")
        for arguments in (["check"], ["forecast"], ["count", "--geometric", folder / "G.mtx", "--at", "1,2,-1"]):
            page, table, suite = (self.folder / f"{arguments[0]}.{kind}" for kind in ("html", "csv", "xml"))
            self.expect(0, arguments[0], folder / "K.mtx", *arguments[1:], "--html", page, "--csv", table, "--junit", suite)
            self.validate(page)
            self.assertIn("Not checked", " ".join(outline(page).text))
            xml.etree.ElementTree.parse(suite)
            self.assertTrue(table.read_text(encoding="utf-8").startswith("table,item,quantity,value\n"))

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
