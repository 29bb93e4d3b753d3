"""Closed solutions have their own closed moments."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import quad

from aggsim.verification import closed
from aggsim.verification.closed import ClosedSolution

K = np.arange(1.0, 20_001.0)
H = np.log(2.0) / 32.0
V = np.exp(np.arange(np.log(1e-10), np.log(5e4), H))


@pytest.mark.parametrize("share", [0.2, 0.5, 1.0])
@pytest.mark.parametrize("problem", closed.ALL, ids=lambda p: p.name)
def test_moments_of_aggregation(problem: ClosedSolution, share: float) -> None:
    """Sums over k-mers, or the trapezoidal rule in ln v, from 1e-10 of the mean on."""
    t = share * problem.time
    v, width = (K, 1.0) if problem.discrete else (V, V * H)
    number = problem.number(v, t) * width
    for k, exact in enumerate(problem.moments(t)):
        assert number @ v**k == pytest.approx(exact, rel=2e-10)


@pytest.mark.parametrize("problem", closed.BREAKING, ids=lambda p: p.name)
def test_moments_of_breakage(problem: closed.Breaking) -> None:
    top = 1.0 if problem.start is closed.MONO else 60.0
    for t in problem.times:
        exact = {0: problem.number, 1: lambda t: 1.0, 2: problem.second}
        for k, value in exact.items():
            if value is not None:
                found = quad(
                    lambda v, k=k, t=t: v**k * problem.density(v, t), 0.0, top, epsabs=1e-13, limit=200
                )[0]
                assert found + problem.left(t) == pytest.approx(value(t), rel=1e-10)


@pytest.mark.parametrize("s", [0.02, 2.0])
def test_reversible_aggregation(s: float) -> None:
    """dN/dt = -N^2 / 2 + s M1 from N = 1 on."""
    problem, step = closed.Reversible(s), 1e-4
    assert problem.number(np.array(0.0)) == pytest.approx(1.0)
    for t in (0.5, 3.0):
        before, at, after = (float(problem.number(np.array(t + d))) for d in (-step, 0.0, step))
        assert (after - before) / (2.0 * step) == pytest.approx(-0.5 * at**2 + s, rel=1e-5)
    assert problem.number(np.array(1e3)) == pytest.approx(problem.last, rel=1e-12)
    number = problem.density(V, 0.7) * V * H
    assert [number @ V**k for k in range(3)] == pytest.approx([0.7, 1.0, 2.0 / 0.7], rel=1e-9)


@pytest.mark.parametrize("tau", [1.0, 10.0])
def test_stirred_tank(tau: float) -> None:
    for number, v, second, third in (
        (closed.tank_kmers(K, tau), K, 1.0, 1.0),
        (closed.tank_density(V, tau) * V * H, V, 2.0, 6.0),
    ):
        for k, exact in enumerate(closed.tank_moments(second, third, tau)):
            assert number @ v**k == pytest.approx(exact, rel=2e-10)
