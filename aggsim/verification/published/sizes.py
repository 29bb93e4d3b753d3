"""Mean sizes, percentiles and specific surface of textbook distributions, worked out at high precision."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from aggsim._checks import FloatArray
from aggsim.sizes import LogNormal, means
from aggsim.verification.checks import Case, Check

GROUP = "Mean sizes and percentiles"
HATCH_CHOATE = "T. Hatch, S. P. Choate, J. Franklin Inst. 207 (1929) 369, doi:10.1016/S0016-0032(29)91451-4"
MICRON = 1e-6
LAW = LogNormal(median_diameter=MICRON, gsd=1.6, number=1e12)

# lognormal, number median 1 um, geometric standard deviation 1.6; D[p,q] [um]
MEANS = {
    (1, 0): 1.11678241,
    (2, 0): 1.24720296,
    (3, 0): 1.39285433,
    (3, 2): 1.73717204,
    (4, 3): 2.16660611,
    (6, 5): 3.37018879,
}
# medians by volume, surface, number: d_g exp(r ln^2 sg) [um]
MEDIANS = {3: 1.94004319, 2: 1.55551522, 0: 1.0}
MODE = 0.80179412  # by number, d_g exp(-ln^2 sg) [um]
# quantity r, share: d_g sg^(r-median) exp(z ln sg), z = +-1.2815516 [um]
PERCENTILES = {
    (0, 0.1): 0.54753227,
    (0, 0.9): 1.82637639,
    (3, 0.1): 1.06223624,
    (3, 0.5): 1.94004319,
    (3, 0.9): 3.54324907,
}
SPAN = 1.27884412  # by volume
SURFACE = 3.28941842  # specific surface at 1050 kg/m3 [m2/g]
# counts 100, 80, 30, 5 at 1, 2, 3, 4 um; D[p,q] [um]
COUNTS = np.array([100.0, 80.0, 30.0, 5.0])
MEANS_OF_COUNTS = {
    (1, 0): 1.72093023,
    (3, 0): 2.05652684,
    (3, 2): 2.42857143,
    (4, 3): 2.72192513,
    (6, 5): 3.15660252,
}


def sampled() -> tuple[FloatArray, FloatArray]:
    """The law at the pivots of a geometric grid, 8 per doubling."""
    low, high = LAW.limits(1e-18)
    x = np.exp(np.arange(math.log(low) - 4, math.log(high) + 8, math.log(2) / 8))
    return x, LAW.density(x) * means.section_width(x)


def mean_sizes() -> Iterator[Check]:
    """Readings of a lognormal law on a grid, and of counts."""
    case = Case(
        GROUP,
        "lognormal, number median 1 um, spread 1.6, on a grid",
        f"{HATCH_CHOATE}; ISO 9276-1:1998, ISO 9276-2:2014",
        "nine digits given; percentiles and the span from a grid, of fourth order in its spacing",
    )
    x, n = sampled()
    for (p, q), microns in MEANS.items():
        found = float(means.mean_diameter(x, n, p, q)) / MICRON
        yield case.check("mean diameter [um]", f"D[{p},{q}]", microns, found, relative=1e-8)
    for r, microns in MEDIANS.items():
        found = float(means.quantile_diameter(x, n, 0.5, r=r)) / MICRON
        yield case.check("median [um]", f"r = {r}", microns, found, relative=1e-7)
    for (r, share), microns in PERCENTILES.items():
        found = float(means.quantile_diameter(x, n, share, r=r)) / MICRON
        at = f"{100 * share:g} %, r = {r}"
        yield case.check("percentile [um]", at, microns, found, relative=1e-7)
        v = means.volume_of(microns * MICRON)
        below = LAW.number_below(v) / LAW.total_number if r == 0 else LAW.volume_below(v) / LAW.total_volume
        yield case.check("share below", at, share, below, absolute=1e-8)
    d10, d50, d90 = (means.quantile_diameter(x, n, share) for share in (0.1, 0.5, 0.9))
    yield case.check("span", "r = 3", SPAN, means.span(d10, d50, d90), relative=2e-7)
    surface = 6.0 / (1050.0 * float(means.mean_diameter(x, n, 3, 2))) / 1000.0
    yield case.check("specific surface [m2/g]", "1050 kg/m3", SURFACE, surface, relative=1e-8)
    case = Case(GROUP, "counts 100, 80, 30, 5 at 1, 2, 3, 4 um", "ISO 9276-2:2014", "nine digits given")
    volume = means.volume_of(np.arange(1.0, 5.0) * MICRON)
    for (p, q), microns in MEANS_OF_COUNTS.items():
        found = float(means.mean_diameter(volume, COUNTS, p, q)) / MICRON
        yield case.check("mean diameter [um]", f"D[{p},{q}]", microns, found, relative=1e-8)
