"""One rate evaluation against a plain C loop over the same segments and coefficients.

C is timed by a loop inside C, so no call from Python is in its figure; ours is the function that the
integrator calls, with counting, a new output array, dispatch to compiled code and the check for finiteness.
"""

from __future__ import annotations

import ctypes
import shutil
import subprocess
import tempfile
from pathlib import Path
from typing import Any

import numpy as np
from _common import BROWNIAN, TAU, machine, monomer_grid, seconds_per_call, table, target

import aggsim as ag
from aggsim.solvers.system import System

SOURCE = r"""
#include <stdint.h>
#include <time.h>

__attribute__((noinline))
void rates(int64_t rows, const int64_t (*restrict segments)[3], const int64_t *restrict section,
           const double *restrict coefficient, const double *restrict number, double factor, double *restrict out)
{
    for (int64_t p = 0; p < rows; p++) {
        double rate = 0.0;
        for (int64_t s = section[p]; s < section[p + 1]; s++) {
            const double *c = coefficient + segments[s][2];
            const double *v = number + segments[s][1];
            int64_t length = segments[s + 1][2] - segments[s][2];
            double dot = 0.0;
            for (int64_t q = 0; q < length; q++) dot += c[q] * v[q];
            rate += number[segments[s][0]] * dot;
        }
        out[p] += factor * rate;
    }
}

double seconds(int64_t calls, int64_t rows, const int64_t (*segments)[3], const int64_t *section,
               const double *coefficient, const double *number, double *out)
{
    struct timespec a, b;
    clock_gettime(CLOCK_MONOTONIC, &a);
    for (int64_t k = 0; k < calls; k++)
        rates(rows, segments, section, coefficient, number, 1.0, out);
    clock_gettime(CLOCK_MONOTONIC, &b);
    return (double)(b.tv_sec - a.tv_sec) + 1e-9 * (double)(b.tv_nsec - a.tv_nsec);
}
"""
FLAGS = {
    "C -O2": ["-O2"],
    "C -O3": ["-O3", "-march=native"],
    # our compiled loops may reassociate sums, which lets them use the vector unit, so C may as well; not
    # -ffast-math, which some compilers take as an order to switch off denormals in the whole process
    "C -O3 reassociated": [
        "-O3",
        "-march=native",
        "-fassociative-math",
        "-fno-signed-zeros",
        "-fno-trapping-math",
    ],
}
CASES = [(40, 3), (80, 3), (160, 6)]  # sections, per doubling
TURNS = 10


def compile_c(folder: Path) -> dict[str, ctypes.CDLL]:
    """The C loop with each set of flags; empty where there is no compiler."""
    compiler = shutil.which("cc")
    if compiler is None:
        return {}
    (folder / "loop.c").write_text(SOURCE)
    out = {}
    for number, (name, flags) in enumerate(FLAGS.items()):
        library = folder / f"loop{number}.so"
        command = [compiler, *flags, "-shared", "-fPIC", "-o", str(library), str(folder / "loop.c")]
        subprocess.run(command, check=True)
        out[name] = ctypes.CDLL(str(library))
        out[name].seconds.restype = ctypes.c_double
    return out


def pointer(array: Any) -> ctypes.c_void_p:
    return ctypes.c_void_p(array.ctypes.data)


def c_loop(library: ctypes.CDLL, operator: Any, state: Any, repeats: int) -> tuple[float, Any]:
    """Least time [s] of one evaluation in C, and the rates."""
    rows = ctypes.c_int64(operator.section.size - 1)
    arrays = [pointer(a) for a in (operator.segments, operator.section, operator.coefficient, state)]

    def run(calls: int) -> tuple[float, Any]:
        out = np.zeros(state.size)
        return library.seconds(ctypes.c_int64(calls), rows, *arrays, pointer(out)), out

    _, rates = run(1)
    calls = max(10, int(1e-3 / max(run(100)[0] / 100, 1e-8)))
    return min(run(calls)[0] / calls for _ in range(repeats)), rates


def compare(sections: int, per_doubling: float, moments: int, libraries: dict[str, ctypes.CDLL]) -> list[Any]:
    """Coefficients, and least times [s]: ours, the operator alone, then each of the C loops."""
    grid = monomer_grid(sections, per_doubling)
    scheme = ag.FixedPivot(moments=moments)
    # every section holds something: aggsim passes over empty ones, which would flatter it here
    state = np.concatenate([1.0 / np.array(grid.volume) ** 1.5, [0.0, 0.0]])
    system = System(ag.Batch(BROWNIAN), scheme, grid)
    system.on(0.0, TAU)
    operator: Any = system._active[0][0]  # the one that `rates` uses: alignment of its arrays counts too
    out = np.zeros(state.size)
    ours = system.rates(0.0, state)
    for library in libraries.values():
        _, rates = c_loop(library, operator, state, repeats=1)
        np.testing.assert_allclose(rates, ours, rtol=1e-12, atol=1e-12 * np.abs(ours).max())
    best = np.full(2 + len(libraries), np.inf)
    for _ in range(TURNS):  # all in turns, the least of each: noise only ever adds
        times = [seconds_per_call(lambda: system.rates(0.0, state), repeats=3)]
        times += [seconds_per_call(lambda: operator.add_rates(state, 1.0, out), repeats=3)]
        times += [c_loop(library, operator, state, repeats=3)[0] for library in libraries.values()]
        best = np.minimum(best, times)
    return [operator.coefficient.size, *best.tolist()]


def main() -> None:
    machine()
    rows = []
    worst = 0.0
    with tempfile.TemporaryDirectory() as folder:
        libraries = compile_c(Path(folder))
        if not libraries:
            print("no C compiler (cc) was found: nothing to compare with")
            return
        for sections, per_doubling in CASES:
            for moments in (2, 4, 6):
                size, call, inner, *c = compare(sections, per_doubling, moments, libraries)
                ratio = call / min(c)
                if sections == 80:
                    worst = max(worst, ratio)
                figures = [f"{1e6 * t:.2f}" for t in (call, inner, *c)]
                rows.append([sections, moments, size, *figures, f"{ratio:.2f}"])
    header = ["sections", "moments", "coefficients", "ours [us]", "of it operator [us]"]
    header += [f"{name} [us]" for name in FLAGS] + ["ours / fastest C"]
    table("One rate evaluation (least of many; results agree to 1e-12)", header, rows)
    target("ours over the fastest C at 80 sections", worst, 3.0, at_most=True)


if __name__ == "__main__":
    main()
