"""The page in a headless Chromium, end to end against the real service: what a person does, by mouse and by keyboard.
Skipped, with the reason, where there is no Chromium."""

import pathlib
import re
import tempfile
import threading
import time
import urllib.request

import real_service
import stand_in
from page_case import LOOK, PROGRAM, SOURCE, PageCase, main, quoted


class PageTest(PageCase):
    def test_a_question_by_browsing_the_roots(self):
        page = self.browser
        page.click("nav a[href='#/new']")
        page.wait("document.querySelector('form.ask')")
        page.click("button[aria-label='Stiffness K: browse on the server']")
        page.wait("document.querySelector('dialog[open] .files button')")
        self.assertEqual(page.run(LOOK), [])
        for name in ("models", "footbridge", "K.mtx"):
            page.wait(f"[...document.querySelectorAll('dialog .file')].some((one) => one.innerText.includes({quoted(name)}))", what=name)
            page.run(f"[...document.querySelectorAll('dialog .file')].find((one) => one.innerText.includes({quoted(name)})).focus()")
            page.key("Enter")
        page.wait("!document.querySelector('dialog[open]:not(#token-dialog)')")
        page.wait("document.activeElement.value === 'models/footbridge/K.mtx'", what="the path, and the focus in its field")
        page.run("[...document.querySelectorAll('.actions button')].find((one) => one.innerText === 'Forecast first').focus()")
        page.key("Enter")
        page.wait("document.querySelector('.forecast')", 60)
        self.assertRegex(self.text(".forecast h2"), r"^About .* and .*B$")
        self.assertIn("970", self.text(".forecast"))
        page.click("form.ask button.main")
        page.wait("location.hash.startsWith('#/job/')")
        job = page.run("location.hash.slice(6)")
        page.wait("document.querySelector('.not-checked')", 60)
        result = self.result(job)
        self.assertEqual(result["verdict"], "positive_definite")
        self.assertEqual(self.text("#detail h1"), result["in_words"][0])
        self.assertEqual(page.run("[...document.querySelectorAll('.not-checked li')].map((one) => one.textContent)"), result["not_checked"])
        shown = self.text(".certificate")
        self.assertIn("proof", shown)
        for assumption in result["certificate"]["assumptions"]:
            self.assertIn(assumption, shown)
        # Level and risk in the words of the report.
        with urllib.request.urlopen(f"{self.service.address}/v1/jobs/{job}/report", timeout=60) as answer:
            report = answer.read().decode()
        stand = re.search(r'<p class="stand">([^<]*)</p>', report).group(1)
        self.assertTrue(stand.startswith(self.text(".verdict .soft").rstrip(".")), stand)
        # Every member of the certificate is there in full.
        page.run("document.querySelector('.certificate details').open = true")
        full = self.text(".certificate table")
        self.assertIn(str(result["certificate"]["runs"][0]["negative"]), full)
        self.assertIn(result["inputs"]["stiffness"]["sha256"], self.text("#detail"))

    def test_a_file_dropped_onto_its_field(self):
        page = self.browser
        matrix = "%%MatrixMarket matrix coordinate real symmetric\n2 2 2\n1 1 3.0\n2 2 -1.0\n"
        page.run("location.hash = '#/new'")
        page.wait("document.querySelector('.file-field')")
        page.run(f"""(() => {{
          const data = new DataTransfer();
          data.items.add(new File([{quoted(matrix)}], 'two.mtx'));
          const field = document.querySelector('.file-field');
          field.dispatchEvent(new DragEvent('dragover', {{dataTransfer: data, bubbles: true, cancelable: true}}));
          field.dispatchEvent(new DragEvent('drop', {{dataTransfer: data, bubbles: true, cancelable: true}}));
        }})()""")
        page.wait("document.querySelector('.file-field input').value.startsWith('sha256:')", 30)
        self.assertIn("two.mtx", self.text(".file-field .status"))
        page.click("form.ask button.main")
        page.wait("document.querySelector('.not-checked')", 60)
        self.assertIn("K is indefinite: 1 negative direction", self.text("#detail h1"))
        self.assertEqual(page.run("document.querySelector('.verdict .mark').getAttribute('aria-label')"), "not good")

    def test_the_staircase_by_keyboard_and_mouse(self):
        page = self.browser
        job = self.ask("sweep", self.pencil(), {"from": 0.5, "to": 3, "points": 8, "title": "Footbridge, crowd"})
        counts = self.result(job)["counts"]
        self.open_job(job)
        page.wait("document.querySelector('.chart .step')")
        page.run("document.querySelector('.chart').focus()")
        for _ in range(3):
            page.key("ArrowRight")
        self.assertIn(f"at {counts[3]['shift']}", self.text(".card-title"))
        page.wait(f"document.querySelector('#announce').textContent.startsWith({quoted(str(counts[3]['below']))})")
        self.assertIn("backed by", self.text(".card"))
        # Zoom by key and wheel, and back.
        labels = "[...document.querySelectorAll('.plot > text')].map((one) => one.textContent).join()"
        whole = page.run(labels)
        page.key("+")
        page.wait(f"{labels} !== {quoted(whole)}")
        page.key("0")
        page.wait(f"{labels} === {quoted(whole)}")
        box = page.run("(() => { const r = document.querySelector('.chart').getBoundingClientRect(); return [r.x, r.y, r.width, r.height]; })()")
        page.mouse("mouseWheel", box[0] + box[2] / 2, box[1] + 100, deltaX=0, deltaY=-300)
        page.wait(f"{labels} !== {quoted(whole)}")
        page.key("0")
        # A shift typed. What stands at 1.65 is known from README.md.
        page.run("document.querySelector('#add-shift').focus()")
        page.type("1.65")
        page.key("Enter")
        page.wait("[...document.querySelectorAll('figure details tbody tr')].some((row) => row.cells[0].innerText === '1.65' || row.cells[0].textContent === '1.65')", 60, "1.65 joins")
        row = page.run("[...document.querySelectorAll('figure details tbody tr')].map((row) => [...row.cells].map((cell) => cell.textContent)).find((row) => row[0] === '1.65')")
        self.assertEqual(row[1], "2")
        # A shift by a click on the axis.
        before = page.run("document.querySelectorAll('.chart .added').length")
        box = page.run("(() => { document.querySelector('.chart').scrollIntoView({block: 'center'}); const r = document.querySelector('.chart .strip').getBoundingClientRect(); return [r.x, r.y, r.width, r.height]; })()")
        page.press(box[0] + 0.62 * box[2], box[1] + box[3] / 2)
        page.wait(f"document.querySelectorAll('.chart .added').length === {before + 1}", 60, "the clicked shift joins")
        added = self.api(f"/v1/jobs?continues={job}")["jobs"]
        self.assertEqual(len(added), 2)
        clicked = self.result(added[0]["id"])["counts"][0]
        self.assertIn(f"{clicked['below']} at {clicked['shift']}", self.text(".card-title"))
        # They are still there when the page is read again.
        page.open(f"{self.service.address}/#/job/{job}")
        page.call("Page.reload")
        page.wait("document.querySelectorAll('.chart .added').length === 2", 60)
        # What is no number goes nowhere.
        page.run("document.querySelector('#add-shift').focus()")
        page.type("one")
        page.key("Enter")
        self.assertEqual(page.run("document.querySelector('#add-shift').getAttribute('aria-invalid')"), "true")
        self.assertEqual(len(self.api(f"/v1/jobs?continues={job}")["jobs"]), 2)

    def test_brackets(self):
        page = self.browser
        job = self.ask("bracket", self.pencil(), {"first": 4})
        critical = self.result(job)["critical"]
        self.open_job(job)
        rows = page.run("[...document.querySelectorAll('figure details tbody tr')].map((row) => [...row.cells].map((cell) => cell.textContent))")
        self.assertEqual([(float(row[1]), float(row[2]), int(row[3])) for row in rows], [(one["low"], one["high"], one["multiplicity"]) for one in critical])
        self.assertEqual(page.run("document.querySelectorAll('.chart .bar').length"), len(critical))
        page.run("document.querySelector('.chart').focus()")
        page.key("End")
        self.assertIn(str(critical[-1]["high"]), self.text(".card"))

    def test_an_audit_names_what_is_missing(self):
        job = self.ask("audit", self.pencil() | {"values": "models/footbridge/list.csv"}, {})
        result = self.result(job)
        self.open_job(job)
        self.assertEqual(result["verdict"], "missing")
        self.assertEqual(self.browser.run("document.querySelectorAll('.band tbody')[0].rows.length"), len(result["gaps"]))
        self.assertEqual(self.text("#detail h1"), result["in_words"][0])

    def scene(self):
        return self.browser.run("""(() => { const c = document.querySelector('.scene'); const d = c.getContext('2d').getImageData(0, 0, c.width, c.height).data;
          let painted = 0, orange = 0, sum = 0;
          for (let k = 0; k < d.length; k += 4) { if (d[k + 3] > 40) painted += 1; if (d[k + 3] > 120 && d[k] > 170 && d[k + 2] < 90) orange += 1; sum = (sum * 31 + d[k] + d[k + 3]) % 1000000007; }
          return [painted, orange, sum]; })()""")

    def test_causes_and_the_model(self):
        page = self.browser
        job = self.ask("locate", self.frame(), {})
        result = self.result(job)
        self.open_job(job)
        page.wait("document.querySelector('.scene')", 30)
        for direction in result["directions"]:
            self.assertIn(direction["remedy"], self.text("#detail"))
        page.wait("document.querySelector('.scene').width > 300")
        self.settle()
        painted, orange, still = self.scene()
        self.assertGreater(painted, 2000)
        self.assertGreater(orange, 30, "the motion is drawn")
        page.run("document.querySelector('.scene').focus()")
        page.key("ArrowRight")
        self.settle()
        turned = self.scene()
        self.assertNotEqual(turned[2], still)
        self.assertGreater(turned[0], 1000)
        page.key("0")
        self.settle()
        self.assertEqual(self.scene()[2], still)
        box = page.run("(() => { const e = document.querySelector('.scene'); e.scrollIntoView({block: 'center'}); const r = e.getBoundingClientRect(); return [r.x + r.width / 2, r.y + r.height / 2]; })()")
        page.mouse("mousePressed", *box, button="left", clickCount=1, buttons=1)
        page.mouse("mouseMoved", box[0] + 60, box[1] + 20, button="left", buttons=1)
        page.mouse("mouseReleased", box[0] + 60, box[1] + 20, button="left", clickCount=1)
        self.settle()
        self.assertNotEqual(self.scene()[2], still)
        # Nothing moves by itself; it does on demand, and stops.
        page.run("document.querySelector('.scene').focus()")
        one = self.scene()[2]
        time.sleep(0.2)
        self.assertEqual(self.scene()[2], one)
        page.key(" ")
        page.wait("document.querySelector('[aria-pressed=true]')")
        time.sleep(0.5)
        self.assertNotEqual(self.scene()[2], one)
        page.key(" ")
        page.wait("document.querySelector('[aria-pressed=false]')")
        # With reduced motion the other end is drawn, without a film between.
        page.size(1280, 900, motion="reduce")
        page.key("0")
        page.key(" ")
        self.settle()
        self.assertFalse(page.run("Boolean(document.querySelector('[aria-pressed=true]'))"))
        # The table says what the picture says.
        page.run("document.querySelector('.node-view details').open = true")
        self.assertGreater(page.run("document.querySelectorAll('.node-view tbody tr').length"), 0)

    def test_local_accuracy_of_a_sound_model(self):
        job = self.ask("locate", self.footbridge(nodes="models/footbridge/nodes.csv"), {})
        accuracy = self.result(job)["local_accuracy"]
        self.open_job(job)
        bars = self.browser.run("document.querySelectorAll('.histogram .bar').length")
        self.assertEqual(bars, sum(one["equations"] > 0 for one in accuracy["histogram"]))
        self.assertIn(f"at most {accuracy['largest']:.1f}", self.text("#detail"))
        self.assertIn("No cause was found", self.text("#detail"))

    def test_downloads_give_the_bytes_of_the_service(self):
        page = self.browser
        job = self.ask("check", self.footbridge(), {})
        self.finished(job)
        with tempfile.TemporaryDirectory() as folder:
            page.call("Page.setDownloadBehavior", behavior="allow", downloadPath=folder)
            self.open_job(job)
            page.click(".downloads button")
            expected = pathlib.Path(folder) / f"{job}-answer.json"
            for _ in range(600):
                if expected.exists():
                    break
                time.sleep(0.05)
            time.sleep(0.2)
            with urllib.request.urlopen(f"{self.service.address}/v1/jobs/{job}/result", timeout=60) as answer:
                self.assertEqual(expected.read_bytes(), answer.read())

    def test_live_progress_and_what_others_ask(self):
        page = self.browser
        job = self.ask("check", self.footbridge(), {"title": "Asked by somebody else"})
        page.wait(f"document.querySelector({quoted(f'#job-row-{job}')})", 30, "the row comes by itself")
        page.wait(f"document.querySelector({quoted(f'#job-row-{job} .mark-word')}).textContent === 'good'", 60)
        self.assertIn("positive definite", self.text(f"#job-row-{job} .line-one"))
        page.run("document.querySelector('.job-grid').focus()")
        page.key("Home")
        page.wait(f"document.querySelector('.job-grid').getAttribute('aria-activedescendant') === {quoted(f'job-row-{job}')}")
        page.key("Enter")
        page.wait(f"location.hash === {quoted(f'#/job/{job}')}")
        page.wait("document.activeElement.tagName === 'H1'")

    def test_a_title_is_text_whatever_it_holds(self):
        title = "<img src=x onerror=\"document.title='broken in'\">"
        job = self.ask("check", self.footbridge(), {"title": title})
        self.finished(job)
        self.open_job(job)
        self.assertIn(title, self.text("#detail"))
        self.assertEqual(self.browser.run("document.querySelectorAll('#detail img, #jobs img').length"), 0)

    def test_errors_come_with_their_remedy(self):
        page = self.browser
        self.may_fail = r"404|422|400"
        job = self.ask("check", {"stiffness": "models/footbridge/README.md"}, {})
        problem = self.finished(job)["problem"]
        self.open_job(job)
        self.assertIn(problem["detail"], self.text("#detail .problem"))
        self.assertIn(problem["remedy"], self.text("#detail .problem"))
        self.assertEqual(page.run("document.querySelector('#detail .problem').getAttribute('role')"), "alert")
        page.run("location.hash = '#/job/j-none'")
        page.wait("document.querySelector('#detail h1').innerText === 'This job cannot be shown'")
        page.wait("document.querySelector('#detail .problem')")
        page.run("location.hash = '#/new'")
        page.wait("document.querySelector('form.ask')")
        page.click("form.ask button.main")
        page.wait("document.querySelector('form.ask .problem')")
        self.assertEqual(page.run("document.activeElement.getAttribute('aria-invalid')"), "true")
        page.run("document.activeElement.value = 'models/no/such.mtx'")
        page.click("form.ask button.main")
        page.wait("document.querySelector('form.ask .problem')?.innerText.includes('What helps')", 30)

    def test_a_lost_connection_is_said_and_mended(self):
        page = self.browser
        self.may_fail = r"ERR_|Failed to load|Failed to fetch"
        self.service.stop()
        page.wait("document.querySelector('#connection').dataset.state === 'lost'", 30)
        self.assertIn("connection lost", self.text("#connection"))
        self.service.start()
        job = self.ask("check", self.footbridge(), {"title": "Asked meanwhile"})
        self.finished(job)
        page.wait("document.querySelector('#connection').dataset.state === 'live'", 40)
        page.wait(f"document.querySelector({quoted(f'#job-row-{job} .line-two')})?.textContent.includes('Asked meanwhile')", 30)

    def test_tokens_are_asked_for_and_forgotten_with_the_tab(self):
        page = self.browser
        self.may_fail = r"401|403"
        with real_service.guarded(PROGRAM, SOURCE, self.root, pathlib.Path(self.folder.name)) as (address, secret):
            page.open(address + "/")
            page.wait("document.querySelector('#token-dialog').open", 30)
            self.assertEqual(page.run(LOOK), [])
            page.run("document.querySelector('#token-field').focus()")
            page.type("not-it")
            page.key("Enter")
            page.wait("document.querySelector('#token-dialog').open && document.querySelector('#token-problem').innerText", 30)
            page.run("document.querySelector('#token-field').focus()")
            page.type(secret)
            page.key("Enter")
            page.wait("document.querySelector('#connection').dataset.state === 'live'", 30)
            self.assertFalse(page.run("document.querySelector('#token-dialog').open"))
            self.assertEqual(page.run("[localStorage.length, document.cookie, location.href.includes('token')]"), [0, "", False])
            self.assertNotIn(secret, page.run("document.documentElement.outerHTML"))
            # Another tab has to be told again.
            page.run("sessionStorage.clear()")
            page.call("Page.reload")
            page.wait("document.querySelector('#token-dialog').open", 30)

    def test_ten_thousand_jobs(self):
        page = self.browser
        server = stand_in.serve(0, self.root, 10000)  # the service itself would have to answer them first
        threading.Thread(target=server.serve_forever, daemon=True).start()
        try:
            page.open(f"http://127.0.0.1:{server.server_address[1]}/")
            page.wait("document.querySelector('.tally').textContent === '10,000 jobs'", 60)
            rows = "document.querySelectorAll('.job-row').length"
            self.assertLess(page.run(rows), 60, "only what is in sight is in the page")
            self.assertEqual(page.run("document.querySelector('.job-grid').getAttribute('aria-rowcount')"), "10000")
            page.run("document.querySelector('.job-grid').focus()")
            page.key("End")
            page.wait("document.querySelector('[aria-rowindex=\"10000\"]')?.classList.contains('active')")
            self.assertLess(page.run(rows), 60)
            page.run("document.querySelector('#find').focus()")
            page.type("variant 77")
            page.wait("document.querySelector('.tally').textContent.includes('pass the filter') && document.querySelectorAll('.job-row').length > 5")
            shown = page.run("[...document.querySelectorAll('.job-row')].map((one) => one.id + one.textContent)")
            self.assertLess(int(page.run("document.querySelector('.job-grid').getAttribute('aria-rowcount')")), 1000)
            self.assertTrue(shown and all("77" in text for text in shown), shown)
        finally:
            server.shutdown()
            server.server_close()


if __name__ == "__main__":
    main()
