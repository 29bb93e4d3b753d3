"""An accuracy on request against the cheapest grid that a hand could have chosen, and the quick error estimate.

The hand knows the exact answer and tries FixedPivot(moments=2, 4, 6) over many spacings at the usual tolerance;
its cost is that of the one cheapest run whose figures are all within 1e-3. The request pays for everything that
it needs to be sure.
"""

from __future__ import annotations

import itertools
import warnings
from pathlib import Path
from typing import Any

import numpy as np
from _common import BROWNIAN, MONOMERS, machine, one_thread, seconds, table, target

import aggsim as ag
from aggsim.errors import AggsimError
from aggsim.result.error import FIGURES, Snapshot

ASKED = 1e-3
SPACINGS = (1.0, 1.4, 2.0, 2.8, 4.0, 5.7, 8.0, 11.3, 16.0)


def cases() -> dict[str, tuple[Any, Any, Any]]:
    """Kernel, start, times."""
    exponential = ag.Exponential(mean_volume=1.0, number=1.0)
    shear = ag.kernels.from_function(lambda v, w: (np.cbrt(v) + np.cbrt(w)) ** 3 / 8.0, name="shear")
    out = {}
    for name, start in (("monodisperse", MONOMERS), ("exponential", exponential)):
        out[f"constant, {name}"] = (ag.kernels.constant(1.0), start, (5.0, 20.0))
        out[f"sum, {name}"] = (ag.kernels.additive(1.0), start, (0.5, 2.0))
        out[f"product, {name}"] = (
            ag.kernels.multiplicative(1.0),
            start,
            (0.4, 0.8) if start is MONOMERS else (0.2, 0.4),
        )
        out[f"Brownian, {name}"] = (BROWNIAN, start, (10.0, 50.0))
        out[f"shear, {name}"] = (shear, start, (0.5, 1.0))
    return out


def by_hand(vessel: Any, start: Any, times: Any, exact: dict[str, Any]) -> tuple[float, str]:
    """Least time [s] of a run that is right, and its grid."""
    best = np.inf, ""
    for moments, density in itertools.product((2, 4, 6), SPACINGS):
        scheme = ag.FixedPivot(moments=moments)
        usual = {2: 8.0, 4: 4.0, 6: 4.0}[moments]
        grid = scheme.default_grid(start, density / usual)

        def run(grid: Any = grid, scheme: Any = scheme) -> ag.Result:
            largest = float(exact["top"])
            return ag.simulate(vessel, start, times, grid=grid.extended(largest), scheme=scheme)

        try:
            result = run()
        except AggsimError:
            continue
        found = Snapshot.of(result).figures
        if all(np.abs(found[f] / exact[f] - 1.0).max() <= ASKED for f in FIGURES):
            time = seconds(run, repeats=5)[0]
            if time < best[0]:
                best = time, f"moments={moments}, {density:g} per doubling"
    return best


def main() -> None:
    one_thread()
    machine()
    warnings.simplefilter("ignore")
    rows, worst = [], 0.0
    for name, (kernel, start, times) in cases().items():
        vessel = ag.Batch(kernel)
        reached = float(ag.simulate(vessel, start, times).grid.volume[-1])
        fine = ag.FixedPivot().default_grid(start, 4.0).extended(8.0 * reached)
        exact: dict[str, Any] = dict(
            Snapshot.of(ag.simulate(vessel, start, times, grid=fine, rtol=1e-10)).figures
        )
        exact["top"] = reached

        def request(vessel: Any = vessel, case: Any = (start, times)) -> Any:
            result = ag.simulate(vessel, *case, accuracy=ASKED)
            return result, result.error.largest

        result, estimate = request()
        found = Snapshot.of(result).figures
        true = max(float(np.abs(found[f] / exact[f] - 1.0).max()) for f in FIGURES)
        ours = seconds(request, repeats=5)[0]
        hand, grid = by_hand(vessel, start, times, exact)
        worst = max(worst, ours / hand)
        rows.append(
            [
                name,
                len(result.grid),
                result.error.runs,
                f"{1e3 * ours:.1f}",
                f"{estimate:.0e}",
                f"{true:.0e}",
                grid,
                f"{1e3 * hand:.1f}",
                f"{ours / hand:.1f}",
            ]
        )
    header = ["case", "sections", "runs", "request [ms]", "estimate", "error", "by hand", "[ms]", "ratio"]
    table("accuracy=1e-3: number, M2, M3, three mean sizes, d10, d50, d90 at two times", header, rows)
    target("time of the request over that of the best grid by hand, worst case,", worst, 3.0, at_most=True)
    demo()


TABLE = ("number", "D[3,2]", "D[4,3]", "d10", "d50", "d90")  # what tables.summary shows


def demo() -> None:
    """The default run of the first demonstration (measured raw water, three mechanisms), with its estimate."""
    data = Path(__file__).resolve().parent.parent / "notebooks_demo" / "data" / "raw_water.csv"
    table_of = {
        "size_unit": "um",
        "size": (0, 1),
        "value": 2,
        "kind": "volume",
        "form": "fraction",
        "percent": True,
    }
    start = ag.Measured.from_csv(data, **table_of, mass_concentration=0.060, density=2400.0)
    water = ag.Medium.water(temperature=285.15)
    flocs = ag.Fractal(ag.Particles(diameter=3e-6, density=2400.0), dimension=2.5)
    kernel = ag.kernels.brownian(flocs, water) + ag.kernels.settling(flocs, water)
    kernel = 0.5 * (kernel + ag.kernels.shear(flocs, ag.Flow(shear_rate=40.0)))
    vessel, times = ag.Batch(kernel), np.linspace(0.0, 1800.0, 31)

    def bare() -> ag.Result:
        return ag.simulate(vessel, start, times)

    def with_coarse_run() -> Any:
        return bare().error

    def with_figures() -> float:
        return bare().error.largest

    error = with_coarse_run()
    largest = max(float(error[figure].max()) for figure in TABLE)
    alone, coarse, read = seconds(bare, with_coarse_run, with_figures, repeats=9)
    print(
        f"\nfirst demonstration, no numerical option: {1e3 * alone:.1f} ms; with the coarse run of the estimate "
        f"{1e3 * coarse:.1f} ms ({100.0 * (coarse / alone - 1.0):.0f} % more), with nine figures read at 31 times from "
        f"both {1e3 * read:.1f} ms; M2 and M3, which hang on 1e-6 of the volume under settling: "
        f"{float(error['M2'].max()):.0e} and {float(error['M3'].max()):.0e}"
    )
    target("largest estimated error of the figures in its table", largest, 5e-3, at_most=True)
    target("time of the run with its estimate [ms]", 1e3 * read, 50.0, at_most=True)
    target("coarse run of the estimate over the run [%]", 100.0 * (coarse / alone - 1.0), 30.0, at_most=True)


if __name__ == "__main__":
    main()
