"""The outline of an HTML page: its text, attributes, tags and headings; tags must nest."""

import html.parser

VOID = {"meta", "br", "wbr", "hr", "img", "input", "link", "path", "circle", "rect"}


class Outline(html.parser.HTMLParser):
    """Fails on tags that do not nest; collects text and attributes."""

    def __init__(self):
        super().__init__(convert_charrefs=True)
        self.open, self.text, self.attributes, self.tags, self.headings = [], [], [], [], []
        self.word_goes_on = False  # after <wbr>

    def handle_starttag(self, tag, attrs):
        self.attributes += attrs
        self.tags.append(tag)
        self.word_goes_on = tag == "wbr"
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
        if self.open and self.open[-1] == "style":
            return
        if self.word_goes_on and self.text:
            self.text[-1] += data
        else:
            self.text.append(data)
        self.word_goes_on = False
        if self.open and self.open[-1] == "h2":
            self.headings.append(data)


def outline(path):
    page = Outline()
    page.feed(path.read_text(encoding="utf-8"))
    page.close()
    assert page.open == [], page.open
    return page
