"""Certified brackets of the cylinder specimen against two closed forms, with the order of convergence.

1. Donnell's shallow shell, classical simple supports, m half waves along and n waves around, a = m pi / L, b = n / R:
   N = D (a^2 + b^2)^2 / a^2 + E t a^2 / (R^2 (a^2 + b^2)^2). Its minimum over a and b is the classical load
   E t^2 / (R sqrt(3 (1 - nu^2))), 0.605 E t^2 / R for nu = 0.3: Timoshenko and Gere, Theory of Elastic Stability, 2nd ed.
   1961, ch. 11 (from memory). Exact for n = 0; otherwise it leaves out what is of order 1 / n^2.
2. The thin shell without that omission, membrane strains u,x, v,y + w/R, u,y + v,x and changes of curvature w,xx,
   w,yy - v,y/R, w,xy - v,x/R as in Timoshenko and Woinowsky-Krieger, Theory of Plates and Shells, 2nd ed. 1959, ch. 15 (from
   memory), the load working on v,x and w,x. The waves cos(ax) cos(by), sin(ax) sin(by), sin(ax) cos(by) of u, v, w meet
   these ends, so that each pair (m, n) is a matrix of order 3. This is what flat facets tend to.
"""

import math
import unittest

from program import ProgramTest

E, NU, RADIUS, THICKNESS, REFERENCE = 210e9, 0.3, 1.5, 0.025, 1e6  # N/m^2, 1, m, m, N/m
MEMBRANE = E * THICKNESS / (1 - NU * NU)
RIGIDITY = MEMBRANE * THICKNESS**2 / 12
CLASSICAL = E * THICKNESS**2 / (RADIUS * math.sqrt(3 * (1 - NU * NU)))
HALF_WAVE = math.pi * math.sqrt(RADIUS * THICKNESS) / (12 * (1 - NU * NU))**0.25  # of the ring-shaped mode of least load


def donnell(length, m, n):
    a, b = m * math.pi / length, n / RADIUS
    wave = (a * a + b * b)**2 / (a * a)
    return (RIGIDITY * wave + E * THICKNESS / (RADIUS**2 * wave)) / REFERENCE


def thin_shell(length, m, n):
    """The lower root f of det(S - f N a^2 I), S of order 2 after u is eliminated."""
    a, b = m * math.pi / length, n / RADIUS
    strains = (-a, 0, 0), (0, b, 1 / RADIUS), (-b, a, 0)
    curvatures = (0, 0, a * a), (0, b / RADIUS, b * b), (0, 2 * a / RADIUS, 2 * a * b)
    k = [[sum(modulus * (x[i] * x[j] + y[i] * y[j] + NU * (x[i] * y[j] + y[i] * x[j]) + (1 - NU) / 2 * xy[i] * xy[j])
              for modulus, (x, y, xy) in ((MEMBRANE, strains), (RIGIDITY, curvatures))) for j in range(3)] for i in range(3)]
    vv, vw, ww = (k[i][j] - k[i][0] * k[0][j] / k[0][0] for i, j in ((1, 1), (1, 2), (2, 2)))
    if n == 0:
        return ww / (REFERENCE * a * a)  # v turns the wall about its axis, apart from the rest
    return ((vv + ww) / 2 - math.hypot((vv - ww) / 2, vw)) / (REFERENCE * a * a)


class CylinderTest(ProgramTest):
    def lowest(self, aspect, along, around, many):
        """The lowest factors of a mesh, each with its multiplicity; certified, and narrower than 1e-8. The entries are rounded,
        so that a pair may be two values that agree to 13 digits (measured: 1.4e-13 apart): they are joined."""
        folder = self.folder / f"{along}x{around}"
        run = self.run_program("specimen", "cylinder", "--unknowns", 6 * along * around, "--aspect", aspect, "--format", "npz",
                               "--out", folder)
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        self.assertIn(f"{along} x {around} facets", " ".join(run.stdout.split()))
        document = self.expect(0, "bracket", folder / "K.npz", "--geometric", folder / "G.npz", "--dofs", folder / "dofs.csv",
                               "--first", many)
        for value in document["critical"]:
            self.assertLess(value["high"] - value["low"], 1e-8 * value["high"])
        joined = []
        for value in document["critical"]:
            middle, times = (value["low"] + value["high"]) / 2, value["multiplicity"]
            if joined and middle - joined[-1][0] < 1e-12 * middle:
                times += joined.pop()[1]
            joined.append((middle, times))
        return joined

    def expect_limits(self, aspect, coarse, fine, remainder):
        """`coarse` and `fine`, of half the mesh width, map waves (m, n) to factors: errors fall with the square of the mesh
        width, and without that square the factors meet the thin shell within `remainder`."""
        for wave, value in fine.items():
            limit = thin_shell(aspect * RADIUS, *wave)
            extrapolated = value + (value - coarse[wave]) / 3
            told = f"{wave}: {coarse[wave]} {value} towards {limit}"
            self.assertLess(abs(extrapolated / limit - 1), remainder, told)
            # The share that Donnell leaves out is positive, of order 1 / n^2.
            left_out = donnell(aspect * RADIUS, *wave) / limit - 1
            self.assertGreaterEqual(left_out, -1e-12)
            self.assertLess(left_out, 1e-12 if wave[1] == 0 else 2 / wave[1]**2)

    def test_ring_mode_at_the_classical_load_among_pairs(self):
        # One half wave of the ring-shaped mode fits between the ends: its load is the classical one, once; the modes with
        # n = 1, 2, 3 waves lie close by, each twice.
        aspect = HALF_WAVE / RADIUS
        self.assertAlmostEqual(donnell(HALF_WAVE, 1, 0) * REFERENCE / CLASSICAL, 1, places=12)
        self.assertAlmostEqual(CLASSICAL * RADIUS / (E * THICKNESS**2), 0.605, places=3)
        found = {}
        for along, around in ((8, 225), (16, 451)):
            values = self.lowest(aspect, along, around, 7)
            self.assertEqual(sorted(times for _, times in values), [1, 2, 2, 2])
            (ring,) = (value for value, times in values if times == 1)
            pairs = [value for value, times in values if times == 2]
            found[along] = {(1, 0): ring, (1, 1): pairs[0], (1, 2): pairs[1], (1, 3): pairs[2]}
        # Measured: coefficients 0.5998 and 0.6039 towards 0.6052; 4.5e-5 at most after extrapolation.
        self.expect_limits(aspect, found[8], found[16], 6e-5)
        errors = [found[along][1, 0] * REFERENCE / CLASSICAL - 1 for along in (8, 16)]
        self.assertAlmostEqual(math.log2(errors[0] / errors[1]), 2, delta=0.05)  # measured: 1.98

    def test_pairs_of_waves_around(self):
        order = {126: [(1, 7), (2, 6), (2, 7), (2, 5), (3, 0)], 252: [(1, 7), (2, 6), (2, 7), (2, 5), (1, 6), (3, 0)]}
        found = {}
        for along, around in ((12, 126), (24, 252)):
            waves = order[around]
            values = self.lowest(0.6, along, around, sum(2 if n else 1 for _, n in waves))
            self.assertEqual([times for _, times in values], [2 if n else 1 for _, n in waves])
            found[along] = {wave: value for wave, (value, _) in zip(waves, values)}
        common = {wave: value for wave, value in found[24].items() if wave in found[12]}
        # Measured: 5.3e-4 for (3, 0), which has eight facets to a half wave, at most 1.8e-4 for the others. (48 x 503 facets,
        # measured once: at most 3.1e-5.)
        self.expect_limits(0.6, found[12], common, 6e-4)
        for wave in common:
            if wave == (1, 7):
                continue  # its errors nearly cancel: 3.3e-4 and 4.6e-5
            errors = [found[along][wave] / thin_shell(0.6 * RADIUS, *wave) - 1 for along in (12, 24)]
            self.assertAlmostEqual(math.log2(errors[0] / errors[1]), 2, delta=0.1)  # measured: 1.92 to 1.95

    def test_a_crowd_takes_few_factorizations(self):
        # Seen from 0 the twenty lowest of this long cylinder lie within 3 % of each other, and the crowd goes on behind them:
        # 1,083 factorizations by counts, and an interval of 1e-6 each, where the search does not go near them.
        run = self.run_program("specimen", "cylinder", "--unknowns", 6000, "--aspect", 4, "--format", "npz", "--out", self.folder)
        self.assertEqual((run.returncode, run.stderr), (0, ""))
        model = self.folder / "K.npz", "--geometric", self.folder / "G.npz", "--dofs", self.folder / "dofs.csv"
        first = self.expect(0, "bracket", *model, "--first", 20)
        end = first["complete"]["to"]
        below = self.expect(0, "bracket", *model, "--below", end)
        # The same load the other way round: every factor changes its sign.
        mirrored = self.expect(0, "bracket", *model, "--load-sign", "minus", "--side", "negative", "--first", 20)
        both = self.expect(0, "bracket", *model, "--side", "both", "--first", 20)
        around = self.expect(0, "bracket", *model, "--from", -end, "--to", end)
        self.assertLess(both["complete"]["from"], -44)
        for document in first, below, mirrored, both, around:
            self.assertEqual({value["level"] for value in document["critical"]} | {document["complete"]["level"]}, {"proved"})
            self.assertEqual(sum(value["multiplicity"] for value in document["critical"]), document["complete"]["count"])
            self.assertLessEqual(document["work"]["factorizations"], 6 + len(document["critical"]) / 4)
            self.assertLessEqual({value["multiplicity"] for value in document["critical"]}, {1, 2})
            for value in document["critical"]:
                self.assertLess(value["high"] - value["low"], 1e-8 * abs(value["high"]))
        self.assertGreaterEqual(first["complete"]["count"], 20)
        for other in below, both, around:  # under tension it does not buckle
            for a, b in zip(first["critical"], other["critical"], strict=True):
                self.assertLess(max(a["low"], b["low"]), min(a["high"], b["high"]))
        for a, b in zip(first["critical"], reversed(mirrored["critical"]), strict=True):
            self.assertLess(max(a["low"], -b["high"]), min(a["high"], -b["low"]))
        # Counts alone, between the values: as many on either side of every gap that four digits can name.
        values = first["critical"]
        gaps = [(a["high"] + b["low"]) / 2 for a, b in zip(values, values[1:]) if b["low"] - a["high"] > 1e-3]
        self.assertGreater(len(gaps), 5)
        document = self.expect(0, "count", *model, "--at", ",".join(map(repr, gaps)))
        for gap, count in zip(gaps, document["counts"], strict=True):
            self.assertEqual(count["below"], sum(value["multiplicity"] for value in values if value["high"] < gap))


if __name__ == "__main__":
    unittest.main()
