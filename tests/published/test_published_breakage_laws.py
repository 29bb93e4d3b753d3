"""Laws of breakage against published statements."""

from __future__ import annotations

import math
import warnings

import pytest

from aggsim.breakage import rates
from aggsim.errors import ValidityWarning
from aggsim.inputs import Compact, Flow, Particles

GRAINS = Compact(Particles(diameter=1e-6, density=2650.0))


@pytest.mark.parametrize("exponent", [0.3, 0.5, 1.0])
def test_largest_stable_size_is_a_power_of_the_shear_rate(exponent: float) -> None:
    """d_max = C G**-gamma, stated for G < 500 1/s: Molecules (2022) 27, 5550, DOI 10.3390/molecules27175550."""
    for shear_rate in (1.0, 20.0, 499.0):
        flow = Flow(shear_rate=shear_rate)
        law = rates.largest_stable_size(GRAINS, flow, coefficient=2e-3, exponent=exponent, rate=0.1)
        largest = 2e-3 * shear_rate**-exponent
        # the rate that was asked for at d_max, next to nothing at a fifth of it
        assert law(math.pi / 6.0 * largest**3) == pytest.approx(0.1, rel=1e-12)
        assert law(math.pi / 6.0 * (0.2 * largest) ** 3) < 2e-3 * 0.1


def test_the_power_law_of_the_largest_size_is_not_stated_above_500() -> None:
    """Same source."""

    def build(shear_rate: float) -> None:
        rates.largest_stable_size(
            GRAINS, Flow(shear_rate=shear_rate), coefficient=2e-3, exponent=0.5, rate=0.1
        )

    with warnings.catch_warnings():
        warnings.simplefilter("error")
        build(499.0)
    with pytest.warns(ValidityWarning, match="500 1/s"):
        build(501.0)
