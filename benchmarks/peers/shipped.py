"""The shipped designs with all their limits, by SciPy's SLSQP; writes shipped.json for
tests/published/scipy.rs, or with names only tells.

    python3 benchmarks/peers/shipped.py [NAME...]

Limits on single numbers are bounds; the rest (edges, housing, dependent spacings, travel,
incidence, internal focus) are inequality constraints, from their definitions, with gradients by
imaginary steps. Variables are scaled by the columns of the Jacobian and the run is begun anew,
rescaled, from where the last one ended until that no longer helps.
"""

import json
import pathlib
import platform
import sys
import time

import numpy as np
import scipy
import scipy.optimize

import expander

ROOT = pathlib.Path(__file__).resolve().parents[2]
CONFIGS = ROOT / "configs"
OUT = ROOT / "tests/published/data/scipy"


class Limits:
    """What must stay at or above zero."""

    def __init__(self, problem):
        self.problem = problem
        self.limits = problem.document.get("limits", {})
        groups = problem.document["groups"]
        self.first_surface = []
        surfaces = 0
        for group in groups:
            self.first_surface.append(surfaces)
            surfaces += sum(len(element["radii_mm"]) for element in group["elements"])
        self.surfaces = surfaces
        self.fixed = [group["name"] in problem.document["housing"]["fixed"] for group in groups]

    def batch(self, x):
        p = self.problem
        with np.errstate(all="ignore"):
            curvature, asphere, gaps = p._place(x)
        lines = p.first_line
        shape = (len(x), len(p.lines), 1)
        gaps = [np.broadcast_to(gap, shape)[:, lines, 0] for gap in gaps]
        rows = []
        self._edges(curvature, asphere, gaps, rows)
        self._housing(gaps, rows)
        if "incidence_deg" in self.limits:
            self._incidence(x, rows)
        if self.limits.get("internal_focus") == "forbid":
            self._focus(curvature, x, rows)
        rows = [np.broadcast_to(row, (len(x), np.shape(row)[-1])) for row in rows]
        return np.concatenate(rows, axis=1)

    def _sag(self, curvature, asphere, i, height):
        k = 1 + self.problem.conic[i]
        return self.problem._profile(curvature[i], k, asphere[i], height)[0][..., 0]

    def _edges(self, curvature, asphere, gaps, rows):
        semi = self.problem.semi
        for i, gap in enumerate(self.problem.gaps):
            glass = gap[0] == "thickness"
            limit = self.limits.get("edge_thickness_mm" if glass else "edge_gap_mm")
            if limit is None:
                continue
            height = semi[i] if glass else min(semi[i], semi[i + 1])
            front = self._sag(curvature, asphere, i, height)
            rear = self._sag(curvature, asphere, i + 1, height)
            rows.append(gaps[i] + rear - front - limit["min"])

    def _housing(self, gaps, rows):
        track = self.problem.document["housing"]["track_mm"]
        rows.append(track - sum(gaps))
        spacing = self.limits.get("spacing_mm", {}).get("min", 0.0)
        if self.problem.both_ends:
            last = max(i for i, gap in enumerate(self.problem.gaps) if gap[0] == "spacing")
            rows.append(gaps[last] - spacing)
        if "travel_mm" not in self.limits:
            return
        most = self.limits["travel_mm"]["max"]
        for g, fixed in enumerate(self.fixed):
            if fixed:
                continue
            # The last group is fixed in every shipped design: places are told from the rear.
            place = track - sum(gaps[self.first_surface[g]:])
            for k in range(place.shape[1]):
                for other in range(place.shape[1]):
                    if k != other:
                        rows.append((most - (place[:, k] - place[:, other]))[:, None])

    def _incidence(self, x, rows):
        p = self.problem
        heights, p.heights = p.heights, np.array([p.document["beam"]["traced_to"] * p.radius])
        cosines = []
        meet = p._meet

        def watched(i, c, terms, y, z, up, along):
            found = meet(i, c, terms, y, z, up, along)
            slope = found[3]
            cosines.append((along - slope * up) / np.sqrt(1 + slope * slope))
            return found

        p._meet = watched
        with np.errstate(all="ignore"):
            p.paths(*p._place(x), len(x))
        p._meet, p.heights = meet, heights
        least = np.cos(np.radians(self.limits["incidence_deg"]["max"]))
        for cosine in cosines:
            rows.append(cosine[:, p.first_line, 0] - least)

    def _focus(self, curvature, x, rows):
        p = self.problem
        gaps = p._place(x)[2]
        y, angle = 1, 0
        for i, c in enumerate(curvature):
            if i:
                y = y + gaps[i - 1] * angle
                full = np.broadcast_to(y, (len(x), len(p.lines), 1))
                rows.append(full[:, p.first_line, 0] - 1e-3)
            n, behind = p.index[i], p.index[i + 1]
            angle = (n * angle - (behind - n) * c * y) / behind

    def values(self, x):
        return self.batch(np.asarray(x)[None])[0]

    def jacobian(self, x):
        points = np.asarray(x)[None] + 1e-30j * np.eye(len(x))
        return self.batch(points).imag.T / 1e-30


def solve(problem, rounds=60):
    limits = Limits(problem)
    low, high = problem.bounds()
    x = np.clip(problem.start(), low, high)
    best = np.inf
    quiet = 0
    for _ in range(rounds):
        scale = 1 / np.maximum(np.linalg.norm(problem.jacobian(x), axis=0), 1e-12)

        def merit(u):
            with np.errstate(all="ignore"):
                r = problem.residuals(x + scale * u)
            value = float(r @ r)
            return value if np.isfinite(value) else 1e12

        def gradient(u):
            at = x + scale * u
            return 2 * scale * (problem.jacobian(at).T @ problem.residuals(at))

        constraint = {
            "type": "ineq",
            "fun": lambda u: limits.values(x + scale * u),
            "jac": lambda u: limits.jacobian(x + scale * u) * scale,
        }
        ends = list(zip((low - x) / scale, (high - x) / scale))
        found = scipy.optimize.minimize(
            merit, np.zeros(len(x)), jac=gradient, bounds=ends, constraints=[constraint],
            method="SLSQP", options={"maxiter": 2000, "ftol": 1e-16},
        )
        at = np.clip(x + scale * found.x, low, high)
        crossed = -min(limits.values(at).min(), 0)
        value = merit(found.x)
        if not np.isfinite(value) or crossed > 1e-3:
            x = at if crossed > 1e-3 and np.isfinite(value) and value < 1e11 else x
            quiet += 1
        else:
            quiet = quiet + 1 if value > best * (1 - 1e-6) else 0
            best = min(best, value)
            x = at
        if quiet >= 4:
            break
    return x, best, -min(limits.values(x).min(), 0)


def main():
    minima = {}
    for path in sorted(CONFIGS.glob("*.json")):
        with open(path, encoding="utf-8") as file:
            document = json.load(file)
        if document["format"] != "drawtube/1" or (sys.argv[1:] and path.stem not in sys.argv[1:]):
            continue
        began = time.perf_counter()
        _, merit, crossed = solve(expander.Expander(document))
        took = time.perf_counter() - began
        print(f"{path.stem}: {merit:.8e}, limits crossed by {crossed:.1e}, {took:.1f} s", flush=True)
        minima[path.stem] = {"merit": merit, "limits_crossed_by": crossed, "design": document}
    if sys.argv[1:]:
        return
    values = {
        "provenance": {
            "script": "benchmarks/peers/shipped.py",
            "python": platform.python_version(),
            "numpy": np.__version__,
            "scipy": scipy.__version__,
            "solver": "scipy.optimize.minimize, SLSQP, begun anew until that no longer helps",
        },
        "minima": minima,
    }
    text = json.dumps(values, indent=1)
    (OUT / "shipped.json").write_text(text + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
