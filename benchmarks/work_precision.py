"""Error against time, and the time to bring M2 within 1e-4: every scheme of ours, and the NumPy twin.

`--reference` computes the reference figures anew (the discrete equation, about 10 s) and prints them.
"""

from __future__ import annotations

import itertools
import math
import sys
import warnings
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from _common import BROWNIAN, M0, M2, MONOMERS, TAU, brownian, machine, one_thread, seconds, table, target
from numpy_twin import run

import aggsim as ag
from aggsim.errors import AccuracyWarning

LARGEST = 2000.0  # monomers; 1e-16 of the volume is larger at tau = 100
D50 = 5.50949  # volume median, in (monomer volume)**(1/3); from the same run as M0 and M2
Row = list[Any]


@dataclass(frozen=True)
class Case:
    """A start, its grids, and its figures M0, M2 and d50 at tau = 100."""

    name: str
    start: Any
    grid: Callable[[float, bool], ag.SizeGrid]
    figures: tuple[float, float, float]


def monodisperse() -> Case:
    """One size; its figures come from the discrete equation, every multiple of the monomer on its own."""

    def grid(per_doubling: float, geometric: bool) -> ag.SizeGrid:
        if geometric:
            return ag.SizeGrid.geometric(smallest=1.0, largest=LARGEST, per_doubling=per_doubling)
        return ag.SizeGrid.monomers_then_geometric(1.0, LARGEST, per_doubling)

    return Case("monodisperse", MONOMERS, grid, (M0, M2, D50))


def exponential() -> Case:
    """A smooth start on geometric grids; its figures come from a sixth-order run at 12 sections per doubling."""
    start = ag.Exponential(mean_volume=1.0, number=1.0)

    def grid(per_doubling: float, _: bool) -> ag.SizeGrid:
        return ag.SizeGrid.geometric(smallest=1e-3, largest=2.0 * LARGEST, per_doubling=per_doubling)

    fine = ag.simulate(ag.Batch(BROWNIAN), start, TAU, grid=grid(12, True), rtol=1e-10)
    figures = fine.total_number(), fine.moment(2), fine.quantile_diameter(0.5)
    m0, m2, d50 = (float(f[-1]) for f in figures)
    return Case("exponential", start, grid, (m0, m2, d50))


AIM = 1e-4
OURS = {  # scheme and sections per doubling
    "FixedPivot(moments=2)": (ag.FixedPivot(moments=2), (1, 2, 3, 6, 12, 24, 48)),
    "FixedPivot(moments=4)": (ag.FixedPivot(moments=4), (1.5, 2, 3, 4, 6, 8)),
    "FixedPivot(moments=6)": (ag.FixedPivot(moments=6), (1.5, 2, 3, 4, 6, 8)),
    "Sectional()": (ag.Sectional(), (1, 2, 3, 4, 6, 8)),
}
TWINS = {  # form and sections per doubling; beyond these the stacked matrices lose to the sparse one
    "NumPy, stacked matrices": ("stacked matrices", (3, 6, 12)),
    "NumPy, sparse matrix": ("sparse matrix", (3, 6, 12, 24, 36, 48, 60)),
    "NumPy, bincount": ("bincount", (3, 6, 12, 24, 36, 48, 60)),
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


def ours(name: str, case: Case) -> list[Row]:
    """Rows [name, per doubling, sections, seconds, error of M0, of M2, of d50] of a scheme."""
    scheme, densities = OURS[name]
    rows: list[Row] = []
    for per_doubling in densities:
        grid = case.grid(per_doubling, isinstance(scheme, ag.Sectional))

        def simulate(grid: ag.SizeGrid = grid) -> ag.Result:
            return ag.simulate(ag.Batch(BROWNIAN), case.start, TAU, grid=grid, scheme=scheme)

        result = simulate()
        figures = result.total_number(), result.moment(2), result.quantile_diameter(0.5)
        errors = [abs(float(f[-1]) / r - 1.0) for f, r in zip(figures, case.figures, strict=True)]
        rows.append([name, per_doubling, len(grid), timed(simulate), *errors])
    return rows


def twin(name: str, case: Case) -> list[Row]:
    """The same rows for the NumPy twin with moments=2; it has no quantiles."""
    form, densities = TWINS[name]
    rows: list[Row] = []
    for per_doubling in densities:
        grid = case.grid(per_doubling, False)
        x, start = np.array(grid.volume), ag.FixedPivot(moments=2).project(case.start, grid)

        def call(x: Any = x, start: Any = start) -> Any:
            return run(x, brownian, 2, TAU, form, start=start)

        number, _ = call()
        errors = [
            abs(float(f) / r - 1.0) for f, r in zip((number.sum(), number @ x**2), case.figures, strict=False)
        ]
        rows.append([name, per_doubling, x.size, timed(call), *errors, "-"])
        if errors[1] < AIM:
            break
    return rows


def time_to_aim(rows: list[list[Any]]) -> float:
    """Time [s] at which the error of M2 passes the aim, log-log between two rows; infinite if it never does."""
    if rows[0][5] <= AIM:  # the coarsest grid is good enough
        return float(rows[0][3])
    for coarse, fine in itertools.pairwise(rows):
        if coarse[5] > AIM >= fine[5]:
            share = math.log(coarse[5] / AIM) / math.log(coarse[5] / fine[5])
            return float(coarse[3] * (fine[3] / coarse[3]) ** share)
    return math.inf


def show(case: Case) -> None:
    """Print both tables of one case."""
    groups = {name: ours(name, case) for name in OURS} | {name: twin(name, case) for name in TWINS}
    rows = [
        [*r[:3], f"{1e3 * r[3]:.1f}", *(f"{e:.0e}" if e != "-" else e for e in r[4:])]
        for g in groups.values()
        for r in g
    ]
    header = ["scheme", "per doubling", "sections", "time [ms]", "error of M0", "of M2", "of d50 by volume"]
    table(f"Brownian kernel, {case.name} start, tau = 100, rtol = 1e-6", header, rows)

    aims = {name: time_to_aim(group) for name, group in groups.items()}
    best = min(aims[name] for name in OURS)
    reached = [
        [n, f"{1e3 * t:.1f}" if t < math.inf else "not reached", f"{t / best:.0f}"] for n, t in aims.items()
    ]
    header = ["scheme", "time [ms]", "over the best of ours"]
    table(
        f"{case.name} start: time to an error of {AIM:g} in M2 (log-log between the rows above)",
        header,
        reached,
    )
    for name in ("NumPy, bincount", "NumPy, sparse matrix"):
        target(f"{case.name} start, time of {name} over the best of ours", aims[name] / best, 300.0)
    print()


def main() -> None:
    one_thread()
    machine()
    # coarse grids leave negative shares: that is what they cost
    warnings.simplefilter("ignore", AccuracyWarning)
    for case in (monodisperse(), exponential()):
        show(case)


if __name__ == "__main__":
    reference() if "--reference" in sys.argv[1:] else main()
