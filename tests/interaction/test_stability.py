from __future__ import annotations

import pickle
import time
import warnings
from dataclasses import replace

import numpy as np
import pytest

from aggsim import kernels
from aggsim.errors import InputError, ValidityWarning
from aggsim.inputs import Compact, Fractal, Medium, Particles
from aggsim.interaction.fuchs import log_stability_ratio, stability_ratio
from aggsim.interaction.models import ConstantPotential, Hamaker
from aggsim.interaction.profile import pair_energy
from aggsim.interaction.stability import PrimaryParticles, WholeSpheres, pairwise_stability_ratio

LATEX = Particles(diameter=200e-9, density=1055.0, hamaker=9e-21, surface_potential=-0.025)
WATER = Medium.water(temperature=298.15, ionic_strength=100.0)
FLOCS = Fractal(LATEX, dimension=2.0)
SIZES = LATEX.volume * 2.0 ** np.linspace(0.0, 15.0, 100)


def test_primary_particles_carry_one_ratio_by_default() -> None:
    ratio = pairwise_stability_ratio(FLOCS, WATER)
    assert ratio.carried_by == PrimaryParticles()
    values = ratio(SIZES[:, None], SIZES)
    assert values.shape == (100, 100)
    assert (values == stability_ratio(pair_energy(LATEX, WATER))).all()
    assert np.ndim(ratio(SIZES[0], SIZES[3])) == 0


def test_whole_spheres_are_pairs_of_spheres() -> None:
    ratio = pairwise_stability_ratio(FLOCS, WATER, carried_by=WholeSpheres())
    values = ratio.logarithm(SIZES[:, None], SIZES)
    for i, j in ((0, 0), (3, 17), (50, 9)):
        first, second = (
            Particles(
                diameter=float(FLOCS.collision_diameter(SIZES[k])),
                density=1055.0,
                hamaker=9e-21,
                surface_potential=-0.025,
            )
            for k in (i, j)
        )
        expected = log_stability_ratio(pair_energy(first, WATER, second))
        assert values[i, j] == pytest.approx(expected, rel=1e-8)  # a hundredth of the accuracy promised
    assert (values == values.T).all()
    assert (np.diff(values[0]) != 0.0).all()


def test_models_and_hydrodynamics_are_passed_on() -> None:
    options = {"double_layer": ConstantPotential(), "van_der_waals": Hamaker(derjaguin=True)}
    for hydrodynamics in (True, False):
        ratio = pairwise_stability_ratio(FLOCS, WATER, hydrodynamics=hydrodynamics, **options)  # type: ignore[arg-type]
        expected = stability_ratio(pair_energy(LATEX, WATER, **options), hydrodynamics=hydrodynamics)  # type: ignore[arg-type]
        assert ratio(SIZES[0], SIZES[1]) == expected


def test_a_kernel_is_divided() -> None:
    kernel = kernels.brownian(FLOCS, WATER)
    ratio = pairwise_stability_ratio(FLOCS, WATER, carried_by=WholeSpheres())
    some = SIZES[:40]
    slow = (kernel / ratio).part_matrices(some)[0].matrix
    fast = kernel.part_matrices(some)[0].matrix
    np.testing.assert_allclose(slow, fast / ratio(some[:, None], some), rtol=1e-14)


def test_no_pair_overflows_or_vanishes() -> None:
    stable = Medium.water(temperature=298.15, ionic_strength=1.0)
    charged = Compact(replace(LATEX, surface_potential=-0.25))
    ratio = pairwise_stability_ratio(charged, stable, carried_by=WholeSpheres())
    values = ratio(SIZES[:, None], SIZES)
    assert (values == 1e300).all()
    assert np.isfinite(ratio.logarithm(SIZES[:, None], SIZES)).all()
    slow = (kernels.brownian(charged, stable) / ratio)(SIZES, SIZES)
    assert (slow > 0.0).all()


def test_it_travels_to_other_processes() -> None:
    ratio = pairwise_stability_ratio(FLOCS, WATER, carried_by=WholeSpheres())
    again = pickle.loads(pickle.dumps(ratio))
    assert again(SIZES[2], SIZES[5]) == ratio(SIZES[2], SIZES[5])


def test_all_pairs_take_no_time_that_is_felt() -> None:
    ratio = pairwise_stability_ratio(Compact(LATEX), WATER, carried_by=WholeSpheres())
    ratio(SIZES[:2, None], SIZES[:2])
    begin = time.perf_counter()
    ratio(SIZES[:, None], SIZES)
    assert time.perf_counter() - begin < 2.0  # some 0.1 s; a loop over pairs takes 5 s


def test_an_own_carrier() -> None:
    class HalfSize:
        def interacting_diameter(self, structure: object, volume: np.ndarray) -> np.ndarray:
            return np.full(volume.shape, 100e-9)

    half = Particles(diameter=100e-9, density=1055.0, hamaker=9e-21, surface_potential=-0.025)
    ratio = pairwise_stability_ratio(FLOCS, WATER, carried_by=HalfSize())
    assert ratio(SIZES[4], SIZES[1]) == stability_ratio(pair_energy(half, WATER))


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ({"structure": LATEX}, "Compact"),
        ({"carried_by": WholeSpheres}, r"WholeSpheres\(\)"),
        ({"carried_by": "primary"}, r"PrimaryParticles\(\)"),
        ({"structure": Compact(Particles(diameter=1e-7, density=1000.0))}, "hamaker"),
    ],
)
def test_refusals(arguments: dict[str, object], words: str) -> None:
    arguments = {"structure": FLOCS, "medium": WATER} | arguments
    with pytest.raises(InputError, match=words):
        pairwise_stability_ratio(**arguments)  # type: ignore[arg-type]


def test_volumes_are_checked() -> None:
    ratio = pairwise_stability_ratio(FLOCS, WATER)
    with pytest.raises(InputError, match="v=0 m3"):
        ratio(0.0, 1e-20)


def test_a_thick_layer_is_announced_once() -> None:
    small = Compact(Particles(diameter=5e-9, density=1055.0, hamaker=9e-21, surface_potential=0.01))
    with pytest.warns(ValidityWarning, match="kappa"):
        ratio = pairwise_stability_ratio(small, Medium.water(ionic_strength=1.0))
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        ratio(1e-25, 2e-25)
