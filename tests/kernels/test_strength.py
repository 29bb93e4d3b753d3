from __future__ import annotations

import math
import pickle

import pytest

from aggsim.errors import KernelError
from aggsim.kernels import Strength

PULSE = Strength.steps([10.0, 11.0], [0.0, 2.0, 0.5])


@pytest.mark.parametrize(
    ("time", "factor"),
    [(-1.0, 0.0), (0.0, 0.0), (9.999, 0.0), (10.0, 2.0), (10.5, 2.0), (11.0, 0.5), (1e9, 0.5)],
)
def test_steps_are_continuous_from_the_right(time: float, factor: float) -> None:
    assert PULSE(time) == factor


def test_an_interval_does_not_see_beyond_its_end() -> None:
    before, during, after = PULSE.on(0.0, 10.0), PULSE.on(10.0, 11.0), PULSE.on(11.0, 20.0)
    assert [before(t) for t in (0.0, 5.0, 10.0)] == [0.0, 0.0, 0.0]
    assert [during(t) for t in (10.0, 10.5, 11.0)] == [2.0, 2.0, 2.0]
    assert [after(t) for t in (11.0, 20.0)] == [0.5, 0.5]


def test_an_interval_of_a_general_function() -> None:
    ramp = Strength(lambda t: t if t < 10.0 else 100.0, jumps=(10.0,))
    assert ramp(10.0) == 100.0
    assert ramp.on(0.0, 10.0)(10.0) == pytest.approx(10.0, rel=1e-15)
    assert ramp.on(0.0, 10.0)(4.0) == 4.0
    assert ramp.on(0.0, 9.0)(9.0) == 9.0
    assert ramp.on(10.0, 12.0)(10.0) == 100.0


def test_an_interval_with_a_jump_inside_is_refused() -> None:
    with pytest.raises(KernelError, match=r"next jump.*10 s"):
        PULSE.on(0.0, 10.5)
    with pytest.raises(KernelError, match="stop"):
        PULSE.on(5.0, 5.0)


def test_products_unite_the_jumps() -> None:
    other = Strength.steps([5.0, 10.0], [1.0, 3.0, 4.0])
    both = PULSE * other
    assert both.jumps == (5.0, 10.0, 11.0)
    for time in (0.0, 5.0, 7.0, 10.0, 10.5, 11.0, 12.0):
        assert both(time) == PULSE(time) * other(time)
    assert both.on(10.0, 11.0)(11.0) == 8.0


def test_product_of_steps_and_a_smooth_law() -> None:
    both = PULSE * Strength(lambda t: math.exp(-t))
    assert both.jumps == (10.0, 11.0)
    assert both(10.5) == 2.0 * math.exp(-10.5)
    assert both.on(10.0, 11.0)(11.0) == pytest.approx(2.0 * math.exp(-11.0), rel=1e-14)


def test_jumps_are_sorted_and_unique() -> None:
    assert Strength(abs, jumps=(3.0, 1.0, 3.0)).jumps == (1.0, 3.0)


@pytest.mark.parametrize(
    ("value", "words"), [(-1.0, "-1"), (math.nan, "nan"), (math.inf, "inf"), ("much", "evaluated")]
)
def test_a_bad_factor_names_the_time(value: object, words: str) -> None:
    with pytest.raises(KernelError, match=f"time=7 s.*{words}"):
        Strength(lambda t: value)(7.0)  # type: ignore[arg-type, return-value]


def test_division_by_zero_in_the_function_names_the_time() -> None:
    with pytest.raises(KernelError, match="time=0 s"):
        Strength(lambda t: 1.0 / t)(0.0)


def test_refusals() -> None:
    with pytest.raises(KernelError, match="one factor more"):
        Strength.steps([1.0], [1.0])
    with pytest.raises(KernelError, match="increase"):
        Strength.steps([2.0, 1.0], [1.0, 2.0, 3.0])
    with pytest.raises(KernelError, match=r"values\[1\]"):
        Strength.steps([1.0], [1.0, -2.0])
    with pytest.raises(KernelError, match="plain numbers"):
        Strength(0.3)  # type: ignore[arg-type]
    with pytest.raises(KernelError, match="jumps"):
        Strength(abs, jumps=(math.nan,))


def test_pickles() -> None:
    again = pickle.loads(pickle.dumps(PULSE * PULSE))
    assert again(10.5) == 4.0
