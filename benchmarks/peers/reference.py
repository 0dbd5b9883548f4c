"""Writes the reference values of tests/published/scipy.rs, one file a design:

    python3 benchmarks/peers/reference.py [NAME...]

Residuals, and their Jacobian by imaginary steps, are computed by `expander.py` in extended
precision, every surface met by Newton's method; the minimum by
`scipy.optimize.least_squares` with that Jacobian, from the same start, within the same bounds.
"""

import json
import pathlib
import platform
import sys

import numpy as np
import scipy

import expander

HERE = pathlib.Path(__file__).resolve().parent
DESIGNS = HERE.parent / "designs"
OUT = HERE.parents[1] / "tests/published/data/scipy"


def numbers(array):
    return [float(value) for value in array]


def solve(problem):
    """The minimum from the design's own start, as tight as double precision lets it be."""
    low, high = problem.bounds()
    # The method wants to start strictly inside.
    start = np.clip(problem.start(), low + 1e-12, high - 1e-12)
    return scipy.optimize.least_squares(
        problem.residuals, start, problem.jacobian, (low, high),
        method="trf", x_scale="jac", max_nfev=20_000, ftol=1e-15, xtol=1e-15, gtol=1e-15,
    )


def reference(path):
    with open(path, encoding="utf-8") as file:
        document = json.load(file)
    problem = expander.Expander(document)
    exact = expander.Expander(document, dtype=np.longdouble, newton=True)
    found = solve(problem)
    end = problem.design_at(found.x)
    exact_end = expander.Expander(end, dtype=np.longdouble, newton=True)
    return {
        "provenance": {
            "script": "benchmarks/peers/reference.py",
            "design": f"benchmarks/designs/{path.name}",
            "python": platform.python_version(),
            "numpy": np.__version__,
            "scipy": scipy.__version__,
            "solver": "scipy.optimize.least_squares, trf, x_scale jac, tolerances 1e-15",
        },
        "start": {
            "residuals": numbers(exact.residuals(exact.start())),
            "jacobian": [numbers(row) for row in exact.jacobian(exact.start())],
        },
        "end": {
            "merit": float((exact_end.residuals(exact_end.start()) ** 2).sum()),
            "evaluations": int(found.nfev),
            "message": found.message,
            "residuals": numbers(exact_end.residuals(exact_end.start())),
            "design": end,
        },
    }


def main():
    OUT.mkdir(parents=True, exist_ok=True)
    for path in sorted(DESIGNS.glob("*.json")):
        if sys.argv[1:] and path.stem not in sys.argv[1:]:
            continue
        values = reference(path)
        text = json.dumps(values, indent=1)
        (OUT / path.name).write_text(text + "\n", encoding="utf-8")
        end = values["end"]
        print(f"{path.stem}: {end['merit']:.9e} after {end['evaluations']}, {end['message']}")


if __name__ == "__main__":
    main()
