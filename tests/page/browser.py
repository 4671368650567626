"""Headless Chromium over its debugging pipe: open a page, press keys, point, read, take pictures. No driver needed."""

import base64
import json
import os
import pathlib
import shutil
import subprocess
import tempfile
import time

FLAGS = ["--headless=new", "--disable-gpu", "--no-first-run", "--no-default-browser-check", "--disable-extensions", "--disable-background-networking",
         "--disable-component-update", "--disable-sync", "--mute-audio", "--hide-scrollbars", "--disable-dev-shm-usage", "--remote-debugging-pipe"]
KEYS = {"Enter": (13, "\r"), "Tab": (9, ""), "Escape": (27, ""), " ": (32, " "), "ArrowLeft": (37, ""), "ArrowUp": (38, ""), "ArrowRight": (39, ""),
        "ArrowDown": (40, ""), "Home": (36, ""), "End": (35, ""), "PageDown": (34, ""), "PageUp": (33, "")}


def find_chromium():
    return next((path for name in ("chromium", "chromium-browser") if (path := shutil.which(name))), None)


class Browser:
    def __init__(self, program):
        self.profile = tempfile.TemporaryDirectory(prefix="page_profile_")
        ours_read, theirs_write = os.pipe()
        theirs_read, ours_write = os.pipe()
        flags = FLAGS + ([f"--user-data-dir={self.profile.name}"]) + (["--no-sandbox"] if os.geteuid() == 0 else [])

        def wire():
            os.dup2(theirs_read, 13)
            os.dup2(theirs_write, 14)
            os.dup2(13, 3)
            os.dup2(14, 4)

        self.process = subprocess.Popen([program, *flags, "about:blank"], preexec_fn=wire, close_fds=False, stdin=subprocess.DEVNULL,
                                        stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
        os.close(theirs_read)
        os.close(theirs_write)
        self.input, self.output = os.fdopen(ours_write, "wb", buffering=0), os.fdopen(ours_read, "rb", buffering=0)
        self.rest, self.number, self.events, self.session = b"", 0, [], None
        target = self.call("Target.createTarget", url="about:blank")["targetId"]
        self.session = self.call("Target.attachToTarget", targetId=target, flatten=True)["sessionId"]
        for domain in ("Page", "Runtime", "Log", "Network", "DOM", "Accessibility"):
            self.call(f"{domain}.enable")

    def close(self):
        try:
            self.session = None
            self.call("Browser.close")
            self.process.wait(timeout=10)
        except (OSError, RuntimeError, subprocess.TimeoutExpired):
            self.process.kill()
            self.process.wait()
        self.input.close()
        self.output.close()
        self.profile.cleanup()

    def message(self):
        while b"\0" not in self.rest:
            data = os.read(self.output.fileno(), 1 << 20)
            if not data:
                raise RuntimeError("the browser ended")
            self.rest += data
        text, self.rest = self.rest.split(b"\0", 1)
        return json.loads(text)

    def call(self, method, **parameters):
        self.number += 1
        number = self.number
        request = {"id": number, "method": method, "params": parameters}
        if self.session:
            request["sessionId"] = self.session
        self.input.write(json.dumps(request).encode() + b"\0")
        while True:
            answer = self.message()
            if answer.get("id") == number:
                if "error" in answer:
                    raise RuntimeError(f"{method}: {answer['error']}")
                return answer["result"]
            if "method" in answer:
                self.events.append(answer)

    def run(self, script):
        """The value of a JavaScript expression; promises are waited for."""
        answer = self.call("Runtime.evaluate", expression=script, returnByValue=True, awaitPromise=True, userGesture=True)
        if "exceptionDetails" in answer:
            detail = answer["exceptionDetails"]
            raise RuntimeError(detail.get("exception", {}).get("description", detail["text"]) + "\nin: " + script[:300])
        return answer["result"].get("value")

    def wait(self, script, seconds=int(os.environ.get("STANCHION_PATIENCE", "60")), what=None):
        """Until the expression is true; returns its value."""
        end = time.monotonic() + seconds
        while True:
            try:  # between two documents there is nothing to ask
                value, failure = self.run(f"((value) => (value instanceof Node ? true : value))({script})"), ""
            except RuntimeError as error:
                value, failure = None, str(error)
            if value:
                return value
            if time.monotonic() > end:
                raise AssertionError(f"not within {seconds} s: {what or script}\n{failure}\n" + self.run("document.body?.innerText.slice(0, 1500)"))
            time.sleep(0.05)

    def open(self, address):
        self.call("Page.navigate", url=address)
        self.wait("document.readyState === 'complete'")

    def size(self, width, height, scheme="light", motion="no-preference"):
        self.call("Emulation.setDeviceMetricsOverride", width=width, height=height, deviceScaleFactor=1, mobile=False)
        self.call("Emulation.setEmulatedMedia", features=[{"name": "prefers-color-scheme", "value": scheme}, {"name": "prefers-reduced-motion", "value": motion}])

    def picture(self, path, whole=False):
        data = self.call("Page.captureScreenshot", format="png", captureBeyondViewport=whole,
                         **({"clip": {"x": 0, "y": 0, "scale": 1, **self.run("({width: document.documentElement.clientWidth, height: document.documentElement.scrollHeight})")}} if whole else {}))
        pathlib.Path(path).write_bytes(base64.b64decode(data["data"]))

    def key(self, key, modifiers=0):
        code, text = KEYS.get(key, (ord(key.upper()[0]), key))
        common = {"key": key, "code": key, "windowsVirtualKeyCode": code, "modifiers": modifiers}
        self.call("Input.dispatchKeyEvent", type="keyDown", text=text, **common) if text else self.call("Input.dispatchKeyEvent", type="rawKeyDown", **common)
        self.call("Input.dispatchKeyEvent", type="keyUp", **common)

    def type(self, text):
        self.call("Input.insertText", text=text)

    def mouse(self, kind, x, y, **more):
        self.call("Input.dispatchMouseEvent", type=kind, x=x, y=y, **more)

    def press(self, x, y):
        self.mouse("mouseMoved", x, y)
        self.mouse("mousePressed", x, y, button="left", clickCount=1, buttons=1)
        self.mouse("mouseReleased", x, y, button="left", clickCount=1)

    def click(self, selector):
        """Points at the middle of the first element that matches, as a person would."""
        self.wait(f"document.querySelector({json.dumps(selector)})", what=selector)
        box = self.run(f"(() => {{ const e = document.querySelector({json.dumps(selector)}); e.scrollIntoView({{block: 'center'}}); const r = e.getBoundingClientRect(); return [r.x + r.width / 2, r.y + r.height / 2]; }})()")
        self.press(*box)

    def complaints(self):
        """What the page wrote to the console as errors, and what broke its policy."""
        found = []
        for event in self.events:
            if event["method"] == "Runtime.exceptionThrown":
                detail = event["params"]["exceptionDetails"]
                found.append(detail.get("exception", {}).get("description", detail["text"]))
            if event["method"] == "Log.entryAdded" and event["params"]["entry"]["level"] == "error":
                found.append(event["params"]["entry"]["text"] + " " + event["params"]["entry"].get("url", ""))
        return found
