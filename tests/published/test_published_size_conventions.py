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

MICRON = 1e-6
LAW = LogNormal(median_diameter=MICRON, gsd=1.6, number=1e12)


def moment_of_diameter(k: float) -> float:
    """sum n d^k = (6/pi)^(k/3) times the moment of order k/3 in volume."""
    return (6 / math.pi) ** (k / 3) * LAW.moment(k / 3)


# lognormal, number median 1 um, geometric standard deviation 1.6 (Hatch & Choate 1929; ISO 9276-2)
MEANS = [
    (1, 0, 1.11678241),
    (2, 0, 1.24720296),
    (3, 0, 1.39285433),
    (3, 2, 1.73717204),
    (4, 3, 2.16660611),
    (6, 5, 3.37018879),
]


def sampled() -> tuple[np.ndarray, np.ndarray]:
    """The law at the pivots of a geometric grid, 8 per doubling."""
    low, high = LAW.limits(1e-18)
    x = np.exp(np.arange(math.log(low) - 4, math.log(high) + 8, math.log(2) / 8))
    return x, LAW.density(x) * means.section_width(x)


@pytest.mark.parametrize(("p", "q", "microns"), MEANS)
def test_mean_diameters_of_a_lognormal(p, q, microns):
    exact = (moment_of_diameter(p) / moment_of_diameter(q)) ** (1 / (p - q))
    assert exact == pytest.approx(microns * MICRON, rel=1e-8)
    assert means.mean_diameter(*sampled(), p, q) == pytest.approx(microns * MICRON, rel=1e-8)


# volume and surface medians d_g exp(r ln^2 sg), number mode d_g exp(-ln^2 sg) (Hatch & Choate 1929)
@pytest.mark.parametrize(("r", "microns"), [(3, 1.94004319), (2, 1.55551522), (0, 1.0)])
def test_medians_of_a_lognormal(r, microns):
    same = LogNormal(median_diameter=microns * MICRON, gsd=1.6, number=1e12, median_of=r)
    # the medians are printed to nine digits, and moment 1 goes with the third power
    assert same.moment(1.0) == pytest.approx(LAW.moment(1.0), rel=3e-8)
    # quantiles from a grid: fourth order in the spacing
    assert means.quantile_diameter(*sampled(), 0.5, r=r) == pytest.approx(microns * MICRON, rel=1e-7)


def test_number_mode_of_a_lognormal():
    d = np.linspace(0.7, 0.9, 2001) * MICRON
    density = LAW.density(means.volume_of(d)) * d**2  # dN/dd up to a constant
    assert d[np.argmax(density)] == pytest.approx(
        0.80179412 * MICRON, abs=0.5e-4 * MICRON
    )  # half a step of the scan
    mode = 0.80179412 * MICRON
    around = (
        LAW.density(means.volume_of(mode * np.array([1 - 1e-4, 1, 1 + 1e-4])))
        * (mode * np.array([1 - 1e-4, 1, 1 + 1e-4])) ** 2
    )
    slope, bend = (around[2] - around[0]) / 2, around[2] - 2 * around[1] + around[0]
    assert abs(slope / bend) * 1e-4 < 1e-7  # the parabola through three points tops at the mode


# percentiles d_g sg^(r-median) exp(z ln sg), z = +-1.2815516 (Hatch & Choate 1929; ISO 9276-1 types 0 and 3)
@pytest.mark.parametrize(
    ("r", "share", "microns"),
    [
        (0, 0.1, 0.54753227),
        (0, 0.9, 1.82637639),
        (3, 0.1, 1.06223624),
        (3, 0.5, 1.94004319),
        (3, 0.9, 3.54324907),
    ],
)
def test_percentiles_of_a_lognormal(r, share, microns):
    v = means.volume_of(microns * MICRON)
    if r == 0:
        exact = LAW.number_below(v) / LAW.total_number
    else:
        exact = LAW.volume_below(v) / LAW.total_volume
    assert exact == pytest.approx(share, abs=1e-8)
    # quantiles from a grid: fourth order in the spacing
    assert means.quantile_diameter(*sampled(), share, r=r) == pytest.approx(microns * MICRON, rel=1e-7)


def test_span_by_volume_of_a_lognormal():
    d10, d50, d90 = 1.06223624, 1.94004319, 3.54324907
    assert means.span(d10, d50, d90) == pytest.approx(1.27884412, rel=1e-8)


def test_specific_surface_from_the_sauter_diameter():
    # 6 / (rho D32) with 1050 kg/m3 (ISO 9276-2): 3.28941842 m2/g
    sauter = means.mean_diameter(*sampled(), 3, 2)
    assert 6 / (1050.0 * sauter) / 1000.0 == pytest.approx(3.28941842, rel=1e-8)


# counts 100, 80, 30, 5 at 1, 2, 3, 4 um (ISO 9276-2)
@pytest.mark.parametrize(
    ("p", "q", "microns"),
    [
        (1, 0, 1.72093023),
        (3, 0, 2.05652684),
        (3, 2, 2.42857143),
        (4, 3, 2.72192513),
        (6, 5, 3.15660252),
    ],
)
def test_mean_diameters_of_counts(p, q, microns):
    volume = means.volume_of(np.array([1.0, 2.0, 3.0, 4.0]) * MICRON)
    assert means.mean_diameter(volume, [100, 80, 30, 5], p, q) == pytest.approx(microns * MICRON, rel=1e-8)
