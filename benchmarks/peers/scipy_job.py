"""One local optimisation of a design with SciPy, timed inside.

    python3 benchmarks/peers/scipy_job.py DESIGN TARGET REPEATS [OPTIONS...]

Stops once the merit is at or below TARGET; TARGET 0 runs to convergence. One line of JSON a set
of options, as the Ceres program prints it.
"""

import os

for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ[name] = "1"

import json
import sys
import time

import numpy as np
import scipy.optimize

import expander


class Reached(Exception):
    """The target is reached."""


# `dogbox`, and `trf` with `lsmr`, were tried too: slower, or stuck, on every design.
OPTIONS = {
    # The whole Jacobian from one vectorised evaluation, exact to rounding.
    "trf": {"method": "trf"},
    # MINPACK; it knows no bounds.
    "lm-unbounded": {"method": "lm"},
    # What one gets without writing a Jacobian.
    "trf-differences": {"method": "trf", "jac": "2-point"},
}


def run(problem, target, options):
    low, high = problem.bounds()
    start = np.clip(problem.start(), low + 1e-12, high - 1e-12)
    best = np.inf

    def residuals(x):
        nonlocal best
        values = problem.residuals(x)
        merit = float(values @ values)
        if not np.isfinite(merit):
            return np.full_like(values, 1e8)
        best = min(best, merit)
        if merit <= target:
            raise Reached
        return values

    options = dict(options)
    jacobian = options.pop("jac", problem.jacobian)
    if options["method"] != "lm":
        options["bounds"] = (low, high)
    began = time.perf_counter()
    try:
        found = scipy.optimize.least_squares(
            residuals, start, jacobian, x_scale="jac", max_nfev=5000,
            ftol=1e-15, xtol=1e-15, gtol=1e-15, **options,
        )
        message, evaluations = found.message, int(found.nfev)
    except Reached:
        message, evaluations = "target reached", 0
    return time.perf_counter() - began, best, evaluations, message


def main():
    path, target, repeats = sys.argv[1], float(sys.argv[2]), int(sys.argv[3])
    problem = expander.load(path)
    problem.jacobian(problem.start())
    for name, options in OPTIONS.items():
        if sys.argv[4:] and name not in sys.argv[4:]:
            continue
        runs = [run(problem, target, options) for _ in range(repeats)]
        _, merit, evaluations, message = runs[-1]
        line = {
            "options": name, "merit": merit, "iterations": evaluations,
            "seconds": [seconds for seconds, *_ in runs], "message": message,
        }
        print(json.dumps(line), flush=True)


if __name__ == "__main__":
    main()
