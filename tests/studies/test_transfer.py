from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import InputError

START = ag.Exponential(mean_volume=1.0, number=1.0)
HALVES = ag.fragments.uniform_binary()


def vessel(breakage: float) -> ag.Batch:
    """Constant kernel and S = s v: number tends to sqrt(2 s M1)."""
    law = ag.Breakage(rate=ag.rates.power_law(coefficient=breakage, exponent=1.0), fragments=HALVES)
    return ag.Batch(ag.kernels.constant(1.0), breakage=law)


def shaken(during: float = 8.0, after: float = 40.0) -> ag.Transfer:
    return ag.transfer(
        START, before=(vessel(0.02), 40.0), during=(vessel(during), 1.0), after=(vessel(0.02), after)
    )


def test_sizes_before_after_and_regrown() -> None:
    seen = shaken()
    # both rests are the equilibria of the number, so what breaks grows again
    assert seen.regrown == pytest.approx(seen.before, rel=1e-3)
    assert seen.recovery_factor == pytest.approx(1.0, abs=1e-2)
    # at equilibrium the distribution is exponential with mean volume 1 / N: sizes go with N**(-1/3)
    assert seen.after / seen.before == pytest.approx((0.2 / 4.0) ** (1.0 / 3.0), rel=2e-2)
    assert seen.strength_factor == seen.after / seen.before
    assert seen.smallest <= seen.after
    assert np.abs(seen.result.balance.closure).max() < 1e-12


def test_a_short_rest_brings_back_a_part() -> None:
    short, long = shaken(after=1.0), shaken(after=3.0)
    assert 0.0 < short.recovery_factor < long.recovery_factor < 1.0


def test_nothing_lost_has_no_recovery() -> None:
    assert np.isnan(shaken(during=1e-3).recovery_factor)


def test_the_sentence_names_sizes_and_the_caution() -> None:
    text = str(shaken())
    assert text.startswith("d50 by volume")
    assert "jar tests" in text


def test_outer_diameters_and_another_quantile() -> None:
    grains = ag.Particles(diameter=2e-6, density=2650.0)
    flocs = ag.Fractal(grains, dimension=2.0)
    mixing = ag.Batch(ag.kernels.shear(flocs, ag.Flow(shear_rate=50.0)))
    start = ag.Monodisperse(diameter=2e-6, volume_fraction=1e-4)
    pairs = {"before": (mixing, 60.0), "during": (mixing, 1.0), "after": (mixing, 1.0)}
    plain = ag.transfer(start, share=0.9, **pairs)
    outer = ag.transfer(start, share=0.9, structure=flocs, **pairs)
    volume = np.pi / 6.0 * plain.before**3
    assert outer.before == pytest.approx(float(flocs.collision_diameter(volume)), rel=1e-6)
    assert "d90" in str(plain)


@pytest.mark.parametrize(
    ("wrong", "name"),
    [
        ({"before": vessel(1.0)}, "before"),
        ({"during": (vessel(1.0), 0.0)}, "duration of during"),
        ({"share": 1.0}, "share"),
        ({"outputs": 1}, "outputs"),
    ],
    ids=["no pair", "no duration", "share", "outputs"],
)
def test_what_cannot_be_used_is_refused(wrong: dict[str, object], name: str) -> None:
    good = {"before": (vessel(0.02), 40.0), "during": (vessel(8.0), 1.0), "after": (vessel(0.02), 1.0)}
    with pytest.raises(InputError, match=name):
        ag.transfer(START, **(good | wrong))  # type: ignore[arg-type]
