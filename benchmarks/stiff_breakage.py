"""Strong breakage of large flocs beside slow aggregation: rates over more than six decades, by every method."""

from __future__ import annotations

from typing import Any

import numpy as np
from _common import machine, one_thread, seconds, table

import aggsim as ag

RTOL = 1e-6


def cases() -> dict[str, tuple[ag.Batch, Any, float]]:
    """Batch, start and time [s]; breakage is up to 1e6 to 1e8 times as quick as aggregation."""
    large = ag.Exponential(mean_volume=1e4, number=1e-4)
    linear = ag.Breakage(
        rate=ag.rates.power_law(coefficient=1e-3, exponent=1.0), fragments=ag.fragments.uniform_binary()
    )
    steep = ag.Breakage(
        rate=ag.rates.power_law(coefficient=1e-6, exponent=2.0),
        fragments=ag.fragments.equal_binary(),
        smallest=1.0,
    )
    constant = ag.kernels.constant(1e-2)
    return {
        "S = v / 1000, uniform binary": (ag.Batch(constant, breakage=linear), large, 1e4),
        "S = v**2 / 1e6, equal binary": (ag.Batch(constant, breakage=steep), large, 1e4),
    }


def methods() -> list[ag.methods.Method]:
    """Those that are installed."""
    found: list[ag.methods.Method] = [ag.methods.LSODA(), ag.methods.BDF(), ag.methods.Radau()]
    try:
        return [*found, ag.methods.CVODE()]
    except ImportError:
        return found


def main() -> None:
    one_thread()
    machine()
    rows = []
    for name, (vessel, start, time) in cases().items():
        times = np.array([1e-4 * time, 1e-2 * time, time])
        grid = ag.simulate(vessel, start, times).grid
        fine = ag.simulate(vessel, start, times, grid=grid, method=ag.methods.Radau(), rtol=1e-10)
        for method in methods():

            def run(
                vessel: Any = vessel, case: Any = (start, times, grid), method: Any = method
            ) -> ag.Result:
                return ag.simulate(vessel, case[0], case[1], grid=case[2], method=method, rtol=RTOL)

            result = run()
            errors = [np.abs(result.moment(k) / fine.moment(k) - 1.0).max() for k in (0, 2)]
            stats = result.stats
            rows.append(
                [
                    name,
                    len(grid),
                    method.name,
                    f"{1e3 * seconds(run, repeats=3)[0]:.1f}",
                    stats.rate_evaluations,
                    stats.jacobian_evaluations,
                    *(f"{error / RTOL:.2g}" for error in errors),
                ]
            )
    header = [
        "case",
        "sections",
        "method",
        "time [ms]",
        "rates",
        "Jacobians",
        "M0 error / rtol",
        "M2 error / rtol",
    ]
    table("Stiff breakage, rtol = 1e-6; errors against Radau at rtol = 1e-10", header, rows)


if __name__ == "__main__":
    main()
