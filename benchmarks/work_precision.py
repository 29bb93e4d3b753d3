"""Error against time, and the time to bring M2 within 1e-4: every scheme of ours, and the NumPy twin.

`--reference` computes the reference figures anew (the discrete equation, about 10 s) and prints them.
"""

from __future__ import annotations

import itertools
import math
import sys
import warnings
from collections.abc import Callable
from typing import Any

import numpy as np
from _common import BROWNIAN, M0, M2, MONOMERS, TAU, brownian, machine, one_thread, seconds, table, target
from numpy_twin import run

import aggsim as ag
from aggsim.errors import AccuracyWarning

LARGEST = 2000.0  # monomers; 1e-16 of the volume is larger at tau = 100
D50 = 5.50949  # volume median, in (monomer volume)**(1/3); from the same run as M0 and M2
AIM = 1e-4
OURS = {  # scheme and sections per doubling
    "FixedPivot(moments=2)": (ag.FixedPivot(moments=2), (1, 2, 3, 6, 12, 24, 48)),
    "FixedPivot(moments=4)": (ag.FixedPivot(moments=4), (1, 1.5, 2, 3, 4, 6, 8)),
    "FixedPivot(moments=6)": (ag.FixedPivot(moments=6), (1, 1.5, 2, 3, 4, 6, 8)),
    "Sectional()": (ag.Sectional(), (1, 2, 3, 4, 6, 8)),
}
TWINS = {  # form and sections per doubling; beyond these the stacked matrices lose to the sparse one
    "NumPy, stacked matrices": ("stacked matrices", (3, 6, 12)),
    "NumPy, sparse matrix": ("sparse matrix", (3, 6, 12, 24, 36, 48)),
    "NumPy, bincount": ("bincount", (3, 6, 12, 24, 36, 48)),
}


def reference() -> None:
    """Compute and print M0, M2 and d50."""
    grid = ag.SizeGrid.monomers(1.0, 3600)
    result = ag.simulate(ag.Batch(BROWNIAN), MONOMERS, TAU, grid=grid, scheme=ag.Monomer(), rtol=1e-10)
    figures = (result.total_number(), result.moment(2), result.quantile_diameter(0.5))
    print("M0 = {:.10f}, M2 = {:.8f}, d50 = {:.5f}".format(*(float(f[-1]) for f in figures)))


def timed(function: Callable[[], Any]) -> float:
    """Median time [s]; few repeats where a call is long."""
    once = seconds(function, repeats=1)[0]
    return once if once > 0.5 else seconds(function, repeats=3 if once > 0.05 else 9)[0]


def ours(name: str) -> list[list[Any]]:
    """Rows [name, per doubling, sections, seconds, error of M0, of M2, of d50] of a scheme."""
    scheme, densities = OURS[name]
    rows = []
    for per_doubling in densities:
        if isinstance(scheme, ag.Sectional):
            grid = ag.SizeGrid.geometric(smallest=1.0, largest=LARGEST, per_doubling=per_doubling)
        else:
            grid = ag.SizeGrid.monomers_then_geometric(1.0, LARGEST, per_doubling)

        def simulate(grid: ag.SizeGrid = grid) -> ag.Result:
            return ag.simulate(ag.Batch(BROWNIAN), MONOMERS, TAU, grid=grid, scheme=scheme)

        result = simulate()
        errors = [
            result.total_number()[-1] / M0,
            result.moment(2)[-1] / M2,
            result.quantile_diameter(0.5)[-1] / D50,
        ]
        rows.append([name, per_doubling, len(grid), timed(simulate), *(abs(float(e) - 1.0) for e in errors)])
    return rows


def twin(name: str) -> list[list[Any]]:
    """The same rows for the NumPy twin with moments=2; it has no quantiles."""
    form, densities = TWINS[name]
    rows = []
    for per_doubling in densities:
        x = np.array(ag.SizeGrid.monomers_then_geometric(1.0, LARGEST, per_doubling).volume)
        number, _ = run(x, brownian, 2, TAU, form)
        time = timed(lambda: run(x, brownian, 2, TAU, form))  # noqa: B023
        errors = abs(number.sum() / M0 - 1.0), abs(number @ x**2 / M2 - 1.0)
        rows.append([name, per_doubling, x.size, time, *map(float, errors), "-"])
    return rows


def time_to_aim(rows: list[list[Any]]) -> float:
    """Time [s] at which the error of M2 passes the aim, log-log between two rows; infinite if it never does."""
    for coarse, fine in itertools.pairwise(rows):
        if coarse[5] > AIM >= fine[5]:
            share = math.log(coarse[5] / AIM) / math.log(coarse[5] / fine[5])
            return float(coarse[3] * (fine[3] / coarse[3]) ** share)
    return math.inf


def main() -> None:
    one_thread()
    machine()
    warnings.simplefilter(
        "ignore", AccuracyWarning
    )  # coarse grids leave negative shares: that is what they cost
    groups = {name: ours(name) for name in OURS} | {name: twin(name) for name in TWINS}
    rows = [
        [*r[:3], f"{1e3 * r[3]:.1f}", *(f"{e:.0e}" if e != "-" else e for e in r[4:])]
        for g in groups.values()
        for r in g
    ]
    header = ["scheme", "per doubling", "sections", "time [ms]", "error of M0", "of M2", "of d50 by volume"]
    table("Brownian kernel, monodisperse start, tau = 100, rtol = 1e-6", header, rows)

    aims = {name: time_to_aim(group) for name, group in groups.items()}
    best = min(aims[name] for name in OURS)
    rows = [
        [name, f"{1e3 * t:.1f}" if t < math.inf else "not reached", f"{t / best:.0f}"]
        for name, t in aims.items()
    ]
    table(
        f"Time to an error of {AIM:g} in M2 (log-log between the rows above)",
        ["scheme", "time [ms]", "over the best of ours"],
        rows,
    )
    for name in ("NumPy, bincount", "NumPy, sparse matrix"):
        target(f"time of {name} over the best of ours", aims[name] / best, 300.0)


if __name__ == "__main__":
    reference() if "--reference" in sys.argv[1:] else main()
