"""Steady states: Newton's method against integrating until nothing changes any more, to the same agreement."""

from __future__ import annotations

from typing import Any

import numpy as np
from _common import machine, one_thread, seconds, table, target

import aggsim as ag

FLOCS = ag.Fractal(ag.Particles(diameter=2e-6, density=2650.0), dimension=2.2)
WATER = ag.Medium.water(temperature=288.15)
RAW = ag.LogNormal(median_diameter=4e-6, gsd=1.5, volume_fraction=2e-5)
ENOUGH = 1e-8  # agreement in number, M2 and d50 at which an integration has arrived


def basin(shear_rate: float) -> dict[str, Any]:
    """Kernel and breakage of flocs at one shear rate."""
    flow = ag.Flow(shear_rate=shear_rate)
    rate = ag.rates.largest_stable_size(FLOCS, flow, coefficient=2e-3, exponent=0.5, rate=0.05)
    return {
        "kernel": 0.3 * ag.kernels.shear(FLOCS, flow) + ag.kernels.brownian(FLOCS, WATER),
        "breakage": ag.Breakage(
            rate=rate, fragments=ag.fragments.equal_binary(), smallest=FLOCS.particles.volume
        ),
    }


def cases() -> dict[str, tuple[ag.vessels.Vessel, Any, float]]:
    """Vessel, start of the integration, and a time scale [s] to double from."""
    constant = ag.kernels.constant(1.0)
    halves = ag.Breakage(
        rate=ag.rates.power_law(coefficient=2e-4, exponent=1.0), fragments=ag.fragments.uniform_binary()
    )
    exponential = ag.Exponential(mean_volume=1.0, number=1.0)
    tanks = [ag.Tank(**basin(g), volume=120.0) for g in (70.0, 50.0, 35.0, 25.0, 15.0, 10.0)]
    return {
        "batch: constant kernel, uniform binary breakage": (
            ag.Batch(constant, breakage=halves),
            exponential,
            50.0,
        ),
        "batch: flocs at 50 1/s": (ag.Batch(**basin(50.0)), RAW, 600.0),
        "stirred tank: constant kernel": (
            ag.StirredTank(constant, residence_time=10.0, feed=exponential),
            exponential,
            10.0,
        ),
        "stirred tank: flocs at 50 1/s": (
            ag.StirredTank(**basin(50.0), residence_time=600.0, feed=RAW),
            RAW,
            600.0,
        ),
        "train of six tanks, tapered from 70 to 10 1/s": (ag.Train(tanks, flow=0.4, feed=RAW), RAW, 1800.0),
    }


def figures(state: Any, row: Any = ...) -> np.ndarray:
    """Number, M2 and d50 of a state or of the last output of a run."""
    values = [state.total_number(), state.moment(2), state.quantile_diameter(0.5)]
    return np.array([float(np.atleast_1d(value)[-1]) for value in values])


def main() -> None:
    one_thread()
    machine()
    rows, slowest, most = [], np.inf, 0
    for name, (vessel, start, time) in cases().items():
        closed = isinstance(vessel, ag.Batch)
        own = start if closed else None
        state = ag.steady_state(vessel, start=own)
        wanted = figures(state)
        # the time after which a run has arrived, found first and not counted
        while True:
            late = ag.simulate(vessel, start, time, grid=state.grid, rtol=1e-9)
            difference = float(np.abs(figures(late) / wanted - 1.0).max())
            if difference < ENOUGH or time > 1e7:
                break
            time *= 1.5

        def newton(vessel: Any = vessel, own: Any = own, grid: Any = state.grid) -> Any:
            return ag.steady_state(vessel, start=own, grid=grid)

        def integrate(
            vessel: Any = vessel, start: Any = start, time: float = time, grid: Any = state.grid
        ) -> Any:
            return ag.simulate(vessel, start, time, grid=grid, rtol=1e-9)

        quick, slow = seconds(newton, integrate, repeats=3)
        rows.append(
            [
                name,
                len(state.grid),
                state.iterations,
                f"{1e3 * quick:.1f}",
                f"{1e3 * slow:.1f}",
                f"{slow / quick:.1f}",
                f"{time:.3g}",
                f"{difference:.0e}",
            ]
        )
        slowest, most = min(slowest, slow / quick), max(most, state.iterations)
    header = [
        "case",
        "sections",
        "Newton steps",
        "Newton [ms]",
        "integration [ms]",
        "ratio",
        "time [s]",
        "difference",
    ]
    table(
        "Steady states on one grid; integration by LSODA, rtol = 1e-9, until it agrees to 1e-8", header, rows
    )
    target("time of the integration over that of Newton's method, worst case,", slowest, 10.0)
    target("Newton steps, most,", most, 30, at_most=True)


if __name__ == "__main__":
    main()
