"""Writes the reference of tests/published/sweep.rs, every point of one plan:

    python3 benchmarks/peers/sweep.py

Each point is the plan's design with the values of the axes set, minimised by
`scipy.optimize.least_squares` on the residuals of `expander.py` from the design's own start,
within the same bounds; nothing is passed on from point to point.
"""

import itertools
import json
import platform

import numpy as np
import scipy

import expander
import reference

PLAN = {
    "format": "drawtube-plan/1",
    "design": "benchmarks/designs/three-singlets.json",
    "axes": [
        {"at": "/states/4/ratio", "values": [5.6, 6.0, 6.4]},
        {"at": "/groups/1/elements/0/thicknesses_mm/0", "values": [1.7, 2.0, 2.3, 2.6]},
    ],
}


def set_value(document, address, value):
    *steps, last = [int(s) if s.isdigit() else s for s in address.split("/")[1:]]
    for step in steps:
        document = document[step]
    document[last] = value


def main():
    root = reference.HERE.parents[1]
    points = []
    for values in itertools.product(*(axis["values"] for axis in PLAN["axes"])):
        document = json.loads((root / PLAN["design"]).read_text(encoding="utf-8"))
        for axis, value in zip(PLAN["axes"], values):
            set_value(document, axis["at"], value)
        found = reference.solve(expander.Expander(document))
        merit = float((found.fun**2).sum())
        points.append({"values": list(values), "merit": merit})
        print(f"{values}: {merit:.9e} after {found.nfev}, {found.message}")
    text = json.dumps(
        {
            "provenance": {
                "script": "benchmarks/peers/sweep.py",
                "python": platform.python_version(),
                "numpy": np.__version__,
                "scipy": scipy.__version__,
                "solver": "scipy.optimize.least_squares, trf, x_scale jac, tolerances 1e-15",
            },
            "plan": PLAN,
            "points": points,
        },
        indent=1,
    )
    (reference.OUT.parent / "scipy-sweep.json").write_text(text + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
