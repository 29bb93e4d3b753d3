"""What defends the default, FixedPivot(moments=6): errors against a fine run, negative share and cost.

Each scheme runs on its own default grid (3, 4 and 8 sections per doubling for 6, 4 and 2 moments, 8 for
Sectional; more for narrow starts), and on the density of the default scheme, 3 per doubling.
"""

from __future__ import annotations

import warnings
from typing import Any

import numpy as np
from _common import BROWNIAN, MONOMERS, TAU, machine, mineral, seconds, table

import aggsim as ag
from aggsim.errors import AccuracyWarning
from aggsim.sizes import starting_grid

SCHEMES = {
    "moments=6": ag.FixedPivot(moments=6),
    "moments=4": ag.FixedPivot(moments=4),
    "moments=2": ag.FixedPivot(moments=2),
    "Sectional": ag.Sectional(),
}
FINE = 12  # sections per doubling of the fine run with moments=6 ...
FINE_KINK = 24  # ... and where the kernel has a kink, which holds every scheme to second order


def cases() -> dict[str, tuple[Any, Any, float, int]]:
    """Kernel, start, time, and sections per doubling of the fine run."""
    latex = ag.Compact(ag.Particles(diameter=0.4e-6, density=1055.0))
    water = ag.Medium.water(temperature=298.15)
    brownian = ag.kernels.brownian(latex, water)
    _, three = mineral("compact")
    lognormal = ag.LogNormal(median_diameter=0.4e-6, gsd=1.4, volume_fraction=1e-4)
    coarse = ag.LogNormal(median_diameter=2e-6, gsd=1.4, volume_fraction=1e-4)
    box = ag.Box(smallest_diameter=0.2e-6, largest_diameter=0.8e-6, volume_fraction=1e-4)
    return {
        "Brownian, monodisperse": (BROWNIAN, MONOMERS, TAU, FINE),
        "Brownian, lognormal": (brownian, lognormal, 600.0, FINE),
        "three mechanisms, lognormal": (three, coarse, 300.0, FINE_KINK),
        "Brownian, box": (brownian, box, 600.0, FINE),
        "additive, exponential": (
            ag.kernels.additive(1.0),
            ag.Exponential(mean_volume=1.0, number=1.0),
            2.0,
            FINE,
        ),
    }


def figures(result: ag.Result) -> Any:
    """M0, M2, d10, d50 and d90 by volume at the last time."""
    quantiles = result.quantile_diameter(np.array([0.1, 0.5, 0.9]))[-1]
    return np.array([result.total_number()[-1], result.moment(2)[-1], *quantiles])


def row(
    name: str, vessel: Any, start: Any, time: float, scheme: Any, grid: ag.SizeGrid, fine: Any
) -> list[Any]:
    """Cells of one scheme on one grid."""

    def run() -> ag.Result:
        return ag.simulate(vessel, start, [time], grid=grid, scheme=scheme)

    result = run()
    ratio = grid.volume[-1] / grid.volume[-2]
    return [
        name,
        f"{np.log(2.0) / np.log(ratio):.0f}",
        len(grid),
        *(f"{error:.0e}" for error in np.abs(figures(result) / fine - 1.0)),
        f"{result.balance.negative_share.max() + 0.0:.0e}",
        result.stats.rate_evaluations,
        f"{1e3 * seconds(run, repeats=5)[0]:.1f}",
    ]


def main() -> None:
    machine()
    warnings.simplefilter("ignore", AccuracyWarning)  # the share of negative volume is in the table
    header = ["scheme", "per doubling", "sections", "error of M0", "of M2", "of d10", "of d50", "of d90"]
    header += ["negative share", "evaluations", "time [ms]"]
    for case, (kernel, start, time, per_doubling) in cases().items():
        vessel = ag.Batch(kernel)
        default = ag.FixedPivot()
        reached = ag.simulate(vessel, start, [time]).grid.volume[-1]
        grid = starting_grid(start, per_doubling=per_doubling).extended(reached)
        fine = figures(ag.simulate(vessel, start, [time], grid=grid, scheme=default, rtol=1e-9))
        rows = []
        for name, scheme in SCHEMES.items():
            own = scheme.default_grid(start).extended(reached)
            rows.append(row(name, vessel, start, time, scheme, own, fine))
        for name, scheme in list(SCHEMES.items())[1:]:
            geometric = isinstance(scheme, ag.Sectional)
            equal = starting_grid(start, per_doubling=3, geometric=geometric).extended(reached)
            rows.append(row(name, vessel, start, time, scheme, equal, fine))
        table(f"{case} (fine run: {len(grid)} sections, rtol = 1e-9)", header, rows)


if __name__ == "__main__":
    main()
