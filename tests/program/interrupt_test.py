"""Ctrl-C, termination and the progress line."""

import os
import pty
import random
import select
import signal
import subprocess
import time
import unittest

from program import PROGRAM, ProgramTest, chain

# Enough counts to keep the program busy until it is told to stop.
MANY_SHIFTS = [f"--at={','.join(repr(k / 100000 + part) for k in range(1, 5001))}" for part in range(4)]


class InterruptTest(ProgramTest):
    def setUp(self):
        super().setUp()
        self.stiffness = self.matrix("K.mtx", 20000, chain(20000))
        self.log = self.folder / "run.log"
        self.command = [PROGRAM, "count", self.stiffness, *MANY_SHIFTS, "--json", "answer.json", "--log", str(self.log)]

    def start(self, **options):
        process = subprocess.Popen(self.command, cwd=self.folder, **options)
        self.addCleanup(lambda: process.poll() is None and process.kill())
        deadline = time.monotonic() + 60
        while time.monotonic() < deadline and not (self.log.exists() and self.log.stat().st_size > 0):
            self.assertIsNone(process.poll(), "the program ended before it was interrupted")
            time.sleep(0.01)
        return process

    def test_stop_requests_end_it_and_leave_nothing(self):
        for number in (signal.SIGINT, signal.SIGTERM):
            with self.subTest(number):
                process = self.start(stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)
                process.send_signal(number)
                output, errors = process.communicate(timeout=60)
                self.assertEqual((process.returncode, output), (130, ""))
                self.assertRegex(errors, r"^stanchion: .*\[interrupted\]\n")
                self.assertEqual(sorted(os.listdir(self.folder)), ["K.mtx", "run.log"])
                self.log.unlink()

    def test_a_request_at_any_moment_ends_it(self):
        # Reading, ordering (METIS handles SIGTERM in its own way, if it is let), analysing, factoring.
        moments = random.Random(3)
        for number in (signal.SIGTERM, signal.SIGINT) * 15:
            process = self.start(stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)
            time.sleep(moments.uniform(0, 0.03))
            process.send_signal(number)
            process.communicate(timeout=60)
            self.assertEqual(process.returncode, 130)
            self.log.unlink()

    def test_progress_only_on_a_terminal_and_erased_at_the_end(self):
        terminal, inner = pty.openpty()
        process = self.start(stdout=subprocess.PIPE, stderr=inner)
        os.close(inner)
        shown = self.read_terminal(terminal, until=b" s elapsed")
        self.assertIn(b" %, ", shown)
        process.send_signal(signal.SIGINT)
        shown += self.read_terminal(terminal, until=b"[interrupted]")
        process.communicate(timeout=60)
        self.assertEqual(process.returncode, 130)
        last_line = shown[: shown.index(b"stanchion:")].rsplit(b"elapsed", 1)[1]
        self.assertTrue(last_line.endswith(b"\r\x1b[K"), last_line)

    def read_terminal(self, terminal, until):
        shown, deadline = b"", time.monotonic() + 60
        while until not in shown and time.monotonic() < deadline:
            if select.select([terminal], [], [], 1)[0]:
                try:
                    shown += os.read(terminal, 4096)
                except OSError:  # the other end is closed
                    break
        self.assertIn(until, shown)
        return shown


if __name__ == "__main__":
    unittest.main()
