"""Report pages, one of each kind, as a browser shows and prints them: narrow and wide, light and dark, on paper;
STANCHION_PICTURES=FOLDER keeps pictures and PDF files. Skipped, with the reason, where there is no Chromium."""

import base64
import html
import os
import pathlib
import re
import shutil
import subprocess
import sys
import tempfile
import unittest

import browser
from spoiled import push_along

PROGRAM = os.environ["STANCHION_PROGRAM"]
SOURCE = pathlib.Path(os.environ["STANCHION_SOURCE"])
HERE = pathlib.Path(__file__).parent
SKIPPED = 77
LOOK = (HERE / "accessibility.js").read_text(encoding="utf-8")
DRAWINGS = (HERE / "drawings.js").read_text(encoding="utf-8")
LEAST_SIZE = 8  # pixels on the screen; common practice, no source
WIDTHS = ((360, 740), (768, 1024), (1280, 900), (1920, 1080))
# A page is read, not operated: nothing in it changes by itself.
NO_MATTER = ["no live region"]
# The corners of every drawing, named, so that they can be found again on paper.
CORNERS = """[...document.querySelectorAll("svg.view, svg.chart")].filter((one) => one.checkVisibility()).map((one, k) => {
  const { x, y, width, height } = one.viewBox.baseVal;
  for (const [name, at_x, at_y, anchor] of [["first", x + 1, y + 6, "start"], ["last", x + width - 1, y + height - 1, "end"]]) {
    const text = document.createElementNS(one.namespaceURI, "text");
    for (const [key, value] of Object.entries({ x: at_x, y: at_y, "text-anchor": anchor, style: "font-size: 5px" })) text.setAttribute(key, value);
    text.textContent = `${name}corner${k}end`;
    one.append(text);
  }
  return k;
}).length"""


def make_pages(folder):
    """One page of each kind of answer, by name; the answers themselves are tested elsewhere."""
    demo = SOURCE / "data/demo"
    subprocess.run([PROGRAM, "specimen", "frame", "--unknowns", "900", "--fault", "loose-part", "--out", folder / "frame", "--quiet"], check=True)
    push_along(folder / "frame/K.mtx", folder / "frame/pushed.mtx")
    push_along(demo / "K.mtx", folder / "pushed.mtx")
    (folder / "list.csv").write_text("value\n1.6164418908\n1.6185006117\n1.680585488\n", encoding="ascii")
    (folder / "damaged.mtx").write_text("%%MatrixMarket matrix coordinate real symmetric\n2 2 3\n1 1 2\n2 1 abc\n2 2 2\n", encoding="ascii")
    places = ["--dofs", demo / "dofs.csv", "--nodes", demo / "nodes.csv"]
    pencil = [demo / "K.mtx", "--geometric", demo / "G.mtx", "--dofs", demo / "dofs.csv"]
    asked = {"sound": (0, ["check", demo / "K.mtx", "--locate", *places]),
             "causes": (1, ["locate", folder / "frame/pushed.mtx", "--dofs", folder / "frame/dofs.csv", "--nodes", folder / "frame/nodes.csv", "--title", "Store & yard", "--reference", "sheet 14"]),
             "audit": (1, ["audit", *pencil, "--values", folder / "list.csv", "--find-missing"]), "bracket": (0, ["bracket", *pencil, "--first", "4"]),
             "path": (1, ["check", demo / "K.mtx", demo / "K.mtx", folder / "pushed.mtx"]), "count": (0, ["count", *pencil, "--at", "0.5,1.62,1.7,3,-3"]),
             "sweep": (0, ["sweep", *pencil, "--from", "0.5", "--to", "3", "--points", "11"]), "forecast": (0, ["forecast", demo / "K.mtx"]),
             "refused": (2, ["check", folder / "damaged.mtx", *places])}
    pages = {}
    for name, (code, arguments) in asked.items():
        pages[name] = folder / f"{name}.html"
        run = subprocess.run([PROGRAM, *map(str, arguments), "--html", pages[name], "--quiet"], check=False, stderr=subprocess.DEVNULL)
        assert run.returncode == code, (name, run.returncode)
    return pages


class ReportLookTest(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        folder = tempfile.TemporaryDirectory(prefix="report_look_")
        cls.addClassCleanup(folder.cleanup)
        cls.folder = pathlib.Path(folder.name)
        cls.pages = make_pages(cls.folder)
        cls.browser = browser.Browser(browser.find_chromium())
        cls.addClassCleanup(cls.browser.close)
        cls.pictures = os.environ.get("STANCHION_PICTURES")

    def open(self, name):
        self.browser.open(self.pages[name].as_uri())

    def faults(self, width):
        found = [fault for fault in self.browser.run(LOOK) if fault not in NO_MATTER]
        return found + self.browser.run(DRAWINGS.replace("LEAST_SIZE", str(LEAST_SIZE)))

    def test_every_page_at_every_width(self):
        for name in self.pages:
            self.open(name)
            for width, height in WIDTHS:
                for scheme in ("light", "dark"):
                    self.browser.size(width, height, scheme)
                    with self.subTest(name, width=width, scheme=scheme):
                        self.assertEqual(self.faults(width), [])
                    if self.pictures:
                        self.browser.picture(pathlib.Path(self.pictures) / f"report_{name}_{width}_{scheme}.png", whole=True)
        self.assertEqual(self.browser.complaints(), [])

    def test_what_is_planted_is_found(self):
        self.browser.size(1280, 900)
        for change, word in (("text.setAttribute('x', -400)", "is cut"), ("text.setAttribute('style', 'font-size: 4px')", "pixels high"),
                             ("text.parentNode.append(text.cloneNode(true))", "on \""), ("text.setAttribute('fill', 'none'); text.style.fill = '#e8e4da'", "contrast"),
                             ("text.closest('svg').removeAttribute('aria-label')", "no name"), ("text.closest('svg').style.minWidth = '3000px'", "wider than the window|pixels in a window"),
                             ("document.querySelector('table').removeAttribute('aria-label')", "no caption")):
            with self.subTest(word):
                self.open("sound")
                self.browser.run(f"(() => {{ const text = document.querySelector('svg.chart text'); {change}; }})()")
                found = self.faults(1280)
                self.assertTrue(any(re.search(word, fault) for fault in found), found)

    def print_page(self, name, change):
        """The PDF, after `change` and marking the corners of the drawings; returns how many those are."""
        self.browser.size(1280, 900, "dark")  # paper is white all the same
        self.open(name)
        self.browser.run(change)
        marked = self.browser.run(CORNERS)
        data = self.browser.call("Page.printToPDF", preferCSSPageSize=True, printBackground=True)["data"]
        path = pathlib.Path(self.pictures or self.folder) / f"report_{name}.pdf"
        path.write_bytes(base64.b64decode(data))
        return path, marked

    def faults_on_paper(self, name, change="0"):
        path, marked = self.print_page(name, change)
        layout = subprocess.run(["pdftotext", "-bbox", path, "-"], capture_output=True, text=True, check=True).stdout
        sheets, found, places = layout.split("<page ")[1:], [], {}
        for number, sheet in enumerate(sheets):
            width = float(re.match(r'width="([\d.]+)"', sheet).group(1))
            for left, right, word in re.findall(r'<word xMin="([\d.-]+)" yMin="[\d.-]+" xMax="([\d.-]+)" yMax="[\d.-]+">(.*?)</word>', sheet):
                if float(left) < 0 or float(right) > width:
                    found.append(f"{word} leaves the sheet")
                places[word] = number
        for k in range(marked):
            if places.get(f"firstcorner{k}end", -1) != places.get(f"lastcorner{k}end", -2):
                found.append(f"drawing {k} is cut")
        first = html.unescape(" ".join(re.findall(r">(\S+)</word>", sheets[0])))
        lead = self.browser.run("document.querySelector('.lead').textContent").split()
        if lead[0] not in first or " ".join(lead[-2:]) not in first:
            found.append("the verdict is not on the first sheet")
        return found

    @unittest.skipUnless(shutil.which("pdftotext"), "pdftotext (poppler-utils) is not there")
    def test_paper(self):
        for name in self.pages:
            with self.subTest(name):
                self.assertEqual(self.faults_on_paper(name), [])
        for change, word in (("document.querySelector('svg.chart').setAttribute('viewBox', '0 0 640 2000')", "is cut"),
                             ("document.querySelector('header.top').style.marginBottom = '320mm'", "first sheet")):
            with self.subTest(change):
                self.assertTrue(any(word in fault for fault in self.faults_on_paper("sound", change)))


if __name__ == "__main__":
    if browser.find_chromium() is None:
        print("skipped: there is no chromium on this machine")
        sys.exit(SKIPPED)
    unittest.main()
