"""Submit latency and throughput of the service, open loop: jobs are due at fixed times, whether or not earlier answers came,
and latency counts from when a job was due. Load goes to loopback only.

Usage: service.py --program build/release/bin/stanchion --out build/bench [--jobs N] [--rate R] [--connections C]
"""

import argparse
import concurrent.futures
import http.client
import json
import os
import pathlib
import re
import signal
import statistics
import subprocess
import tempfile
import threading
import time

CHAIN = 30


def chain_text():
    lines = [f"{CHAIN} {CHAIN} {2 * CHAIN - 1}"]
    for i in range(1, CHAIN + 1):
        lines.append(f"{i} {i} {1 if i == CHAIN else 2}")
        if i < CHAIN:
            lines.append(f"{i + 1} {i} -1")
    return "%%MatrixMarket matrix coordinate real symmetric\n" + "\n".join(lines) + "\n"


def file_system(path):
    best = ("", "")
    for line in pathlib.Path("/proc/self/mounts").read_text().splitlines():
        _, mount, kind, options = line.split()[:4]
        if str(path).startswith(mount) and len(mount) >= len(best[0]):
            best = (mount, f"{kind} ({options})")
    return best[1]


def start(program, store, models):
    process = subprocess.Popen([program, "serve", "--store", store, "--root", f"models={models}", "--port", "0"],
                               stdout=subprocess.PIPE, text=True)
    return process, int(re.search(r":(\d+)/", process.stdout.readline())[1])


def submit_open_loop(port, jobs, rate, connections):
    """Latencies in seconds, and what went wrong."""
    body = json.dumps({"command": "check", "inputs": {"stiffness": "models/K.mtx"}})
    latencies, errors, lock = [], [], threading.Lock()
    begin = time.monotonic() + 1.0
    ready = threading.Barrier(connections)

    def work(number):
        connection = http.client.HTTPConnection("127.0.0.1", port, timeout=60)
        connection.connect()
        ready.wait()
        for job in range(number, jobs, connections):
            due = begin + job / rate
            time.sleep(max(0, due - time.monotonic()))
            try:
                connection.request("POST", "/v1/jobs", body, {"Content-Type": "application/json"})
                answer = connection.getresponse()
                answer.read()
                with lock:
                    if answer.status == 202:
                        latencies.append(time.monotonic() - due)
                    else:
                        errors.append(answer.status)
            except OSError as error:
                with lock:
                    errors.append(str(error))
        connection.close()

    threads = [threading.Thread(target=work, args=(number,)) for number in range(connections)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    return sorted(latencies), errors


def total(port, state):
    connection = http.client.HTTPConnection("127.0.0.1", port, timeout=60)
    connection.request("GET", f"/v1/jobs?limit=1&state={state}")
    count = json.loads(connection.getresponse().read())["total"]
    connection.close()
    return count


def by_command_line(program, model, jobs, folder):
    """Jobs a second with as many processes at a time as the service runs, the same files written."""
    def one(number):
        names = {"--json": "json", "--html": "html", "--csv": "csv", "--junit": "xml", "--certificate": "cert"}
        outputs = [f"{option}={folder}/{number}.{ending}" for option, ending in names.items()]
        subprocess.run([program, "check", model, "--threads=1", "--quiet", *outputs], check=True, stdout=subprocess.DEVNULL)

    begin = time.monotonic()
    with concurrent.futures.ThreadPoolExecutor(2 * os.cpu_count()) as pool:
        list(pool.map(one, range(jobs)))
    return jobs / (time.monotonic() - begin)


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("--program", required=True)
    parser.add_argument("--out", required=True)
    parser.add_argument("--jobs", type=int, default=5000)
    parser.add_argument("--rate", type=float, default=100)
    parser.add_argument("--connections", type=int, default=200)
    asked = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        models = pathlib.Path(folder) / "models"
        models.mkdir()
        (models / "K.mtx").write_text(chain_text(), encoding="ascii")
        process, port = start(asked.program, folder + "/store", models)
        latencies, errors = submit_open_loop(port, asked.jobs, asked.rate, asked.connections)
        accepted = time.monotonic()
        done_then = total(port, "done")
        while total(port, "queued") + total(port, "running") > 0:
            time.sleep(0.2)
        drained = time.monotonic()
        done, failed = total(port, "done"), total(port, "failed")
        process.send_signal(signal.SIGTERM)
        process.wait()
        plain = by_command_line(asked.program, str(models / "K.mtx"), 200, folder)
        seconds = asked.jobs / asked.rate
        result = {
            "jobs": asked.jobs, "rate": asked.rate, "connections": asked.connections, "errors": errors[:20],
            "accepted": len(latencies), "done": done, "failed": failed,
            "submit_ms": {"median": 1e3 * statistics.median(latencies),
                          "p99": 1e3 * latencies[int(0.99 * len(latencies))], "max": 1e3 * latencies[-1]},
            "service_jobs_per_second": {"while_submitting": done_then / seconds,
                                        "afterwards": (done - done_then) / max(drained - accepted, 1e-9)},
            "command_line_jobs_per_second": plain,
            "file_system": file_system(folder), "sync": "SQLite WAL, synchronous=FULL; files of a job flushed",
        }
    pathlib.Path(asked.out).mkdir(parents=True, exist_ok=True)
    text = json.dumps(result, indent=1)
    (pathlib.Path(asked.out) / "service.json").write_text(text + "\n", encoding="utf-8")
    print(text)


if __name__ == "__main__":
    main()
