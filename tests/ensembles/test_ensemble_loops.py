"""The compiled loops by themselves: classes, candidates at the rates of their bounds, and decisions on them."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import chi2

from aggsim.ensembles import _loops

Array = np.ndarray

BOUND = np.array([[1.0, 2.0, 3.0], [2.0, 0.5, 4.0], [3.0, 4.0, 0.1]])
BREAKING = np.array([[0.0, 0.02, 0.05], [0.01, 0.0, 0.0]])
LIMITS = _loops.Limits(1.0, 0, BOUND, BREAKING)


def samples_of(volume: Array, room: int = 0) -> _loops.Samples:
    """Replicates in a suspension of 10 m3 each; the classes are set."""
    replicates, count = volume.shape
    samples = _loops.Samples(
        np.pad(volume, ((0, 0), (0, room))),
        np.zeros((replicates, count + room), np.int64),
        np.full(replicates, count),
        np.zeros(replicates),
        np.full(replicates, 10.0),
        np.full((replicates, 2), _loops.NOTHING),
        np.zeros(replicates),
        *np.zeros((2, replicates), np.int64),
    )
    for r in range(replicates):
        _loops.classify(samples, 1.0, r)
    return samples


def test_classes_are_half_doublings() -> None:
    volume = np.array([[1.0, 1.41, 1.42, 2.0, 0.99, 64.0]])
    samples = samples_of(volume)
    np.testing.assert_array_equal(samples.section[0], [0, 0, 1, 2, -1, 12])
    assert _loops.classify(samples, 1.0, 0) == (-1, 12)


def test_candidates_come_at_the_rates_of_their_bounds() -> None:
    # class 0: 2 particles, class 1: 1, class 2: 3
    replicates = 20_000
    samples = samples_of(np.tile([2.0, 1.0, 1.5, 2.1, 1.1, 2.2], (replicates, 1)))
    block = _loops.propose(np.random.default_rng(1), samples, LIMITS, False, 1e9)
    first = block.offset[:-1]
    one, two, when = block.one[first], block.two[first], block.when[first]
    # sorted by class
    np.testing.assert_array_equal(samples.section[0], [0, 0, 1, 2, 2, 2])
    classes = samples.section[0]
    expected = {(i, j): BOUND[classes[i], classes[j]] / 10.0 for i in range(6) for j in range(i)}
    expected |= {(i, -1 - law): BREAKING[law, classes[i]] for i in range(6) for law in range(2)}
    total = sum(expected.values())
    pairs = [(max(i, j), min(i, j)) for i, j in zip(one.tolist(), two.tolist(), strict=True)]
    square, kinds = 0.0, 0
    for pair, rate in expected.items():
        chance = rate / total
        if rate == 0.0:
            assert pair not in pairs
            continue
        kinds += 1
        square += (pairs.count(pair) - replicates * chance) ** 2 / (replicates * chance)
    assert square < chi2.ppf(0.999, kinds - 1)
    # the first candidate that is not a particle with itself; 4 standard errors
    assert when.mean() == pytest.approx(1.0 / total, rel=4.0 / np.sqrt(replicates))
    for i, j, top in zip(one, two, block.ceiling[first], strict=True):
        assert top == (BOUND[classes[i], classes[j]] if j >= 0 else BREAKING[-1 - j, classes[i]])


def test_a_lone_particle_has_no_partner() -> None:
    block = _loops.propose(
        np.random.default_rng(1),
        samples_of(np.array([[1.0]])),
        LIMITS._replace(single=np.zeros((0, 3))),
        True,
        5.0,
    )
    assert block.one.size == 0
    assert block.end[0] == 5.0


def perform(samples: _loops.Samples, block: _loops.Block, rate: Array, pieces: Array, **limits: int) -> Array:
    living, _, _ = _loops.perform(
        np.random.default_rng(2), samples, LIMITS, block, rate, pieces,
        limits.get("few", 0), limits.get("many", 10**6),
    )  # fmt: skip
    return living


def test_candidates_with_the_rate_zero_change_nothing() -> None:
    samples = samples_of(np.tile([1.0, 1.5, 2.0, 2.2], (3, 1)))
    before = samples.volume.copy()
    block = _loops.propose(np.random.default_rng(1), samples, LIMITS, True, 1e9)
    nothing = np.zeros(block.one.size)
    living = perform(samples, block, nothing, np.zeros((nothing.size, 0)))
    np.testing.assert_array_equal(np.sort(samples.volume), np.sort(before))
    np.testing.assert_array_equal(samples.time, block.end)
    assert (living == 4).all()


def test_events_keep_the_volume_and_end_the_block_where_they_must() -> None:
    replicates = 50
    samples = samples_of(np.random.default_rng(3).uniform(1.0, 1.4, (replicates, 40)), room=40)
    total = samples.volume.sum(axis=1)
    block = _loops.propose(np.random.default_rng(1), samples, LIMITS, True, 1e9)
    volume = samples.volume[np.repeat(np.arange(replicates), np.diff(block.offset)), block.one]
    pieces = np.where(block.two < 0, 0.5 * volume, 0.0)[:, None] * np.ones(2)
    living = perform(samples, block, block.ceiling, pieces)
    np.testing.assert_allclose(samples.volume.sum(axis=1), total, rtol=1e-14)
    np.testing.assert_array_equal(living, (samples.volume > 0.0).sum(axis=1))
    np.testing.assert_array_equal(living, 40 - samples.collisions + samples.breakages)
    assert (samples.collisions + samples.breakages >= 1).all()
    waiting = samples.pending[:, 0] != _loops.NOTHING
    assert waiting.any()
    for r in np.flatnonzero(waiting):
        i, j = samples.pending[r]
        assert samples.volume[r, i] > 0.0
        assert j < 0 or samples.volume[r, j] > 0.0
        assert samples.time[r] <= block.end[r]


def test_a_waiting_candidate_is_renumbered_and_comes_first() -> None:
    samples = samples_of(np.array([[2.0, 0.0, 1.0, 1.5]]))
    samples.pending[0] = [0, 3]
    samples.pending_ceiling[0] = 4.0
    samples.time[0] = 0.25
    block = _loops.propose(np.random.default_rng(1), samples, LIMITS, True, 1e9)
    np.testing.assert_array_equal(samples.volume[0, :3], [1.0, 1.5, 2.0])
    assert (block.one[0], block.two[0], block.when[0], block.ceiling[0]) == (2, 1, 0.25, 4.0)


def test_a_limit_on_the_number_stops_the_replicate() -> None:
    samples = samples_of(np.full((5, 20), 1.0))
    block = _loops.propose(
        np.random.default_rng(1), samples, LIMITS._replace(single=np.zeros((0, 3))), True, 1e9
    )
    living = perform(samples, block, block.ceiling, np.zeros((block.one.size, 0)), few=19)
    assert (living == 19).all()
    assert (samples.pending == _loops.NOTHING).all()
