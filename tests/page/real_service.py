"""stanchion serve as a child process, on a port of its own."""

import contextlib
import os
import pathlib
import re
import signal
import subprocess


class RealService:
    def __init__(self, program, source, root, store, more=()):
        self.port = 0
        self.command = [program, "serve", "--root", f"models={root}", "--store", str(store), "--page", str(source / "data/page"), *more]
        self.process = None

    def start(self):
        self.process = subprocess.Popen([*self.command, "--port", str(self.port)], stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True,
                                        stdin=subprocess.DEVNULL)
        line = self.process.stdout.readline()
        found = re.search(r"http://[^/]*:(\d+)/", line)
        if found is None:
            self.process.wait(timeout=10)
            raise RuntimeError(f"the service did not start: {line}{self.process.stderr.read()}")
        self.port = int(found.group(1))  # the same again after a stop
        self.address = f"http://127.0.0.1:{self.port}"

    def stop(self):
        if self.process is None:
            return
        self.process.send_signal(signal.SIGTERM)
        self.process.wait(timeout=60)
        self.process.stdout.close()
        self.process.stderr.close()
        self.process = None


@contextlib.contextmanager
def guarded(program, source, root, folder):
    """A second service that wants a token; gives its address and a token that may submit."""
    secret = "a-token-of-the-page-test-0123456789abcdef"
    tokens = pathlib.Path(folder) / "tokens"
    tokens.write_text(f"submit {secret}\n", encoding="ascii")
    os.chmod(tokens, 0o600)
    service = RealService(program, source, root, pathlib.Path(folder) / "guarded", ["--token-file", str(tokens)])
    service.start()
    try:
        yield service.address, secret
    finally:
        service.stop()
