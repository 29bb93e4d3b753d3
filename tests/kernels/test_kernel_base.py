from __future__ import annotations

import math
import pickle
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import aggsim.kernels as kernels
from aggsim.errors import KernelError
from aggsim.inputs import Flow, Fractal, Medium, Particles
from aggsim.kernels import Kernel, Part, Strength

WATER = Medium.water(293.15)
AIR = Medium.air(293.15)
LATEX = Particles(diameter=400e-9, density=1055.0)
FLOCS = Fractal(LATEX, dimension=2.1, prefactor=0.8, hydrodynamic_ratio=0.9)
MIXING = Flow(shear_rate=50.0)
SIZES = LATEX.volume * np.geomspace(1.0, 1e9, 40)

PHYSICAL = {
    "brownian": kernels.brownian(FLOCS, WATER),
    "brownian in gas": kernels.brownian_in_gas(FLOCS, AIR),
    "shear": kernels.shear(FLOCS, MIXING),
    "turbulent shear": kernels.turbulent_shear(FLOCS, MIXING),
    "settling": kernels.settling(FLOCS, WATER),
    "settling beyond Stokes": kernels.settling(FLOCS, WATER, drag=kernels.SchillerNaumann()),
    "constant": kernels.constant(1e-17),
    "additive": kernels.additive(2.0),
    "multiplicative": kernels.multiplicative(3.0),
}
SHEAR, BROWNIAN = PHYSICAL["shear"], PHYSICAL["brownian"]


def stability(v: Any, w: Any) -> Any:
    return 2.0 + 1e18 * (v + w)


def efficiency(v: Any, w: Any) -> Any:
    return np.minimum(v, w) / np.maximum(v, w)


@pytest.mark.parametrize("kernel", PHYSICAL.values(), ids=PHYSICAL.keys())
def test_every_kernel_broadcasts_pickles_and_fills_a_matrix(kernel: Kernel) -> None:
    ((name, matrix, strength),) = kernel.part_matrices(SIZES)
    assert (name,) == kernel.names
    assert strength is None
    np.testing.assert_array_equal(matrix, matrix.T)
    np.testing.assert_allclose(matrix, kernel(SIZES[:, None], SIZES), rtol=1e-14)
    assert isinstance(kernel(SIZES[0], SIZES[1]), float)
    assert kernel(SIZES[0], SIZES).shape == SIZES.shape
    again = pickle.loads(pickle.dumps(kernel))
    assert again == kernel
    np.testing.assert_array_equal(again(SIZES, SIZES[::-1]), kernel(SIZES, SIZES[::-1]))


@pytest.mark.parametrize("kernel", PHYSICAL.values(), ids=PHYSICAL.keys())
@given(v=st.floats(1e-27, 1e-7), w=st.floats(1e-27, 1e-7))
def test_every_kernel_is_symmetric_and_not_negative(kernel: Kernel, v: float, w: float) -> None:
    rate = kernel(v, w)
    assert rate >= 0.0
    assert rate == pytest.approx(kernel(w, v), rel=1e-13)


def test_scaling() -> None:
    pair = (SIZES[0], SIZES[5])
    plain = SHEAR(*pair)
    for scaled in (0.3 * SHEAR, SHEAR * 0.3, np.float64(0.3) * SHEAR, SHEAR * np.float64(0.3)):
        assert scaled(*pair) == pytest.approx(0.3 * plain, rel=1e-15)
        assert scaled.names == ("shear",)
    assert (SHEAR / 40.0)(*pair) == pytest.approx(plain / 40.0, rel=1e-15)
    assert (0 * SHEAR)(*pair) == 0.0


def test_scales_multiply_and_reach_every_part() -> None:
    total = 2.0 * (0.5 * BROWNIAN + SHEAR) / 4.0
    assert [part.scale for part in total.parts] == [0.25, 0.5]


def test_sum_keeps_parts_and_names() -> None:
    total = BROWNIAN / 40.0 + 0.3 * SHEAR + PHYSICAL["settling"]
    assert total.names == ("Brownian", "shear", "settling")
    rates = [matrix for _, matrix, _ in total.part_matrices(SIZES)]
    np.testing.assert_allclose(sum(rates), total(SIZES[:, None], SIZES), rtol=1e-14)
    np.testing.assert_allclose(rates[0], BROWNIAN.part_matrices(SIZES)[0].matrix / 40.0, rtol=1e-15)


def test_builtin_sum() -> None:
    total = sum([BROWNIAN, SHEAR])
    assert isinstance(total, Kernel)
    assert total == BROWNIAN + SHEAR


def test_equal_names_are_counted() -> None:
    assert (SHEAR + SHEAR + SHEAR).names == ("shear", "shear 2", "shear 3")
    assert ((SHEAR + SHEAR) + (SHEAR + SHEAR)).names == ("shear", "shear 2", "shear 3", "shear 4")
    batch = kernels.constant(1.0).named("run 2")
    assert (batch + batch).names == ("run 2", "run 2 2")


def test_a_part_by_its_name() -> None:
    total = BROWNIAN + 0.3 * SHEAR
    assert total["shear"] == 0.3 * SHEAR
    with pytest.raises(KernelError, match="'Brownian', 'shear'"):
        total["settling"]


def test_renaming() -> None:
    assert BROWNIAN.named("slow").names == ("slow",)
    assert (BROWNIAN + SHEAR).named("tank").names == ("tank: Brownian", "tank: shear")
    with pytest.raises(KernelError, match="name"):
        BROWNIAN.named("")


def test_functions_of_the_pair() -> None:
    v, w = SIZES[:, None], SIZES[None, :]
    np.testing.assert_allclose((BROWNIAN / stability)(v, w), BROWNIAN(v, w) / stability(v, w), rtol=1e-15)
    for product in (SHEAR * efficiency, efficiency * SHEAR):
        np.testing.assert_allclose(product(v, w), SHEAR(v, w) * efficiency(v, w), rtol=1e-15)
    both = BROWNIAN * efficiency / stability
    assert pickle.loads(pickle.dumps(both)) == both
    assert both.names == ("Brownian",)


def test_an_infinite_stability_ratio_stops_collisions() -> None:
    assert (BROWNIAN / (lambda v, w: np.inf))(1e-18, 1e-18) == 0.0


def test_strength_multiplies_in_time_and_stays_out_of_the_matrix() -> None:
    pulse = Strength.steps([10.0], [1.0, 0.2])
    kernel = BROWNIAN + 2.0 * SHEAR * pulse
    pair = (SIZES[0], SIZES[3])
    assert kernel(*pair, time=20.0) == pytest.approx(BROWNIAN(*pair) + 0.4 * SHEAR(*pair), rel=1e-14)
    assert (pulse * SHEAR)(*pair, 20.0) == pytest.approx(0.2 * SHEAR(*pair), rel=1e-14)
    matrices = kernel.part_matrices(SIZES)
    assert [part.strength for part in matrices] == [None, pulse]
    np.testing.assert_array_equal(matrices[1].matrix, 2.0 * SHEAR.part_matrices(SIZES)[0].matrix)
    twice = SHEAR * pulse * Strength.steps([5.0], [3.0, 4.0])
    assert twice.parts[0].strength is not None
    assert twice.parts[0].strength.jumps == (5.0, 10.0)
    assert twice(*pair, time=12.0) == pytest.approx(0.8 * SHEAR(*pair), rel=1e-14)


@pytest.mark.parametrize("factor", [-1.0, math.nan, math.inf, "half", None, True, np.array([1.0, 2.0])])
def test_bad_factors_are_refused(factor: Any) -> None:
    with pytest.raises(KernelError, match="factor"):
        SHEAR * factor
    with pytest.raises(KernelError, match="divisor"):
        SHEAR / factor


def test_other_arithmetic_is_refused() -> None:
    with pytest.raises(KernelError, match="divisor=0"):
        SHEAR / 0
    with pytest.raises(KernelError, match=r"a \+ b"):
        SHEAR * BROWNIAN
    with pytest.raises(KernelError, match="divisor"):
        SHEAR / BROWNIAN
    with pytest.raises(KernelError, match="divisor"):
        SHEAR / Strength(abs)
    with pytest.raises(TypeError):
        SHEAR + 1.0  # type: ignore[operator]
    with pytest.raises(TypeError):
        1.0 / SHEAR  # type: ignore[operator]


@pytest.mark.parametrize(
    ("rate", "words"),
    [
        (lambda v, w: v - w, r"at least 0.*formula"),
        (lambda v, w: np.log(v * 0.0 * w), "inf"),
        (lambda v, w: np.full(np.broadcast_shapes(v.shape, w.shape), np.nan), "nan"),
        (lambda v, w: 1.0 / (v - w) ** 2, "inf"),
        (lambda v, w: v + 2.0 * w, "one way"),
        (lambda v, w: v + 0.0 * v[:1], "one way"),
        (lambda v, w: np.ones(7), "shape"),
        (lambda v, w: 1.0 if v > w else 2.0, r"numpy\.where"),
        (lambda v, w: math.sqrt(v), r"numpy\.sqrt"),
        (lambda v: v, "could not be evaluated"),
    ],
)
def test_what_is_no_collision_rate_is_refused(rate: Any, words: str) -> None:
    kernel = SHEAR + kernels.from_function(rate, name="mine")
    with pytest.raises(KernelError, match=f"'mine'.*{words}"):
        kernel.part_matrices(np.array([1.0, 2.0, 3.0]))


def test_the_refusal_names_the_pair() -> None:
    kernel = kernels.from_function(lambda v, w: np.where(v * w > 5.0, -4.0, 1.0))
    with pytest.raises(KernelError, match=r"'custom'.*volumes 2 and 3 m3 \(diameters 1\.56.* and 1\.78.*=-4"):
        kernel.part_matrices(np.array([1.0, 2.0, 3.0]))


def test_a_function_that_divides_by_zero_is_refused() -> None:
    with pytest.raises(KernelError, match=r"'Brownian'.*inf"):
        (BROWNIAN / (lambda v, w: 0.0 * v * w)).part_matrices(SIZES)


def test_asymmetry_at_round_off_is_averaged() -> None:
    kernel = kernels.from_function(lambda v, w: (v + w) * np.where(v > w, 1.0 + 1e-13, 1.0))
    matrix = kernel.part_matrices(SIZES)[0].matrix
    np.testing.assert_array_equal(matrix, matrix.T)


def test_a_rate_may_be_one_number() -> None:
    matrix = kernels.from_function(lambda v, w: 1e-17).part_matrices(SIZES)[0].matrix
    np.testing.assert_array_equal(matrix, np.full((40, 40), 1e-17))


@pytest.mark.parametrize("volume", [0.0, -1.0, math.nan, math.inf, "small"])
def test_volumes_must_be_positive(volume: Any) -> None:
    with pytest.raises(KernelError, match="above 0"):
        SHEAR(volume, 1e-18)
    with pytest.raises(KernelError, match="above 0"):
        SHEAR.part_matrices([1e-18, volume])


def test_part_matrices_take_one_axis() -> None:
    with pytest.raises(KernelError, match="shape"):
        SHEAR.part_matrices(np.ones((2, 2)))


def test_construction_is_checked() -> None:
    with pytest.raises(KernelError, match="parts"):
        Kernel(())
    with pytest.raises(KernelError, match="differ"):
        Kernel((SHEAR.parts[0], SHEAR.parts[0]))
    with pytest.raises(KernelError, match="rate"):
        Part("mine", 3.0)  # type: ignore[arg-type]
    with pytest.raises(KernelError, match="rate"):
        kernels.from_function(3.0)  # type: ignore[arg-type]


def test_repr_reads_as_the_formula() -> None:
    kernel = BROWNIAN / 40.0 + SHEAR * Strength.steps([1.0], [1.0, 0.0])
    assert repr(kernel) == "Kernel(0.025 * Brownian + shear * strength(time))"


@pytest.mark.parametrize(
    ("build", "words"),
    [
        (lambda: kernels.brownian(LATEX, WATER), r"Compact\(\.\.\.\)"),
        (lambda: kernels.brownian(WATER, FLOCS), "structure first"),
        (lambda: kernels.brownian(FLOCS, 298.15), "Medium"),
        (lambda: kernels.brownian_in_gas(FLOCS, WATER), "mean_free_path"),
        (lambda: kernels.shear(FLOCS, 50.0), r"Flow\(shear_rate"),
        (lambda: kernels.turbulent_shear(3.0, MIXING), "structure"),
        (lambda: kernels.settling(FLOCS, MIXING), "Medium"),
        (lambda: kernels.settling(FLOCS, WATER, drag=kernels.Stokes), r"Stokes\(\)"),
    ],
)
def test_wrong_arguments_are_named(build: Any, words: str) -> None:
    with pytest.raises(ValueError, match=words):
        build()
