from __future__ import annotations

from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest

import aggsim as ag
from aggsim.ensembles import samples
from aggsim.ensembles.bounds import Bounds
from aggsim.ensembles.mechanisms import Interval, Mechanism, collision_mechanisms
from aggsim.errors import InputError, SimulationError


def halves(parent: np.ndarray, generator: np.random.Generator) -> np.ndarray:
    return np.stack([0.5 * parent, 0.5 * parent], axis=1)


def run_of(
    volume: Any, *, kernel: float = 0.0, rate: Any = np.zeros_like, sample: Any = halves, refill: bool = True
) -> samples.Run:
    volume = np.array(volume, dtype=float)
    bounds = Bounds(collision_mechanisms(ag.kernels.constant(kernel)), [Mechanism(rate)], float(volume.min()))
    return samples.Run(
        volume, 10.0, bounds, [SimpleNamespace(sample=sample)], refill, np.random.default_rng(1)
    )


def silent(time: float) -> None:
    """Progress that nobody follows."""


def test_a_sample_is_doubled_when_half_of_it_is_left() -> None:
    run = run_of(np.full((3, 16), 1.0), kernel=1.0)
    run.advance(Interval(0.0, 20.0), silent)
    assert (run.samples.collisions > 8).all()
    for volume, suspension in zip(run.particles(), run.samples.suspension, strict=True):
        assert 8 < volume.size <= 16
        assert suspension > 10.0
        assert volume.sum() / suspension == pytest.approx(1.6, rel=1e-14)


def test_a_sample_is_thinned_out_when_it_has_doubled() -> None:
    run = run_of(np.full((3, 16), 1.0), rate=np.ones_like)
    run.advance(Interval(0.0, 5.0), silent)
    assert (run.samples.breakages > 16).all()
    for volume, suspension in zip(run.particles(), run.samples.suspension, strict=True):
        assert 16 <= volume.size < 32
        assert suspension < 10.0
        assert volume.sum() / suspension == pytest.approx(1.6, rel=1e-14)


def test_thinning_takes_one_of_two_neighbours_in_size() -> None:
    sizes = np.concatenate([np.full(10, 1.0), np.full(11, 5.0)])
    kept = []
    for seed in range(200):
        run = run_of([sizes])
        run.random = np.random.default_rng(seed)
        run._resize(0, double=False)
        (volume,) = run.particles()
        assert np.count_nonzero(volume == 5.0) in {5, 6}
        assert volume.size in {10, 11}
        kept.append(np.count_nonzero(volume == 5.0))
        assert volume.sum() / run.samples.suspension[0] == pytest.approx(6.5, rel=1e-14)
    assert np.mean(kept) == pytest.approx(5.5, abs=4 * 0.5 / np.sqrt(200))


def test_without_refill_a_sample_stays_what_it_is(monkeypatch: pytest.MonkeyPatch) -> None:
    run = run_of(np.full((2, 16), 1.0), kernel=1.0, refill=False)
    run.advance(Interval(0.0, 1e4), silent)
    assert [volume.tolist() for volume in run.particles()] == [[16.0], [16.0]]
    assert (run.samples.suspension == 10.0).all()
    monkeypatch.setattr(samples, "LARGEST_SAMPLE", 100)
    run = run_of(np.full((2, 16), 1.0), rate=np.ones_like, refill=False)
    with pytest.raises(SimulationError, match="refill=True"):
        run.advance(Interval(0.0, 100.0), silent)


def test_fragments_without_end_are_reported() -> None:
    run = run_of(np.full((2, 16), 1.0), rate=np.ones_like)
    with pytest.raises(SimulationError, match="without end"):
        run.advance(Interval(0.0, 1e4), silent)


@pytest.mark.parametrize(
    "sample",
    [
        lambda parent, generator: parent,
        lambda parent, generator: parent[:-1, None],
        lambda parent, generator: np.stack([parent, 0.1 * parent], axis=1),
        lambda parent, generator: np.stack([1.1 * parent, -0.1 * parent], axis=1),
    ],
    ids=["one axis", "one parent too few", "volume made", "negative"],
)
def test_fragments_that_are_none_are_refused(sample: Any) -> None:
    run = run_of(np.full((2, 16), 1.0), rate=np.ones_like, sample=sample)
    with pytest.raises(InputError, match=r"fragments\.sample"):
        run.advance(Interval(0.0, 1.0), silent)


def test_parents_that_do_not_break_are_not_drawn() -> None:
    def sample(parent: np.ndarray, generator: np.random.Generator) -> np.ndarray:
        assert (parent > 1.2).all()
        return halves(parent, generator)

    run = run_of(
        np.linspace([1.0, 1.0], [2.0, 2.0], 16).T, rate=lambda v: np.where(v > 1.2, 1.0, 0.0), sample=sample
    )
    run.advance(Interval(0.0, 50.0), silent)
    assert all((volume <= 1.2).all() for volume in run.particles())


def test_time_is_reported_and_reached() -> None:
    told: list[float] = []
    run = run_of(np.full((3, 16), 1.0), kernel=1.0)
    run.advance(Interval(0.0, 3.0), told.append)
    assert told[-1] == 3.0
    assert told == sorted(told)
    assert (run.samples.time == 3.0).all()
