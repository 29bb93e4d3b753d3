"""Start-up: a fresh process that imports aggsim and makes a first small run, against importing its libraries.

The compiled loops come from the cache on disk: one run before the measurement fills it.
"""

from __future__ import annotations

import statistics
import subprocess
import sys
import time

from _common import machine, table, target

LIBRARIES = "import numpy, scipy.integrate, numba"
IMPORT = "import aggsim"
FIRST_RUN = """
import aggsim as ag
result = ag.simulate(
    ag.Batch(ag.kernels.constant(1.0)), ag.Monodisperse(volume=1.0, number=1.0), 10.0
)
assert abs(result.total_number()[-1] * 6.0 - 1.0) < 1e-5
"""
REPEATS = 9


def fresh(code: str) -> float:
    """Wall-clock time [s] of a fresh process that executes `code`."""
    begin = time.perf_counter()
    subprocess.run([sys.executable, "-c", code], check=True)
    return time.perf_counter() - begin


def main() -> None:
    machine()
    cases = {
        "nothing": "pass",
        LIBRARIES: LIBRARIES,
        IMPORT: IMPORT,
        "import aggsim, first run": FIRST_RUN,
    }
    for code in cases.values():  # fills the caches of the disk and of the compiled loops
        fresh(code)
    times: dict[str, list[float]] = {name: [] for name in cases}
    for _ in range(REPEATS):
        for name, code in cases.items():
            times[name].append(fresh(code))
    base = statistics.median(times[LIBRARIES])
    rows = []
    for name, taken in times.items():
        middle = statistics.median(taken)
        rows.append([name, f"{middle:.2f}", f"{min(taken):.2f} to {max(taken):.2f}", f"{middle / base:.2f}"])
    header = ["fresh process", "median [s]", "range [s]", "over the libraries alone"]
    table(f"Start-up ({REPEATS} turns)", header, rows)
    ratio = statistics.median(times["import aggsim, first run"]) / base
    target("import and first run over the libraries alone", ratio, 2.0, at_most=True)


if __name__ == "__main__":
    main()
