"""Every view of the page, looked at for whoever sees or points less well, narrow and wide, light and dark; STANCHION_PICTURES=FOLDER
keeps pictures. Skipped, with the reason, where there is no Chromium."""

import os
import pathlib

from page_case import LOOK, PageCase, main, quoted


class PageLookTest(PageCase):
    def everywhere(self):
        """Every kind of view, by name: the address, and what to wait for."""
        jobs = {"check": self.ask("check", self.footbridge(), {}), "sweep": self.ask("sweep", self.pencil(), {"from": 0.5, "to": 3, "points": 6}),
                "bracket": self.ask("bracket", self.pencil(), {"first": 4}), "causes": self.ask("locate", self.frame(), {}),
                "accuracy": self.ask("locate", self.footbridge(nodes="models/footbridge/nodes.csv"), {}),
                "audit": self.ask("audit", self.pencil() | {"values": "models/footbridge/list.csv"}, {}), "forecast": self.ask("forecast", self.footbridge(), {}),
                "failed": self.ask("check", {"stiffness": "models/footbridge/README.md"}, {})}
        for job in jobs.values():
            self.finished(job)
        places = {name: (f"#/job/{job}", f"document.querySelector('#detail').innerText.includes({quoted(job)})") for name, job in jobs.items()}
        return places | {"list": ("#/", "document.querySelector('.welcome')"), "new": ("#/new", "document.querySelector('form.ask')")}

    def test_nothing_bars_the_way(self):
        page = self.browser
        pictures = os.environ.get("STANCHION_PICTURES")
        places = self.everywhere()
        for width, height in ((360, 740), (1280, 900), (2560, 1440)):
            for scheme in ("light", "dark"):
                page.size(width, height, scheme)
                for name, (address, there) in places.items():
                    page.run(f"location.hash = {quoted(address)}")
                    page.wait(there, 30)
                    if name in ("causes", "accuracy"):
                        page.wait("document.querySelector('.scene')", 30)
                    if pictures:
                        self.settle()
                        page.picture(pathlib.Path(pictures) / f"{name}_{width}_{scheme}.png", whole=name != "list")
                    page.run("document.querySelectorAll('#detail details').forEach((one) => { one.open = true; })")
                    self.settle()
                    with self.subTest(name, width=width, scheme=scheme):
                        self.assertEqual(page.run(LOOK), [])
                        if scheme == "light":
                            self.every_control_has_a_name()

    def every_control_has_a_name(self):
        controls = {"button", "link", "textbox", "searchbox", "combobox", "checkbox", "radio", "slider", "application", "grid", "progressbar", "dialog", "DisclosureTriangle"}
        nameless = []
        for node in self.browser.call("Accessibility.getFullAXTree")["nodes"]:
            if not node.get("ignored") and node["role"]["value"] in controls and not node.get("name", {}).get("value", "").strip():
                nameless.append(node["role"]["value"])
        self.assertEqual(nameless, [])

    def test_the_look_finds_what_is_planted(self):
        page = self.browser
        page.run("location.hash = '#/new'")
        page.wait("document.querySelector('form.ask')")
        self.assertEqual(page.run(LOOK), [])
        for planted, word in (("<p class=x>pale</p>", "contrast"), ("<button>.</button>", "target"), ("<h4>too deep</h4>", "level is skipped"), ("<input type=text>", "no label"),
                              ("<div class=x>wide</div>", "pixels in a window"), ("<p id=connection>twice</p>", "id used twice"), ("<table><tr><td>1</td></tr></table>", "no caption")):
            with self.subTest(word):
                page.run(f"""(() => {{ const box = document.createElement('div'); box.id = 'planted'; box.innerHTML = {quoted(planted)};
                  document.querySelector('#detail').append(box); const one = box.firstChild;
                  if ({quoted(word)} === 'contrast') {{ one.style.color = '#c8c8c8'; one.style.background = '#fff'; }}
                  if ({quoted(word)} === 'target') {{ one.style.minHeight = one.style.minWidth = one.style.padding = '0'; one.style.height = one.style.width = '12px'; }}
                  if ({quoted(word)} === 'pixels in a window') one.style.width = '3000px'; }})()""")
                faults = page.run(LOOK)
                page.run("document.querySelector('#planted').remove()")
                self.assertTrue(any(word in fault for fault in faults), faults)

    def test_tab_goes_through_everything_and_out_again(self):
        page = self.browser
        job = self.ask("sweep", self.pencil(), {"from": 0.5, "to": 3, "points": 6})
        self.finished(job)
        for address in (f"#/job/{job}", "#/new"):
            page.run(f"location.hash = {quoted(address)}")
            page.wait("document.querySelector('#detail .band, form.ask')", 30)
            self.settle()
            page.run("document.activeElement.blur(); window.scrollTo(0, 0)")
            wanted = set(page.run("""(() => { let k = 0; return [...document.querySelectorAll('a[href], button, input, select, textarea, summary, [tabindex="0"]')]
              .filter((one) => one.checkVisibility() && !one.disabled && one.tabIndex >= 0 && !(one.type === 'radio' && !one.checked) && !one.closest('details:not([open]) > :not(summary)'))
              .map((one) => one.dataset.stop = String(k++)); })()"""))
            met = []
            for _ in range(len(wanted) + 8):
                page.key("Tab")
                met.append(page.run("document.activeElement.dataset.stop ?? ''"))
                self.assertTrue(page.run("document.activeElement === document.body || getComputedStyle(document.activeElement).outlineStyle !== 'none' || document.activeElement.matches('.job-grid')"), "focus is seen")
            with self.subTest(address):
                self.assertEqual(wanted - set(met), set(), "not reached")
                self.assertNotIn(True, [met[k] == met[k + 1] != "" for k in range(len(met) - 1)], "a trap")
        # The first stop leads past the list.
        page.run("document.activeElement.blur(); window.scrollTo(0, 0)")
        page.call("Page.reload")
        page.wait("document.querySelector('form.ask')", 30)
        self.settle()
        page.run("document.querySelector('#skip').focus()")
        page.key("Enter")
        self.assertEqual(page.run("document.activeElement.tagName"), "H1")


if __name__ == "__main__":
    main()
