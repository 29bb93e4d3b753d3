"""Error against time of every scheme and order on five cases; draws them into schemes.png beside this file.

The error is that of M2 at the last time, against a sixth-order run at 16 sections per doubling and rtol = 1e-10
(closed forms agree with it to 1e-8 where there are any).
"""

from __future__ import annotations

import itertools
import warnings
from pathlib import Path
from typing import Any

import numpy as np
from _common import BROWNIAN, machine, one_thread, seconds, table

import aggsim as ag
from aggsim.errors import AggsimError

EXPONENTIAL = ag.Exponential(mean_volume=1.0, number=1.0)
SCHEMES: dict[str, tuple[Any, tuple[float, ...]]] = {
    "FixedPivot(moments=2)": (ag.FixedPivot(moments=2), (1, 2, 3, 6, 12, 24)),
    "FixedPivot(moments=4)": (ag.FixedPivot(moments=4), (1.5, 2, 3, 4, 6, 8)),
    "FixedPivot(moments=6)": (ag.FixedPivot(moments=6), (1.5, 2, 3, 4, 6, 8)),
    "Sectional()": (ag.Sectional(), (1, 2, 3, 6, 12, 24)),
    "CellAverage()": (ag.CellAverage(), (1, 2, 3, 6, 12, 24)),
    "FiniteVolume()": (ag.FiniteVolume(), (1, 2, 3, 6, 12, 24)),
}
MARKS = dict(zip(SCHEMES, "osDvx^", strict=True))


def shear(v: Any, w: Any) -> Any:
    """Rectilinear shear over its value for equal sizes."""
    return (np.cbrt(v) + np.cbrt(w)) ** 3 / 8.0


def settling(v: Any, w: Any) -> Any:
    """Differential settling of compact spheres, in its own units: a kink at equal sizes."""
    a, b = np.cbrt(v), np.cbrt(w)
    return (a + b) ** 2 * np.abs(a * a - b * b)


def cases() -> dict[str, tuple[ag.Batch, float, float]]:
    """Vessel, time, and largest volume of the grid."""
    halves = ag.Breakage(
        rate=ag.rates.power_law(coefficient=0.02, exponent=1.0), fragments=ag.fragments.uniform_binary()
    )
    own = ag.kernels.from_function
    return {
        "Brownian": (ag.Batch(BROWNIAN), 50.0, 4e3),
        "sum": (ag.Batch(ag.kernels.additive(1.0)), 1.5, 4e4),
        "shear": (ag.Batch(own(shear, name="shear")), 1.0, 4e4),
        "settling": (ag.Batch(own(settling, name="settling")), 0.2, 4e4),
        "constant with breakage": (ag.Batch(ag.kernels.constant(1.0), breakage=halves), 20.0, 4e2),
    }


def measure(vessel: ag.Batch, time: float, largest: float) -> list[tuple[str, float, int, float, float]]:
    """Rows of scheme, sections per doubling, sections, time [s], error of M2."""

    def run(scheme: Any, density: float, rtol: float = 1e-6) -> ag.Result:
        grid = ag.SizeGrid.geometric(smallest=1e-4, largest=largest, per_doubling=density)
        return ag.simulate(vessel, EXPONENTIAL, time, grid=grid, scheme=scheme, rtol=rtol)

    exact = float(run(ag.FixedPivot(moments=6), 16, 1e-10).moment(2)[-1])
    rows = []
    for name, (scheme, densities) in SCHEMES.items():
        for density in densities:
            try:
                result = run(scheme, density)
            except AggsimError:  # too coarse for this case
                continue
            error = abs(float(result.moment(2)[-1]) / exact - 1.0)
            taken = seconds(lambda s=scheme, d=density: run(s, d), repeats=3)[0]
            rows.append((name, density, len(result.grid), taken, error))
    return rows


def draw(found: dict[str, list[tuple[str, float, int, float, float]]]) -> None:
    """One panel per case, error against time on logarithmic axes."""
    import matplotlib

    matplotlib.use("Agg")
    import matplotlib.pyplot as plt

    colours = ("#0072B2", "#D55E00", "#009E73", "#56B4E9", "#CC79A7", "#E69F00")
    figure, axes = plt.subplots(2, 3, figsize=(10.5, 6.4), sharex=True, sharey=True)
    for ax, (case, rows) in zip(axes.flat, found.items(), strict=False):
        for (name, group), colour in zip(itertools.groupby(rows, lambda row: row[0]), colours, strict=False):
            points = list(group)
            times, errors = [1e3 * p[3] for p in points], [max(p[4], 1e-11) for p in points]
            look = {"marker": MARKS[name], "color": colour, "linewidth": 1.2, "markersize": 4}
            ax.loglog(times, errors, label=name, **look)
        ax.set_title(case, fontsize=10)
        ax.grid(alpha=0.3, which="major")
        ax.tick_params(labelbottom=True)
    axes[0, 0].set_xlim(1.0, 1000.0)
    for ax in (*axes[-1], axes[0, 2]):
        ax.set_xlabel("time of a run [ms]")
    for ax in axes[:, 0]:
        ax.set_ylabel("relative error of M2 [-]")
    axes.flat[-1].axis("off")
    handles, labels = axes.flat[0].get_legend_handles_labels()
    axes.flat[-1].legend(handles, labels, loc="center", fontsize=9, frameon=False)
    figure.tight_layout()
    figure.savefig(Path(__file__).with_name("schemes.png"), dpi=110)


def main() -> None:
    one_thread()
    machine()
    warnings.simplefilter("ignore")
    found = {case: measure(*arguments) for case, arguments in cases().items()}
    rows = [
        [case, name, f"{density:g}", sections, f"{1e3 * taken:.1f}", f"{error:.0e}"]
        for case, group in found.items()
        for name, density, sections, taken, error in group
    ]
    header = ["case", "scheme", "per doubling", "sections", "time [ms]", "error of M2"]
    table("Exponential start, rtol = 1e-6", header, rows)
    draw(found)


if __name__ == "__main__":
    main()
