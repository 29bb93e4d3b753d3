"""Random samples against closed solutions, an exact master equation, and the deterministic solver."""

from __future__ import annotations

from collections import Counter
from typing import Any

import numpy as np
import pytest
from scipy.linalg import expm

import aggsim as ag
from aggsim.ensembles import EnsembleResult, monte_carlo
from aggsim.errors import AccuracyWarning, InputError, SimulationError, TimesError
from aggsim.verification.closed import Reversible, uniform

Array = np.ndarray

MONO = ag.Monodisperse(volume=1.0, number=1.0)
EXP = ag.Exponential(mean_volume=1.0, number=1.0)


class WholePieces:
    """Two pieces of whole volumes, drawn; its averages, those of a uniform law, stand in no test here."""

    def __init__(self) -> None:
        law = ag.fragments.uniform_binary()
        self.pieces, self.point_masses = law.pieces, law.point_masses

    def sample(self, parent: Array, generator: np.random.Generator) -> Array:
        part = generator.integers(1, np.rint(parent).astype(int)).astype(float)
        return np.stack([part, parent - part], axis=1)


BOTH = Reversible(0.125)  # half as many particles in the end
CLOSED = [
    # sources of the closed solutions: see aggsim/verification/closed.py
    ("constant", ag.Batch(ag.kernels.constant(1.0)), MONO, [1.0, 5.0], lambda t: 1 / (1 + t / 2)),
    ("constant, exponential", ag.Batch(ag.kernels.constant(1.0)), EXP, [1.0, 5.0], lambda t: 1 / (1 + t / 2)),
    ("sum", ag.Batch(ag.kernels.additive(1.0)), MONO, [0.5, 1.5], lambda t: np.exp(-t)),
    ("sum, exponential", ag.Batch(ag.kernels.additive(1.0)), EXP, [0.5, 1.5], lambda t: np.exp(-t)),
    ("constant with breakage", BOTH.vessel, EXP, [1.0, 8.0], BOTH.number),
]


@pytest.mark.parametrize(
    ("vessel", "start", "times", "number"), [case[1:] for case in CLOSED], ids=[case[0] for case in CLOSED]
)
def test_bands_hold_the_closed_solution(vessel: Any, start: Any, times: list[float], number: Any) -> None:
    # 99 % bands miss 1 in 100; three misses or fewer have a probability of 98 % then
    exact = number(np.array(times))
    inside = np.zeros(len(times), int)
    for seed in range(100, 200):
        result = monte_carlo(vessel, start, times, particles=400, replicates=10, seed=seed, confidence=0.99)
        total = result.total_number()
        inside += (total.lower <= exact) & (exact <= total.upper)
    assert (inside >= 97).all(), inside


def test_the_second_moment_is_that_of_the_closed_solution() -> None:
    times = np.array([1.0, 5.0])
    result = monte_carlo(
        ag.Batch(ag.kernels.constant(1.0)), MONO, times, particles=2000, replicates=50, seed=3
    )
    second = result.moment(2)
    assert (np.abs(second.mean - (1.0 + times)) < 4.0 * second.standard_error).all()
    assert (second.standard_error < 0.01 * second.mean).all()


def partitions(total: int, largest: int | None = None) -> list[tuple[int, ...]]:
    if total == 0:
        return [()]
    top = min(total, largest or total)
    return [(k, *rest) for k in range(top, 0, -1) for rest in partitions(total - k, k)]


@pytest.mark.parametrize("breaks", [False, True])
def test_a_closed_volume_follows_the_master_equation(breaks: bool) -> None:
    # ten monomers in a volume of 10: all 42 ways to share them out, with exact probabilities
    states = partitions(10)
    place = {state: k for k, state in enumerate(states)}
    generator = np.zeros((len(states), len(states)))

    def add(before: tuple[int, ...], lost: list[int], born: list[int], rate: float) -> None:
        after = Counter(before) - Counter(lost) + Counter(born)
        k = place[tuple(sorted(after.elements(), reverse=True))]
        generator[k, place[before]] += rate
        generator[place[before], place[before]] -= rate

    for state in states:
        for a in range(len(state)):
            for b in range(a):
                i, j = state[a], state[b]
                add(state, [i, j], [i + j], ((i - j) ** 2 + 1.0) / 10.0)
            for piece in range(1, state[a] if breaks else 1):
                add(state, [state[a]], [piece, state[a] - piece], 0.2)
    time, replicates = 1.5, 20_000
    chance = expm(time * generator)[:, place[(1,) * 10]]

    kernel = ag.kernels.from_function(lambda v, w: (v - w) ** 2 + 1.0)
    law = ag.Breakage(rate=lambda v: 0.2 * (v - 1.0), fragments=WholePieces(), smallest=1.0)
    vessel = ag.Batch(kernel, breakage=law if breaks else None)
    result = monte_carlo(vessel, MONO, time, particles=10, replicates=replicates, seed=5, refill=False)
    found = Counter(tuple(np.rint(v[::-1]).astype(int).tolist()) for v in result.particles[0])
    assert set(found) <= set(states)
    expected = replicates * chance
    often = expected > 5.0
    square = sum((found[s] - e) ** 2 / e for s, e in zip(states, expected, strict=True) if e > 5.0)
    # chi square has mean and half the variance `often.sum() - 1`; 4 standard deviations
    assert square < often.sum() + 4.0 * np.sqrt(2.0 * often.sum())


def brownian_case() -> tuple[ag.kernels.Kernel, ag.Monodisperse, float]:
    water = ag.Medium.water(temperature=298.15)
    latex = ag.Particles(diameter=400e-9, density=1055.0)
    kernel = ag.kernels.brownian(ag.Fractal(latex, dimension=2.1), water)
    start = ag.Monodisperse(diameter=400e-9, volume_fraction=1e-5)
    return kernel, start, 2.0 / (float(kernel(latex.volume, latex.volume)) * start.total_number)


def test_sections_and_samples_agree_on_brownian_aggregation() -> None:
    kernel, start, unit = brownian_case()
    times = np.array([2.0, 15.0]) * unit
    result = monte_carlo(ag.Batch(kernel), start, times, particles=2000, replicates=25, seed=7)
    sections = ag.simulate(ag.Batch(kernel), start, times)
    for quantity in (
        lambda r: r.total_number(),
        lambda r: r.moment(2),
        lambda r: r.mean_diameter(4, 3),
        lambda r: r.quantile_diameter(0.5, 3),
        lambda r: r.quantile_diameter(0.9, r=3),
    ):
        found, expected = quantity(result), quantity(sections)
        assert (np.abs(found.mean - expected) < 4.0 * found.standard_error).all()
        assert (found.standard_error < 0.01 * found.mean).all()


def test_the_same_seed_gives_the_same_particles() -> None:
    vessel = ag.Batch(ag.kernels.additive(1.0), breakage=uniform(0.1, 1.0))
    runs = [monte_carlo(vessel, EXP, [1.0, 2.0], particles=100, replicates=3, seed=s) for s in (1, 1, 2)]
    for first, second in zip(runs[0].particles[-1], runs[1].particles[-1], strict=True):
        np.testing.assert_array_equal(first, second)
    assert not np.array_equal(runs[0].total_number().values, runs[2].total_number().values)


def test_a_kernel_of_plain_python_gives_the_same_particles_as_one_of_the_library() -> None:
    own = ag.kernels.from_function(lambda v, w: v + w)
    options: dict[str, Any] = {"particles": 200, "replicates": 4, "seed": 3}
    results = [monte_carlo(ag.Batch(k), EXP, 1.0, **options) for k in (own, ag.kernels.additive(1.0))]
    np.testing.assert_array_equal(*[r.moment(2).values for r in results])


@pytest.mark.parametrize("refill", [True, False])
def test_the_volume_is_kept_to_round_off(refill: bool) -> None:
    vessel = ag.Batch(ag.kernels.constant(2.0), breakage=uniform(3.0, 1.0))
    times = [0.0, 1.0, 10.0]
    result = monte_carlo(vessel, EXP, times, particles=300, replicates=4, seed=2, refill=refill)
    volume = result.moment(1).values
    np.testing.assert_allclose(volume, np.broadcast_to(volume[0], volume.shape), rtol=1e-12)
    assert (result.breakages > 1000).all()


def test_scatter_falls_with_the_root_of_the_particles() -> None:
    scatter = []
    for particles in (100, 1600):
        result = monte_carlo(
            ag.Batch(ag.kernels.constant(1.0)), MONO, 2.0, particles=particles, replicates=200, seed=4
        )
        scatter.append(result.total_number().standard_deviation[0])
    # 5 % error of either: 4 standard deviations of the ratio
    assert scatter[0] / scatter[1] == pytest.approx(4.0, rel=0.28)


def test_strengths_act_by_their_integral() -> None:
    swing = ag.kernels.Strength(lambda t: 1.0 + np.sin(t))
    pulse = ag.kernels.Strength.steps([5.0, 5.5], [0.0, 4.0, 0.0])
    kernel = (
        0.2 * ag.kernels.constant(1.0) + ag.kernels.constant(0.5) * swing + ag.kernels.constant(1.0) * pulse
    )
    times = np.array([1.0, 5.25, 7.0])
    result = monte_carlo(ag.Batch(kernel), MONO, times, particles=1000, replicates=50, seed=1)
    integral = 0.2 * times + 0.5 * (times + 1.0 - np.cos(times)) + np.array([0.0, 1.0, 2.0])
    number = result.total_number()
    assert (np.abs(number.mean - 1.0 / (1.0 + integral / 2.0)) < 4.0 * number.standard_error).all()
    assert (number.standard_error < 0.005 * number.mean).all()


def test_breakage_alone_and_with_a_strength() -> None:
    # R. M. Ziff, E. D. McGrady, J. Phys. A 18 (1985) 3027: for S = v and uniform binary breakage of an
    # exponential start, n = (1 + t)**2 exp(-(1 + t) v), so that M0 = 1 + t and M2 = 2/(1 + t)
    law = uniform(1.0, 1.0) * ag.kernels.Strength.steps([2.0], [1.0, 6.5])
    vessel = ag.Batch(None, breakage=(0.5 * law, 0.5 * law))
    result = monte_carlo(vessel, EXP, [2.0, 4.0], particles=500, replicates=50, seed=6)
    age = np.array([2.0, 15.0])
    for estimate, exact in ((result.total_number(), 1.0 + age), (result.moment(2), 2.0 / (1.0 + age))):
        assert (np.abs(estimate.mean - exact) < 4.0 * estimate.standard_error).all()
        assert (estimate.standard_error < 0.01 * exact).all()
    assert max(len(v) for v in result.particles[-1]) < 1000  # thinned out on the way


def test_fragments_without_end_are_reported() -> None:
    law = uniform(1.0, -1.0)
    with pytest.raises(SimulationError, match="without end"):
        monte_carlo(ag.Batch(None, breakage=law), EXP, 100.0, particles=50, replicates=2, seed=1)


def test_a_spike_between_the_classes_is_reported() -> None:
    def spiked(v: Array, w: Array) -> Array:
        return np.where((np.abs(v - 1.05) < 0.01) & (np.abs(w - 1.05) < 0.01), 1e4, 1.0)

    start = ag.Monodisperse(volume=1.0, number=0.5) + ag.Monodisperse(volume=1.05, number=0.5)
    with pytest.warns(AccuracyWarning, match="faster than the bound"):
        monte_carlo(
            ag.Batch(ag.kernels.from_function(spiked)), start, 1.0, particles=100, replicates=2, seed=1
        )


def test_a_start_too_wide_for_the_samples_is_reported() -> None:
    start = ag.LogNormal(median_diameter=400e-9, gsd=3.0, volume_fraction=1e-5)
    with pytest.warns(AccuracyWarning, match="more particles"):
        monte_carlo(ag.Batch(ag.kernels.constant(1e-30)), start, 0.0, particles=100, replicates=3, seed=1)


def test_progress_is_told() -> None:
    told: list[tuple[float, float]] = []
    monte_carlo(
        ag.Batch(ag.kernels.constant(1.0)), MONO, [1.0, 4.0], particles=100, replicates=2, seed=1,
        progress=lambda fraction, time: told.append((fraction, time)),
    )  # fmt: skip
    assert told[-1] == (1.0, 4.0)
    assert (np.diff([fraction for fraction, _ in told]) >= 0.0).all()


UNCERTAIN = ag.Breakage(rate=lambda v: v, fragments=ag.fragments.power_law(exponent=-0.6))


def run(**changes: Any) -> EnsembleResult:
    arguments: dict[str, Any] = {
        "vessel": ag.Batch(ag.kernels.constant(1.0)), "start": MONO, "times": [1.0],
        "particles": 10, "replicates": 2, "seed": 0,
    }  # fmt: skip
    return monte_carlo(**(arguments | changes))


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"particles": 5}, "particles=5"),
        ({"replicates": 1}, "replicates=1"),
        ({"seed": -1}, "seed=-1"),
        ({"seed": None}, "seed=None"),
        ({"confidence": 1.0}, "confidence=1"),
        ({"start": 1.0}, "StartingDistribution"),
        ({"vessel": ag.kernels.constant(1.0)}, "closed batch"),
        (
            {"vessel": ag.StirredTank(ag.kernels.constant(1.0), residence_time=1.0, feed=MONO)},
            "streams or losses",
        ),
        ({"vessel": ag.Batch(ag.kernels.from_function(lambda v, w: v + 0 * w))}, "one way"),
        ({"vessel": ag.Batch(None, breakage=UNCERTAIN)}, "drawn at random"),
    ],
    ids=str,
)
def test_what_cannot_be_used_is_refused(changes: dict[str, Any], words: str) -> None:
    with pytest.raises(InputError, match=words):
        run(**changes)


@pytest.mark.parametrize("times", [[-1.0], [2.0, 1.0], []])
def test_times_that_cannot_be_used_are_refused(times: list[float]) -> None:
    with pytest.raises(TimesError, match="times"):
        run(times=times)
