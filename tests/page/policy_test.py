"""The page's files as they are shipped: nothing inline, nothing from elsewhere, nothing parsed as markup, colours that
can be read, one palette with the HTML report."""

import html.parser
import os
import pathlib
import re
import unittest

SOURCE = pathlib.Path(os.environ["STANCHION_SOURCE"])
PAGE = SOURCE / "data/page"
NAMESPACE = "http://www.w3.org/2000/svg"


class Tags(html.parser.HTMLParser):
    def __init__(self):
        super().__init__()
        self.tags, self.inside, self.inline = [], None, []

    def handle_starttag(self, tag, attrs):
        self.tags.append((tag, dict(attrs)))
        self.inside = tag

    def handle_endtag(self, tag):
        self.inside = None

    def handle_data(self, data):
        if self.inside in ("script", "style") and data.strip():
            self.inline.append(data)


def luminance(colour):
    """Web Content Accessibility Guidelines 2.2 (W3C, 2023), "relative luminance"."""
    parts = [int(colour[k:k + 2], 16) / 255 for k in (1, 3, 5)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(a, b):
    low, high = sorted((luminance(a), luminance(b)))
    return (high + 0.05) / (low + 0.05)


def palettes(css):
    """The custom properties of :root, as they are and in the dark."""
    light, dark = (dict(re.findall(r"--([\w-]+): (#[0-9a-f]{6})", block)) for block in re.findall(r":root \{(.*?)\}", css, re.S)[:2])
    return {"light": light, "dark": {**light, **dark}}


class PolicyTest(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.text = {path.name: path.read_text(encoding="utf-8") for path in PAGE.iterdir()}

    def test_nothing_is_inline(self):
        tags = Tags()
        tags.feed(self.text["index.html"])
        self.assertEqual(tags.inline, [])
        for tag, attributes in tags.tags:
            self.assertNotEqual(tag, "style")
            if tag == "script":
                self.assertEqual((attributes["type"], "src" in attributes), ("module", True))
            for name in attributes:
                self.assertFalse(name.startswith("on") or name == "style", f"{tag} {name}")

    def test_nothing_comes_from_elsewhere(self):
        for name, text in self.text.items():
            self.assertEqual([url for url in re.findall(r"(?:https?:)?//[\w.-]+\.[a-z]{2,}[^\s\"')]*", text.replace(NAMESPACE, "")) if not url.startswith("// ")], [], name)
        self.assertNotRegex(self.text["page.css"], r"url\(|@import|@font-face")

    def test_every_file_is_used_and_every_used_one_is_there(self):
        used = {"index.html"}
        used.update(re.findall(r'(?:src|href)="([\w.]+)"', self.text["index.html"]))
        for name, text in self.text.items():
            self.assertRegex(name, r"^[A-Za-z0-9_.-]+$", "the service serves one flat folder")
            if name.endswith(".js"):
                used.update(re.findall(r'from "\./([\w.]+)"', text))
        self.assertEqual(used, set(self.text))

    def test_no_text_is_parsed_as_markup_or_program(self):
        for name, text in self.text.items():
            if name.endswith(".js"):
                self.assertNotRegex(text, r"innerHTML|outerHTML|insertAdjacentHTML|document\.write|\beval\(|new Function|srcdoc|createContextualFragment|\"style\"", name)
                self.assertNotRegex(text, r"localStorage|indexedDB|document\.cookie", name)

    def test_colours_can_be_read(self):
        for scheme, colour in palettes(self.text["page.css"]).items():
            for ground in ("paper", "sheet", "tint"):
                for ink in ("ink", "soft", "blue", "heed", "open", "ring", "clear"):
                    with self.subTest(scheme, ink=ink, ground=ground):
                        self.assertGreaterEqual(contrast(colour[ink], colour[ground]), 4.5)
                for edge in ("edge", "orange"):
                    with self.subTest(scheme, edge=edge, ground=ground):
                        self.assertGreaterEqual(contrast(colour[edge], colour[ground]), 3)
            self.assertGreaterEqual(contrast(colour["on-blue"], colour["blue"]), 4.5)

    def test_report_and_page_are_one_family(self):
        report = palettes((SOURCE / "src/report/html_style.cpp").read_text(encoding="utf-8"))
        page = palettes(self.text["page.css"])
        for scheme in report:
            for name, colour in report[scheme].items():
                self.assertEqual(page[scheme][name], colour, f"{scheme} {name}")


if __name__ == "__main__":
    unittest.main()
