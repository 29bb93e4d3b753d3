from __future__ import annotations

import pytest

import aggsim as ag
from aggsim.errors import InputError

LATEX = ag.Particles(diameter=400e-9, density=1055.0)
FLOCS = ag.Fractal(LATEX, dimension=2.1)
WATER = ag.Medium.water(temperature=298.15)


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (lambda: ag.kernels.brownian(LATEX, WATER), r"structure=.*around these particles"),
        (lambda: ag.kernels.brownian(WATER, FLOCS), r"structure=.*structure first, medium second"),
        (lambda: ag.kernels.brownian(FLOCS, 298.15), r"medium=298.15.*Medium.water"),
        (lambda: ag.kernels.shear(FLOCS, 50.0), r"flow=50.0.*Flow\(shear_rate=50.0\)"),
    ],
)
def test_usual_slips_are_named(call, words: str) -> None:  # type: ignore[no-untyped-def]
    with pytest.raises(InputError, match=words):
        call()
