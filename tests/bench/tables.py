"""Markdown tables of a benchmark run; see ladder.py."""

COLUMNS = ["model", "rows", "question", "program", "ordering", "mode", "level", "factorizations", "order + analyse s", "numeric s (least)",
           "CPU s", "GFLOP/s", "of dgemm", "flops e9", "L entries e6", "peak over matrix MB", "delayed", "negative",
           "ratio numeric", "ratio all", "ratio numeric CPU", "ratio all CPU", "ratio memory"]

LEGEND = """Medians over the repetitions; one process each, ours and theirs in turn. `least`: the fastest repetition.
CPU s: user + system of the numeric phase over all threads (a BLAS thread that spins counts). GFLOP/s: flops of the
program's own ordering without relaxation zeros, over the numeric wall clock. `of dgemm`: against the best rate that
the dense product reached in this block on as many single-threaded workers. Peak: VmHWM of the process over its
resident set with only the matrix loaded. `ratio`: their figure over that of `stanchion` (one factorization) on the
same question, above 1 we are ahead; `all` includes ordering and analysis. On a busy machine compare CPU seconds on
one thread. `stanchion, certified` does the whole certificate: one factorization for a definite matrix, two offsets or
more, or the relative test, otherwise; the peers give no certificate. The first table of a block sets our fastest
certified answer against the fastest run of each peer, its own order or ours. A MUMPS built without METIS orders by SCOTCH or AMF; `our order` gives
it ours. Threads: our workers; for the peers the threads of the BLAS.
`!` marks a run that stopped, broke down, failed or was left unresolved.
"""


def seconds_before_numeric(line):
    return line["form_seconds"] + line["order_seconds"] + line["analyse_seconds"]


def ratio(theirs, ours):
    return f"{theirs / ours:.2f}" if ours > 0 else ""


def mode(line):
    kept = "L kept" if line["factor_kept"] else "L discarded"
    return ("no pivoting, " if line["mode"] == "definite" else "LDL^T, ") + kept


def level(line):
    """What stands behind the answer: nothing unless a certificate was made."""
    return f"{line['level']} ({line['method']})" if line.get("certified") else "none"


def whole(line):
    return seconds_before_numeric(line) + line["numeric_seconds"]


def fastest(results, start):
    """The fastest valid contender whose label starts so."""
    lines = [line for label, line in results.items() if label.startswith(start) and line["valid"]]
    return min(lines, key=whole, default=None)


def summary(block):
    """One row a question: the whole of the certified answer against the whole of one uncertified factorization."""
    lines = ["| model | rows | question | certified: order + analyse + form + numeric s | level, factorizations | MUMPS s | CHOLMOD s | "
             "times as fast as the faster | peak over matrix MB | of MUMPS's |", "|" + "---|" * 10]
    for entry in block["rows"]:
        ours = fastest(entry["results"], "stanchion, certified")
        peers = [fastest(entry["results"], name) for name in ("MUMPS", "CHOLMOD")]
        if ours is None or not any(peers):
            continue
        best = min(whole(line) for line in peers if line)
        memory = f"{ours['increase_over_matrix_bytes'] / peers[0]['increase_over_matrix_bytes']:.2f}" if peers[0] else ""
        cells = [entry["model"], ours["rows"], entry["question"], f"{whole(ours):.3f}",
                 f"{ours['level']}, {ours['factorizations']}", *(f"{whole(line):.3f}" if line else "" for line in peers),
                 f"{best / whole(ours):.2f}", f"{ours['increase_over_matrix_bytes'] / 1e6:.0f}", memory]
        lines.append("| " + " | ".join(str(cell) for cell in cells) + " |")
    return lines


def dgemm_rate(block):
    key = "gflops_one_thread" if block["threads"] == 1 else "gflops_two_workers"
    return max(line[key] for line in block["dgemm"])


def row(entry, label, line, ours, rate):
    cells = [entry["model"], line["rows"], entry["question"], label + ("" if line["valid"] else " !"),
             line["ordering"], mode(line), level(line), line["factorizations"], f"{seconds_before_numeric(line):.3f}",
             f"{line['numeric_seconds']:.3f} ({line['least_numeric_seconds']:.3f})",
             f"{line['numeric_cpu_seconds']:.3f}", f"{line['gflops']:.1f}", f"{100 * line['gflops'] / rate:.0f} %",
             f"{line['factor_flops'] / 1e9:.2f}", f"{line['factor_entries'] / 1e6:.2f}",
             f"{line['increase_over_matrix_bytes'] / 1e6:.0f}", line["delayed_pivots"], line["negative"]]
    if ours is None or label.startswith("stanchion"):
        cells += [""] * 5
    else:
        cells += [ratio(line["numeric_seconds"], ours["numeric_seconds"]), ratio(whole(line), whole(ours)),
                  ratio(line["numeric_cpu_seconds"], ours["numeric_cpu_seconds"]),
                  ratio(line["whole_cpu_seconds"], ours["whole_cpu_seconds"]),
                  ratio(line["increase_over_matrix_bytes"], ours["increase_over_matrix_bytes"])]
    return "| " + " | ".join(str(cell) for cell in cells) + " |"


def heading(block, rate):
    loads = [entry["load_average"] for entry in block["rows"]]
    blas_threads = max(line["gflops_two_blas_threads"] for line in block["dgemm"])
    return (f"{block['dgemm'][0]['blas']}; dgemm at most {rate:.1f} GFLOP/s on {block['threads']} worker(s), "
            f"{blas_threads:.1f} on two threads of the BLAS. Load average {min(loads):.1f} to {max(loads):.1f}.")


def markdown(blocks):
    lines = ["# Side by side with the peers", "", LEGEND]
    for block in blocks:
        if not block["rows"]:
            continue
        rate = dgemm_rate(block)
        lines += [f"## BLAS {block['variant']}, {block['threads']} thread(s)", "", heading(block, rate), "", *summary(block), "",
                  "| " + " | ".join(COLUMNS) + " |", "|" + "---|" * len(COLUMNS)]
        for entry in block["rows"]:
            ours = entry["results"].get("stanchion")
            lines += [row(entry, label, line, ours, rate) for label, line in entry["results"].items()]
        lines.append("")
    return "\n".join(lines)
