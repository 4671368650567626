"""Picture of a benchmark run: seconds of the whole answer against equations, one panel a model; see ladder.py."""

import math

import tables

PANEL_WIDTH, PANEL_HEIGHT, MARGIN = 300, 230, 54
SERIES = [("stanchion, certified", "#0b6e99", "", "circle"), ("MUMPS", "#b4502d", "7 4", "square"),
          ("CHOLMOD", "#5b5b66", "2 3", "diamond")]


def points(block, model, start):
    found = []
    for entry in block["rows"]:
        line = tables.fastest(entry["results"], start)
        if entry["model"] == model and entry["question"] == "positive definite?" and line:
            found.append((line["rows"], tables.whole(line)))
    return sorted(found)


def exponent(found):
    """Slope of the line through the points in logarithms, by least squares."""
    x = [math.log(n) for n, _ in found]
    y = [math.log(t) for _, t in found]
    mean_x, mean_y = sum(x) / len(x), sum(y) / len(y)
    return sum((a - mean_x) * (b - mean_y) for a, b in zip(x, y)) / sum((a - mean_x) ** 2 for a in x)


def mark(kind, x, y, colour):
    if kind == "circle":
        return f'<circle cx="{x:.1f}" cy="{y:.1f}" r="3.6" fill="{colour}"/>'
    turn = f' transform="rotate(45 {x:.1f} {y:.1f})"' if kind == "diamond" else ""
    return f'<rect x="{x - 3:.1f}" y="{y - 3:.1f}" width="6" height="6" fill="{colour}"{turn}/>'


def panel(block, model, left, top):
    series = [(name, colour, dash, kind, points(block, model, name)) for name, colour, dash, kind in SERIES]
    every = [point for *_, found in series for point in found]
    low_n, high_n = (math.log10(f(n for n, _ in every)) for f in (min, max))
    low_t, high_t = math.floor(math.log10(min(t for _, t in every))), math.ceil(math.log10(max(t for _, t in every)))
    width, height = PANEL_WIDTH - MARGIN - 12, PANEL_HEIGHT - MARGIN - 22

    def place(n, t):
        x = left + MARGIN + width * (math.log10(n) - low_n) / max(high_n - low_n, 1e-9)
        return x, top + 22 + height * (high_t - math.log10(t)) / (high_t - low_t)

    out = [f'<text x="{left + MARGIN}" y="{top + 12}" class="title">{model}, positive definite?</text>']
    for decade in range(low_t, high_t + 1):
        x, y = place(10 ** low_n, 10.0 ** decade)
        out += [f'<line x1="{x:.1f}" x2="{x + width:.1f}" y1="{y:.1f}" y2="{y:.1f}" class="grid"/>',
                f'<text x="{x - 6:.1f}" y="{y + 4:.1f}" text-anchor="end">{10.0 ** decade:g} s</text>']
    for n in sorted({round(n, -2) for n, _ in every}):
        x, y = place(max(n, 10 ** low_n), 10.0 ** low_t)
        label = f"{n / 1000:.0f}k"
        out.append(f'<text x="{x:.1f}" y="{y + 16:.1f}" text-anchor="middle">{label}</text>')
    for name, colour, dash, kind, found in series:
        if len(found) < 2:
            continue
        path = " ".join(f"{x:.1f},{y:.1f}" for x, y in (place(*point) for point in found))
        out.append(f'<polyline points="{path}" fill="none" stroke="{colour}" stroke-width="1.8" stroke-dasharray="{dash}"/>')
        out += [mark(kind, *place(*point), colour) for point in found]
    slopes = ", ".join(f"{name.split(',')[0]} n^{exponent(found):.2f}" for name, *_, found in series if len(found) > 2)
    if slopes:
        out.append(f'<text x="{left + MARGIN}" y="{top + PANEL_HEIGHT - 2}" class="note">{slopes}</text>')
    return out


def svg(blocks):
    """One row of panels a block; models with at least two sizes of the definite question."""
    rows = []
    for block in blocks:
        sizes = {}
        for entry in block["rows"]:
            if entry["question"] == "positive definite?" and tables.fastest(entry["results"], "stanchion, certified"):
                sizes.setdefault(entry["model"], set()).add(entry["unknowns"])
        rows.append((block, [model for model, found in sizes.items() if len(found) > 1]))
    width = max([len(models) for _, models in rows] + [1]) * PANEL_WIDTH + 20
    height = len(rows) * (PANEL_HEIGHT + 40) + 40
    out = [f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {width} {height}" width="{width}" height="{height}" '
           'font-family="sans-serif" font-size="11">',
           "<style>.title{font-weight:bold;font-size:12px}.grid{stroke:#ddd}.note{fill:#555;font-size:10px}</style>",
           f'<rect width="{width}" height="{height}" fill="#fff"/>']
    x = 20
    for name, colour, dash, kind in SERIES:
        out += [f'<line x1="{x}" x2="{x + 30}" y1="18" y2="18" stroke="{colour}" stroke-width="1.8" stroke-dasharray="{dash}"/>',
                mark(kind, x + 15, 18, colour), f'<text x="{x + 36}" y="22">{name}</text>']
        x += 60 + 7 * len(name)
    for number, (block, models) in enumerate(rows):
        top = 40 + number * (PANEL_HEIGHT + 40)
        out.append(f'<text x="20" y="{top + 10}">BLAS {block["variant"]}, {block["threads"]} thread(s): order, analysis, '
                   'numeric phase; ours with the certificate</text>')
        for column, model in enumerate(models):
            out += panel(block, model, column * PANEL_WIDTH, top + 16)
    out.append("</svg>")
    return "\n".join(out) + "\n"
