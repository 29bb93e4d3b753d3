"""The exact values of all figures that carry an error estimate, from closed solutions put on a fine grid.

Mean sizes and quantiles are read by the functions that read them from a run; what a grid of 32 sections per doubling
from 1e-10 of the mean volume on leaves is below 1e-9. A closed solution with a jump is integrated cell by cell.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from scipy.integrate import quad
from scipy.optimize import brentq

from aggsim._checks import FloatArray
from aggsim.kernels import constant
from aggsim.result import FIGURES, Snapshot
from aggsim.sizes import SizeGrid, StartingDistribution, means
from aggsim.verification import closed
from aggsim.verification.closed import Breaking, ClosedSolution, Reversible
from aggsim.verification.published.unsolved import Unsolved
from aggsim.verification.reduced import every_size
from aggsim.vessels import Batch, StirredTank, Vessel

Figures = dict[str, FloatArray]
AGREED = 1e-9  # between the moments of a distribution on the fine grid and the closed ones
QUANTILES = {"d10": 0.1, "d50": 0.5, "d90": 0.9}
_MULTIPLES = SizeGrid.monomers(1.0, 20_000)
_FINE = SizeGrid.geometric(smallest=1e-10, largest=5e4, per_doubling=32)


@dataclass(frozen=True, eq=False)
class Problem:
    """A simulation with the exact values (n_times,) of its figures; NaN where they are not known to 1e-9."""

    name: str
    vessel: Vessel
    start: StartingDistribution | None
    times: tuple[float, ...]
    exact: Callable[[], Figures]


def problems() -> list[Problem]:
    """All closed solutions, and the kernels without one."""
    found = [aggregation(problem, _thirds(problem.time)) for problem in closed.ALL]
    found += [breaking(problem) for problem in closed.BREAKING]
    found += [reversible(Reversible(s)) for s in (0.02, 2.0)]
    found += [tank(tau, feed) for tau in (1.0, 10.0) for feed in (closed.MONO, closed.EXPONENTIAL)]
    return found


def unsolved(problem: Unsolved) -> Problem:
    """Kernel without a closed solution, all sizes resolved."""
    times = _thirds(problem.times[-1])

    def exact() -> Figures:
        return Snapshot.of(every_size(problem.kernel(), times, problem.sizes)).figures

    return Problem(problem.name, Batch(problem.kernel()), closed.MONO, times, exact)


def aggregation(problem: ClosedSolution, times: tuple[float, ...]) -> Problem:
    """Aggregation with a closed solution."""

    def exact() -> Figures:
        grid = _MULTIPLES if problem.discrete else _FINE
        number = [problem.number(grid.volume, t) for t in times]
        return _read(grid, number, [problem.moments(t) for t in times])

    return Problem(problem.name, Batch(problem.kernel), problem.start, times, exact)


def reversible(problem: Reversible) -> Problem:
    """Constant kernel with uniform breakage."""
    times = (1.0, 5.0, 20.0)

    def exact() -> Figures:
        totals = [float(problem.number(np.array(t))) for t in times]
        number = [problem.density(_FINE.volume, n) for n in totals]
        return _read(_FINE, number, [(n, 1.0, 2.0 / n, 6.0 / n**2) for n in totals])

    name = f"constant kernel and breakage {problem.coefficient:g} v, exponential"
    return Problem(name, problem.vessel, closed.EXPONENTIAL, times, exact)


def tank(tau: float, feed: StartingDistribution) -> Problem:
    """Stirred tank with a constant kernel, filled with clear liquid, long after its transients."""
    single = feed is closed.MONO
    vessel = StirredTank(constant(1.0), residence_time=tau, feed=feed)

    def exact() -> Figures:
        grid = _MULTIPLES if single else _FINE
        number = closed.tank_kmers(grid.volume, tau) if single else closed.tank_density(grid.volume, tau)
        moments = closed.tank_moments(1.0, 1.0, tau) if single else closed.tank_moments(2.0, 6.0, tau)
        return _read(grid, [number] * 3, [moments] * 3)

    name = f"stirred tank, tau = {tau:g}, {'monodisperse' if single else 'exponential'} feed"
    return Problem(name, vessel, None, (40.0 * tau, 50.0 * tau, 60.0 * tau), exact)


def breaking(problem: Breaking) -> Problem:
    """Breakage alone, of an exponential start or of one size."""
    vessel = Batch(None, breakage=closed.uniform(1.0, problem.exponent))

    def exact() -> Figures:
        each = [_integrated(problem, t) for t in problem.times]
        return {name: np.array([one[name] for one in each]) for name in FIGURES}

    return Problem(f"breakage {problem.name}", vessel, problem.start, problem.times, exact)


def _thirds(time: float) -> tuple[float, ...]:
    return 0.25 * time, 0.5 * time, time


def _read(grid: SizeGrid, density: Sequence[FloatArray], moments: Sequence[tuple[float, ...]]) -> Figures:
    """Figures of densities (or numbers of k-mers) on a fine grid, with their closed moments M0 to M3."""
    snapshot = Snapshot(grid, np.array(density) * grid.width)
    m = np.array(moments)
    found = np.stack([snapshot.moment(k) for k in range(4)], axis=-1)
    agreed = (np.abs(found / m - 1.0) <= AGREED).all(axis=-1)
    figures = {name: np.where(agreed, values, np.nan) for name, values in snapshot.figures.items()}
    return figures | {"number": m[:, 0], "M2": m[:, 2], "M3": m[:, 3]}


def _integrated(problem: Breaking, t: float) -> dict[str, float]:
    """Figures of a density that may end with a jump at 1, where a single size is left."""
    single = problem.start is closed.MONO
    top = 0.0 if single else 4.0  # ln v; S(v) t leaves nothing above

    def integral(k: float, low: float, high: float) -> float:
        def integrand(s: float) -> float:
            return float(np.exp((k + 1) * s) * problem.density(np.asarray(np.exp(s)), t))

        return float(quad(integrand, low, high, epsabs=1e-14, epsrel=1e-12, limit=400)[0])

    def moment(k: float) -> float:
        return integral(k, -30.0, top) + problem.left(t)

    def quantile(share: float) -> float:
        if single and 1.0 - problem.left(t) <= share:
            return 1.0
        return float(np.exp(brentq(lambda s: integral(1.0, -30.0, s) - share, -12.0, top, xtol=1e-13)))

    thirds = {k: moment(k / 3.0) * (6.0 / np.pi) ** (k / 3.0) for k in range(5)}
    return {
        "number": moment(0.0),
        "M2": moment(2.0),
        "M3": moment(3.0),
        "D[1,0]": thirds[1] / thirds[0],
        "D[3,2]": thirds[3] / thirds[2],
        "D[4,3]": thirds[4] / thirds[3],
        **{name: float(means.diameter_of(quantile(share))) for name, share in QUANTILES.items()},
    }
