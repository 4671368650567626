"""Submit latency and throughput of the service, open loop: jobs are due at fixed times, whether or not earlier answers came,
and latency counts from when a job was due. Load goes to loopback only.

Usage: service.py --program build/release/bin/stanchion --out build/bench [--jobs N] [--rate R] [--connections C] [--throughput-jobs N]
[--repeat N] [--parts latency,throughput]
"""

import argparse
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


def submit_open_loop(port, jobs, rate, connections, lead=1.0):
    """Latencies in seconds, and what went wrong."""
    body = json.dumps({"command": "check", "inputs": {"stiffness": "models/K.mtx"}})
    latencies, errors, lock = [], [], threading.Lock()
    begin = time.monotonic() + lead
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


OUTPUTS = {"--json": "result.json", "--html": "report.html", "--csv": "answer.csv", "--junit": "junit.xml",
           "--certificate": "certificate.json", "--log": "log.txt"}


def by_service(program, models, jobs, folder):
    """Jobs a second from the first submit to the last end, all submitted at once over eight connections."""
    process, port = start(program, folder + "/store-throughput", models)
    begin = time.monotonic()
    submit_open_loop(port, jobs, 1e9, 8, lead=0)
    submitted = time.monotonic() - begin
    while total(port, "done") < jobs:
        time.sleep(0.1)
    rate = jobs / (time.monotonic() - begin)
    process.send_signal(signal.SIGTERM)
    process.wait()
    return rate, submitted


def by_command_line(program, model, jobs, folder, processes):
    """The same jobs by xargs, `processes` at a time as the service runs them, each with the files a job leaves."""
    def words(number):
        place = f"{folder}/by-command-line/{number}"
        os.makedirs(place)
        outputs = " ".join(f"{option}={place}/{name}" for option, name in OUTPUTS.items())
        return f"check {model} --threads=1 {outputs}"

    lines = "\n".join(words(number) for number in range(jobs))
    begin = time.monotonic()
    subprocess.run(["xargs", "-P", str(processes), "-L", "1", program], input=lines, text=True, check=True,
                   stdout=subprocess.DEVNULL)
    return jobs / (time.monotonic() - begin)


def by_batch(program, model, jobs, folder):
    """The same jobs as one file; each leaves its answer, its page and its certificate."""
    lines = [json.dumps({"id": f"j{number}", "command": "check", "inputs": {"stiffness": str(model)}})
             for number in range(jobs)]
    path = pathlib.Path(folder) / "jobs.jsonl"
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    begin = time.monotonic()
    subprocess.run([program, "batch", path, "--quiet", "--reports", folder + "/reports", "--certificates",
                    folder + "/certificates", "--logs", folder + "/logs"], check=True)
    return jobs / (time.monotonic() - begin)


def latency(asked, models, folder):
    process, port = start(asked.program, folder + "/store", models)
    latencies, errors = submit_open_loop(port, asked.jobs, asked.rate, asked.connections)
    end = time.monotonic() + asked.drain
    done_then = total(port, "done")
    while total(port, "queued") + total(port, "running") > 0 and time.monotonic() < end:
        time.sleep(0.2)
    result = {
        "jobs": asked.jobs, "rate": asked.rate, "connections": asked.connections, "errors": errors[:20],
        "accepted": len(latencies), "in_the_store": sum(total(port, state) for state in ("queued", "running", "done", "failed")),
        "done": total(port, "done"), "failed": total(port, "failed"),
        "submit_ms": {"median": 1e3 * statistics.median(latencies),
                      "p99": 1e3 * latencies[int(0.99 * len(latencies))], "max": 1e3 * latencies[-1]},
        "jobs_per_second_while_submitting": done_then / (asked.jobs / asked.rate),
    }
    process.send_signal(signal.SIGTERM)
    process.wait()
    return result


def throughput(asked, models, folder):
    """Each way in turn, several times; the median of each."""
    model, count = models / "K.mtx", asked.throughput_jobs
    rates = {"service": [], "command_line": [], "batch": []}
    for turn in range(asked.repeat):
        place = f"{folder}/{turn}"
        os.makedirs(place)
        rates["service"].append(by_service(asked.program, models, count, place)[0])
        rates["command_line"].append(by_command_line(asked.program, model, count, place, 2 * os.cpu_count()))
        rates["batch"].append(by_batch(asked.program, model, count, place))
    return {"jobs": count, "processors": os.cpu_count(), **{way: statistics.median(all_of) for way, all_of in rates.items()},
            "all": rates}


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("--program", required=True)
    parser.add_argument("--out", required=True)
    parser.add_argument("--jobs", type=int, default=5000)
    parser.add_argument("--rate", type=float, default=100)
    parser.add_argument("--connections", type=int, default=200)
    parser.add_argument("--drain", type=float, default=3600, help="seconds to wait for the jobs after the last submit")
    parser.add_argument("--throughput-jobs", type=int, default=500)
    parser.add_argument("--repeat", type=int, default=3)
    parser.add_argument("--parts", default="latency,throughput")
    asked = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        models = pathlib.Path(folder) / "models"
        models.mkdir()
        (models / "K.mtx").write_text(chain_text(), encoding="ascii")
        result = {"file_system": file_system(folder), "sync": "SQLite WAL, synchronous=FULL; files of a job flushed"}
        if "latency" in asked.parts:
            result["latency"] = latency(asked, models, folder)
        if "throughput" in asked.parts:
            result["jobs_per_second"] = throughput(asked, models, folder)
    pathlib.Path(asked.out).mkdir(parents=True, exist_ok=True)
    text = json.dumps(result, indent=1)
    (pathlib.Path(asked.out) / "service.json").write_text(text + "\n", encoding="utf-8")
    print(text)


if __name__ == "__main__":
    main()
