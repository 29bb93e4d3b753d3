"""Mean sizes, percentiles and specific surface of textbook distributions.

Sources: Hatch & Choate (1929), J. Franklin Inst. 207, 369, doi:10.1016/S0016-0032(29)91451-4, for the lognormal law;
ISO 9276-2:2014 for the mean diameters D[p,q] from moments; ISO 9276-1:1998 for the types r of quantity.
The figures were computed from those formulas at high precision and are printed here to nine digits.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from aggsim.sizes import LogNormal, means
from aggsim.verification.published import sizes
from aggsim.verification.published.sizes import LAW, MICRON


def moment_of_diameter(k: float) -> float:
    """sum n d^k = (6/pi)^(k/3) times the moment of order k/3 in volume."""
    return (6 / math.pi) ** (k / 3) * LAW.moment(k / 3)


@pytest.mark.parametrize(("p", "q"), sizes.MEANS)
def test_moments_of_a_lognormal(p: int, q: int) -> None:
    exact = (moment_of_diameter(p) / moment_of_diameter(q)) ** (1 / (p - q))
    assert exact == pytest.approx(sizes.MEANS[p, q] * MICRON, rel=1e-8)


@pytest.mark.parametrize("r", sizes.MEDIANS)
def test_medians_of_a_lognormal(r: int) -> None:
    same = LogNormal(median_diameter=sizes.MEDIANS[r] * MICRON, gsd=1.6, number=1e12, median_of=r)
    # the medians are printed to nine digits, and moment 1 goes with the third power
    assert same.moment(1.0) == pytest.approx(LAW.moment(1.0), rel=3e-8)


def test_number_mode_of_a_lognormal() -> None:
    """d_g exp(-ln^2 sg)."""
    d = np.linspace(0.7, 0.9, 2001) * MICRON
    density = LAW.density(means.volume_of(d)) * d**2  # dN/dd up to a constant
    mode = sizes.MODE * MICRON
    assert d[np.argmax(density)] == pytest.approx(mode, abs=0.5e-4 * MICRON)  # half a step of the scan
    near = mode * np.array([1 - 1e-4, 1, 1 + 1e-4])
    around = LAW.density(means.volume_of(near)) * near**2
    slope, bend = (around[2] - around[0]) / 2, around[2] - 2 * around[1] + around[0]
    assert abs(slope / bend) * 1e-4 < 1e-7  # the parabola through three points tops at the mode


def test_span_of_printed_percentiles() -> None:
    d10, d50, d90 = (sizes.PERCENTILES[3, share] for share in (0.1, 0.5, 0.9))
    assert means.span(d10, d50, d90) == pytest.approx(sizes.SPAN, rel=1e-8)
