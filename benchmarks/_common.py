"""What the benchmark scripts share: cases, timing, and one way to print a table."""

from __future__ import annotations

import os
import platform
import statistics
import sys
import time
from collections.abc import Callable, Sequence
from typing import Any

import numba
import numpy as np
import scipy

import aggsim as ag


def brownian(v: Any, w: Any) -> Any:
    """Brownian kernel over its value for equal sizes; every script uses it with volumes in monomers."""
    a, b = np.cbrt(v), np.cbrt(w)
    return 0.25 * (a + b) * (1.0 / a + 1.0 / b)


BROWNIAN = ag.kernels.from_function(brownian, name="brownian")
MONOMERS = ag.Monodisperse(volume=1.0, number=1.0)
TAU = 100.0  # time in units of 1 / (kernel at equal sizes * starting number); the mean size is then 54
# the discrete equation on 3600 multiples of the monomer at rtol=1e-10: `python work_precision.py --reference`
M0, M2 = 0.0184656958, 104.54709272


def one_thread() -> None:
    """Start the script again with one BLAS thread: threads gain nothing here and wait for each other."""
    if os.environ.get("OPENBLAS_NUM_THREADS") != "1":
        os.environ.update(OPENBLAS_NUM_THREADS="1", MKL_NUM_THREADS="1")
        os.execv(sys.executable, [sys.executable, *sys.argv])


def monomer_grid(sections: int, per_doubling: float) -> ag.SizeGrid:
    """`monomers_then_geometric` with exactly this many sections."""
    ratio = 2.0 ** (1.0 / per_doubling)
    singles = int(np.ceil(1.0 / (ratio - 1.0) - 1e-9))
    largest = singles * ratio ** (sections - singles)
    return ag.SizeGrid.monomers_then_geometric(1.0, largest * (1.0 - 1e-9), per_doubling)


def mineral(structure: str) -> tuple[Any, Any]:
    """Structure and kernel (Brownian + shear + settling) of quartz-like grains in stirred water."""
    grains = ag.Particles(diameter=1e-6, density=2650.0)
    water = ag.Medium.water(temperature=298.15)
    shape = ag.Compact(grains) if structure == "compact" else ag.Fractal(grains, dimension=2.1)
    kernel = ag.kernels.brownian(shape, water)
    kernel += ag.kernels.shear(shape, ag.Flow(shear_rate=50.0)) + ag.kernels.settling(shape, water)
    return shape, kernel


def seconds(*functions: Callable[[], Any], repeats: int = 7) -> list[float]:
    """Median time [s] of one call of each function; the functions take turns, so that noise hits all alike."""
    taken: list[list[float]] = [[] for _ in functions]
    for function in functions:
        function()
    for _ in range(repeats):
        for function, times in zip(functions, taken, strict=True):
            begin = time.perf_counter()
            function()
            times.append(time.perf_counter() - begin)
    return [statistics.median(times) for times in taken]


def seconds_per_call(function: Callable[[], Any], repeats: int = 9, batch: float = 1e-3) -> float:
    """Least time [s] of a call that is too short for one tick: the best of several batches, each
    shorter than the turn that a busy machine gives to a process."""
    function()
    begin = time.perf_counter()
    function()
    calls = max(1, int(batch / max(time.perf_counter() - begin, 1e-7)))
    best = float("inf")
    for _ in range(repeats):
        begin = time.perf_counter()
        for _ in range(calls):
            function()
        best = min(best, (time.perf_counter() - begin) / calls)
    return best


def table(title: str, header: Sequence[str], rows: Sequence[Sequence[Any]]) -> None:
    """Print a table in Markdown."""
    cells = [list(header), *([_text(value) for value in row] for row in rows)]
    widths = [max(len(row[k]) for row in cells) for k in range(len(header))]
    print(f"{title}\n")
    for number, row in enumerate(cells):
        print("| " + " | ".join(c.ljust(w) for c, w in zip(row, widths, strict=True)) + " |")
        if number == 0:
            print("|" + "|".join("-" * (w + 2) for w in widths) + "|")
    print()


def target(text: str, measured: float, limit: float, *, at_most: bool = False) -> None:
    """Print a target beside the figure that was measured."""
    met = measured <= limit if at_most else measured >= limit
    sign = "at most" if at_most else "at least"
    print(f"target: {text} {sign} {limit:g}; measured {measured:.3g}: {'met' if met else 'MISSED'}")


def machine() -> None:
    """Print what the figures were measured on."""
    load = f", load {os.getloadavg()[0]:.1f}" if hasattr(os, "getloadavg") else ""
    print(
        f"{platform.machine()}, {os.cpu_count()} cores{load}; Python {platform.python_version()}, "
        f"numpy {np.__version__}, scipy {scipy.__version__}, numba {numba.__version__}\n"
    )


def _text(value: Any) -> str:
    return f"{value:.3g}" if isinstance(value, float) else str(value)
