"""The self-preserving distribution of the Brownian kernel: how soon it is reached.

The distribution itself, its moments and widths, and their source stand in the verification record.
"""

from __future__ import annotations

import numpy as np
import pytest
from reference_runs import MONODISPERSE, brownian
from scipy.interpolate import make_interp_spline
from scipy.optimize import brentq

import aggsim as ag
from aggsim.verification.published.self_preserving import DECAY, WIDTHS

Array = np.ndarray


def first_within(width: Array, times: Array, final: float, share: float) -> float:
    """Time from which on the width lies within a share of its final value."""
    distance = np.abs(width / final - 1.0) - share
    last = int(np.flatnonzero(distance > 0.0)[-1])
    curve = make_interp_spline(times, distance, k=3)
    return float(brentq(curve, times[last], times[last + 1]))


def test_time_to_reach_the_self_preserving_width() -> None:
    """From a monodisperse start, in units of 1 / (K(1, 1) N0): within 2, 1 and 0.5 % of the final number-based
    width at 32, 51 and 74.5, within 1 % of the volume-based one at 7.0 (each to 0.5)."""
    times = np.linspace(0.5, 90.0, 180)
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 2e4, per_doubling=6)
    result = ag.simulate(ag.Batch(brownian()), MONODISPERSE, times, grid=grid, rtol=1e-8)
    number, volume = (result.geometric_standard_deviation(r) for r in (0, 3))
    for share, expected in ((0.02, 32.0), (0.01, 51.0), (0.005, 74.5)):
        assert first_within(number, times, WIDTHS[0], share) == pytest.approx(expected, abs=0.5)
    assert first_within(volume, times, WIDTHS[1], 0.01) == pytest.approx(7.0, abs=0.5)


def test_time_to_reach_the_self_preserving_width_of_fractal_aggregates() -> None:
    """Fractal dimension 1.8: within 1 % of the final number-based width at 18.5. The final width is found from a
    late time of the same run, t = 3000, by when it has settled to 1e-4."""
    times = np.append(np.linspace(0.5, 40.0, 159), 3000.0)
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 1e6, per_doubling=6)
    result = ag.simulate(ag.Batch(brownian(1.0 / 1.8)), MONODISPERSE, times, grid=grid, rtol=1e-8)
    width = result.geometric_standard_deviation(0)
    assert first_within(width[:-1], times[:-1], width[-1], 0.01) == pytest.approx(18.5, abs=0.5)


def test_number_falls_like_the_inverse_of_time() -> None:
    """1 / N = 1 / N* + (c / 2) t / 2: the slope is 1.0725 at t = 140 and comes to 1.0731."""
    times = np.array([139.0, 141.0, 5000.0, 5100.0])
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 2e6, per_doubling=6)
    result = ag.simulate(ag.Batch(brownian()), MONODISPERSE, times, grid=grid, rtol=1e-10)
    inverse = 1.0 / result.total_number()
    slope = np.diff(inverse)[::2] / np.diff(times)[::2] * 2.0
    assert slope[0] == pytest.approx(1.0725, abs=1e-4)  # four digits, cut or rounded
    assert slope[1] == pytest.approx(DECAY, rel=1e-4)
