"""The monomer scheme with factored kernels against the compiled direct sum: speed at 100 000 sizes, error at 5000."""

from __future__ import annotations

from typing import Any

import numpy as np
from _common import machine, one_thread, seconds_per_call, table, target

import aggsim as ag
from aggsim.schemes import BEYOND
from aggsim.schemes.low_rank import FactoredKernel
from aggsim.schemes.monomer import MonomerOperator

LARGE, MEASURED, SMALL = 100_000, 8_000, 5_000
WATER = ag.Medium.water(temperature=298.15)
GRAIN = ag.Particles(diameter=1e-6, density=1055.0)


def kernels() -> dict[str, ag.kernels.Kernel]:
    """Brownian and shear kernels of compact and fractal aggregates, and their sum."""
    compact, fractal = ag.Compact(GRAIN), ag.Fractal(GRAIN, dimension=2.1)
    mixing = ag.Flow(shear_rate=50.0)
    return {
        "Brownian, compact": ag.kernels.brownian(compact, WATER),
        "Brownian, fractal": ag.kernels.brownian(fractal, WATER),
        "shear, compact": ag.kernels.shear(compact, mixing),
        "Brownian + shear, fractal": ag.kernels.brownian(fractal, WATER) + ag.kernels.shear(fractal, mixing),
    }


def state(count: int, mean: float) -> np.ndarray:
    """Numbers of an aged suspension, and the entries beyond the grid."""
    k = np.arange(1.0, count + 1.0)
    return np.concatenate([1e16 / mean**2 * np.exp(-k / mean), np.zeros(BEYOND)])


def factored(kernel: ag.kernels.Kernel, count: int) -> Any:
    """Operator and the sum of the factored parts."""
    prepared = ag.Monomer().prepare(ag.SizeGrid.monomers(GRAIN.volume, count))
    rates = sum(part for _, part, _ in prepared.parts(kernel))
    assert isinstance(rates, FactoredKernel)
    return prepared.aggregation(rates), rates


def per_call(operator: Any, number: np.ndarray) -> float:
    out = np.zeros_like(number)
    return seconds_per_call(lambda: operator.add_rates(number, 1.0, out))


def direct(kernel: ag.kernels.Kernel, count: int) -> MonomerOperator:
    grid = ag.SizeGrid.monomers(GRAIN.volume, count)
    matrix = sum(part.matrix for part in kernel.part_matrices(grid.volume))
    return MonomerOperator(np.ascontiguousarray(matrix), np.array(grid.volume))


def difference(kernel: ag.kernels.Kernel) -> float:
    """Largest difference of the rates of M0 to M3, over the gross rate of each, at three ages."""
    worst = 0.0
    k = np.arange(1.0, SMALL + 1.0)
    summed, (quick, _) = direct(kernel, SMALL), factored(kernel, SMALL)
    for mean in (1.2, 20.0, 400.0):
        number = state(SMALL, mean)
        one, other = np.zeros_like(number), np.zeros_like(number)
        summed.add_rates(number, 1.0, one)
        quick.add_rates(number, 1.0, other)
        gross = number[:SMALL] * (summed.matrix @ number[:SMALL])
        for order in range(4):
            error = abs(float((one - other)[:SMALL] @ k**order)) / float(gross @ k**order)
            worst = max(worst, error)
    return worst


def main() -> None:
    one_thread()
    machine()
    rows, gains, times, errors = [], [], [], []
    for name, kernel in kernels().items():
        slow = per_call(direct(kernel, MEASURED), state(MEASURED, 300.0)) * (LARGE / MEASURED) ** 2
        operator, rates = factored(kernel, LARGE)
        quick = per_call(operator, state(LARGE, 3000.0))
        error = difference(kernel)
        gains.append(slow / quick)
        times.append(1e3 * quick)
        errors.append(error)
        rows.append(
            [
                name,
                rates.share.shape[0],
                f"{1e3 * quick:.1f}",
                f"{slow:.1f}",
                f"{slow / quick:.0f}",
                f"{error:.0e}",
            ]
        )
    header = [
        "kernel",
        "products",
        "factored [ms]",
        f"direct sum [s], from {MEASURED} sizes by n**2",
        "gain",
        f"M0 to M3 at {SMALL} sizes",
    ]
    table(f"One rate evaluation at {LARGE} sizes", header, rows)
    target("gain over the direct sum, least,", min(gains), 100.0)
    target("time of an evaluation [ms], most,", max(times), 60.0, at_most=True)
    target("difference of the rates of M0 to M3, most,", max(errors), 1e-8, at_most=True)


if __name__ == "__main__":
    main()
