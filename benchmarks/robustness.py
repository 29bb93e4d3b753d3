"""The steep cases: Brownian + shear + settling together, up to 90 % of the time to gelation.

Each start runs towards gelation first, to learn when that is; then to 90 % of that time on the automatic
grid, and with every method on one grid that spans at least nine decades of volume.
"""

from __future__ import annotations

import itertools
import warnings
from typing import Any

import numpy as np
from _common import machine, mineral, one_thread, table, target

import aggsim as ag
from aggsim.errors import AccuracyWarning

VOLUME_FRACTION = 1e-4
LONG = 1e4  # s, beyond every gelation time here
METHODS = (ag.methods.LSODA(), ag.methods.BDF(), ag.methods.Radau())
HEADER = ["structure", "start", "gelation [s]", "outcome at 90 %", "sections", "decades"]
HEADER += ["evaluations, LSODA, automatic grid", *(method.name for method in METHODS)]
HEADER += ["negative share", "closure", "beyond the grid", "methods differ in M0", "in M2", "in d50"]


def starts() -> dict[str, Any]:
    """Starting distributions: narrow, wide, two peaks, box, and a rugged measured one."""
    limits = np.geomspace(0.5e-6, 20e-6, 17)
    middle = np.log(limits[:-1] * limits[1:]) / 2.0
    shares = np.exp(-0.5 * ((middle - np.log(4e-6)) / 0.6) ** 2)
    shares *= np.where(np.arange(16) % 4 == 1, 1.5, 1.0)
    half = VOLUME_FRACTION / 2.0
    small = ag.LogNormal(median_diameter=1e-6, gsd=1.3, volume_fraction=half)
    large = ag.LogNormal(median_diameter=8e-6, gsd=1.3, volume_fraction=half)
    return {
        "narrow (gsd 1.1)": ag.LogNormal(median_diameter=2e-6, gsd=1.1, volume_fraction=VOLUME_FRACTION),
        "wide (gsd 2)": ag.LogNormal(median_diameter=2e-6, gsd=2.0, volume_fraction=VOLUME_FRACTION),
        "two peaks": small + large,
        "box": ag.Box(smallest_diameter=1e-6, largest_diameter=4e-6, volume_fraction=VOLUME_FRACTION),
        "measured": ag.Measured.from_classes(
            limits, shares / shares.sum(), kind="volume", volume_fraction=VOLUME_FRACTION
        ),
    }


def figures(result: ag.Result) -> Any:
    """M0, M2 and d50 by volume at the last time."""
    return np.array([result.total_number()[-1], result.moment(2)[-1], result.quantile_diameter(0.5)[-1]])


def case(structure: str, start: Any) -> tuple[list[Any], list[ag.Result]]:
    """Cells of a row, and the four results: automatic grid, then one per method."""
    _, kernel = mineral(structure)
    vessel = ag.Batch(kernel)
    search = ag.simulate(vessel, start, [LONG], raise_unfinished=False)
    gelation = search.status.gelation_time
    if gelation is None:
        return ["not found", search.status.outcome.name.lower()], [search]
    times = [0.9 * gelation]
    free = ag.simulate(vessel, start, times, raise_unfinished=False)
    grid = free.grid.extended(1e9 * free.grid.volume[0])
    fixed = [
        ag.simulate(vessel, start, times, grid=grid, method=method, raise_unfinished=False)
        for method in METHODS
    ]
    results = [free, *fixed]
    last = [figures(result) for result in fixed]
    differences = np.max([np.abs(a / b - 1.0) for a, b in itertools.combinations(last, 2)], axis=0)
    completed = sum(result.status.completed for result in results)
    cells = [
        f"{gelation:.3g}",
        f"{completed} of {len(results)} completed",
        len(grid),
        f"{np.log10(grid.volume[-1] / grid.volume[0]):.1f}",
        *(result.stats.rate_evaluations for result in results),
        f"{max(result.balance.negative_share.max() for result in results):.0e}",
        f"{max(np.abs(result.balance.closure).max() for result in results):.0e}",
        f"{max((r.balance.beyond_grid[-1] / r.balance.initial for r in results), key=abs):.0e}",
        *(f"{difference:.0e}" for difference in differences),
    ]
    return cells, results


def main() -> None:
    one_thread()
    machine()
    warnings.simplefilter("ignore", AccuracyWarning)  # the share of negative volume is in the table
    rows: list[list[Any]] = []
    results: list[ag.Result] = []
    for structure in ("compact", "fractal"):
        for name, start in starts().items():
            cells, more = case(structure, start)
            rows.append([structure, name, *cells, *["-"] * (len(HEADER) - 2 - len(cells))])
            results += more
    table("Brownian + shear + settling at 90 % of the gelation time, moments=6, rtol = 1e-6", HEADER, rows)

    lsoda = [r.stats.rate_evaluations for r in results if r.settings["method"] == "LSODA"]
    unfinished = sum(not result.status.completed for result in results)
    target("runs that did not complete", float(unfinished), 0.0, at_most=True)
    target("rate evaluations of LSODA", float(max(lsoda)), 2000.0, at_most=True)
    negative = max(float(result.balance.negative_share.max()) for result in results)
    target("share of the volume in negative sections", negative, 1e-5, at_most=True)
    closure = max(float(np.abs(result.balance.closure).max()) for result in results)
    target("closure error of the volume balance", closure, 1e-11, at_most=True)


if __name__ == "__main__":
    main()
