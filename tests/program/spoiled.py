"""Matrices of sound models with something done to them."""


def push_along(path, pushed):
    """Writes the matrix with a spring at its equation 301 that pushes along instead of back."""
    lines = path.read_text(encoding="ascii").splitlines()
    at = next(k for k, line in enumerate(lines) if line.startswith("301 301 "))
    lines[at] = f"301 301 {-3 * float(lines[at].split()[2])!r}"
    pushed.write_text("\n".join(lines) + "\n", encoding="ascii")
