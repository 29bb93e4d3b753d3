"""LSODA, BDF, Radau and, where installed, CVODE on three cases: cost, and error against rtol = 1e-10.

The cases: smooth, steep, and nearly gelling.

Where LSODA reports no Jacobians it stayed with its Adams methods: the case is not stiff for it.
"""

from __future__ import annotations

import contextlib
import warnings
from typing import Any

from _common import machine, mineral, one_thread, seconds, table

import aggsim as ag
from aggsim.errors import AccuracyWarning

METHODS = [ag.methods.LSODA(), ag.methods.BDF(), ag.methods.Radau()]
with contextlib.suppress(ImportError):
    METHODS.append(ag.methods.CVODE())
RTOL = 1e-6


def cases() -> dict[str, tuple[Any, Any, float, ag.SizeGrid]]:
    """Kernel, start, time [s] and a grid that is given, so that all methods solve the same equations."""
    grains = ag.Particles(diameter=0.4e-6, density=1055.0)
    brownian = ag.kernels.brownian(ag.Compact(grains), ag.Medium.water(temperature=298.15))
    narrow = ag.LogNormal(median_diameter=0.4e-6, gsd=1.4, volume_fraction=1e-4)
    _, three = mineral("compact")
    fine = ag.LogNormal(median_diameter=0.1e-6, gsd=1.4, volume_fraction=1e-5)
    coarse = ag.LogNormal(median_diameter=5e-6, gsd=1.4, volume_fraction=1e-4)
    exponential = ag.Exponential(mean_volume=1.0, number=1.0)
    default = ag.FixedPivot().default_grid
    return {
        "smooth: Brownian, lognormal": (brownian, narrow, 3600.0, default(narrow).extended(1e-15)),
        # the coarse particles sweep up the fine ones, 1e5 times smaller in volume; gelation comes at 227 s
        "steep: three mechanisms, fine and coarse particles": (
            three,
            fine + coarse,
            150.0,
            default(fine + coarse).extended(1e-8),
        ),
        # K = v w and mean volume 1 with M2 = 2 gel at t = 1/2
        "95 % of the way to gelation: product kernel": (
            ag.kernels.multiplicative(1.0),
            exponential,
            0.475,
            default(exponential).extended(1e6),
        ),
    }


def main() -> None:
    one_thread()
    machine()
    warnings.simplefilter("ignore", AccuracyWarning)
    rows = []
    for name, (kernel, start, time, grid) in cases().items():
        vessel = ag.Batch(kernel)
        fine = ag.simulate(vessel, start, [time], grid=grid, method=METHODS[0], rtol=1e-10)
        for method in METHODS:

            def run(
                method: Any = method, vessel: Any = vessel, case: Any = (start, [time], grid)
            ) -> ag.Result:
                return ag.simulate(vessel, case[0], case[1], grid=case[2], method=method, rtol=RTOL)

            result = run()
            stats = result.stats
            errors = [abs(float(result.moment(k)[-1] / fine.moment(k)[-1]) - 1.0) for k in (0, 2)]
            errors.append(
                abs(float(result.quantile_diameter(0.5)[-1] / fine.quantile_diameter(0.5)[-1]) - 1.0)
            )
            rows.append(
                [
                    name,
                    len(grid),
                    method.name,
                    f"{1e3 * seconds(run, repeats=3)[0]:.1f}",
                    stats.steps,
                    stats.rate_evaluations,
                    stats.jacobian_evaluations,
                    *(f"{error / RTOL:.2g}" for error in errors),
                ]
            )
    header = ["case", "sections", "method", "time [ms]", "steps", "rate evaluations", "Jacobians"]
    header += ["error of M0 / rtol", "of M2 / rtol", "of d50 / rtol"]
    table("Methods at rtol = 1e-6, moments=6, errors against rtol = 1e-10 on the same grid", header, rows)


if __name__ == "__main__":
    main()
