from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from scipy import special

from aggsim.breakage import _quadrature, fragments
from aggsim.breakage._quadrature import Panels
from aggsim.breakage._sampling import dirichlet, pair, shares
from aggsim.errors import BreakageError

PARENT = np.array([1e-21, 1e-18])


class Given:
    """A generator that deals out what it was given, one list per call."""

    def __init__(self, *numbers: Any) -> None:
        self.numbers = list(numbers)

    def random(self, size: int) -> np.ndarray:
        return np.broadcast_to(np.asarray(self.numbers.pop(0)), size)


def test_a_pair_makes_up_its_parent() -> None:
    share = np.array([0.0, 1e-30, 0.3, 1.0])
    parent = np.full(4, 7e-19)
    pieces = pair(parent, share)
    np.testing.assert_array_equal(pieces[:, 0], share * parent)
    np.testing.assert_allclose(pieces.sum(axis=1), parent, rtol=1e-15)
    assert (pieces >= 0.0).all()


@pytest.mark.parametrize(("pieces", "shape"), [(2, 0.01), (2, 1.0), (2, 1000.0), (3, 0.5), (12, 1.0 / 11.0)])
def test_shares_of_a_dirichlet_law(pieces: int, shape: float) -> None:
    events = 20_000
    share = dirichlet(np.ones(events), pieces, shape, np.random.default_rng(1))
    np.testing.assert_allclose(share.sum(axis=1), 1.0, rtol=1e-14)
    rest = (pieces - 1.0) * shape
    for order in (1.0, 2.0, 3.0):
        mean = math.exp(special.betaln(shape + order, rest) - special.betaln(shape, rest))
        value = share**order
        error = value.std(axis=0) / math.sqrt(events)
        assert (np.abs(value.mean(axis=0) - mean) < 4.0 * error).all()


def test_small_shares_keep_their_digits() -> None:
    """A U shape so deep that most pairs are the parent and a piece far below its last digit."""
    events = 20_000
    share = dirichlet(np.ones(events), 2, 0.01, np.random.default_rng(2))
    for limit in (1e-100, 1e-20, 1e-3):
        chance = 2.0 * special.betainc(0.01, 0.01, limit)
        found = (share.min(axis=1) < limit).mean()
        assert abs(found - chance) < 4.0 * math.sqrt(chance * (1.0 - chance) / events)
        # as often the first as the second
        assert abs((share[:, 1] < limit).mean() - chance / 2.0) < 4.0 * math.sqrt(chance / 2.0 / events)


@pytest.mark.parametrize("shape", [0.5, 1.0, 7.3, 40.0])
def test_shares_of_a_density_are_at_its_quantiles(shape: float) -> None:
    """Of a density of powers 4 z (1 - z) on panels that resolve it, at given places in all of them."""
    width = 0.05 if shape > 1.0 else 1e-3  # of panels in shares
    panels = _quadrature.refined(
        _quadrature.cells(np.ones(2), np.array([0.3])),
        lambda p: (p.high - p.low > width) & (p.low > 0.0) | (p.high > np.maximum(4.0 * p.low, 1e-25)),
    )
    low_half = panels.only(~panels.upper)
    low_half = low_half.only(np.lexsort((low_half.low, low_half.parent)))
    at = _quadrature.points(low_half)
    count = at.weight * np.exp(
        (shape - 1.0) * np.log(at.share * at.rest) - special.betaln(shape, shape) + math.log(2.0)
    )
    chance = np.array([0.0, 1e-6, 0.01, 0.3, 0.7, 0.999, 1.0 - 2.0**-53])
    place = np.repeat([0, 1], chance.size)
    within = np.array([0.37, 0.0, 0.9, 0.5, 0.2, 0.62, 1.0 - 2.0**-53] * 2)
    found = shares(low_half, count, place, Given(np.tile(chance, 2), within))  # type: ignore[arg-type]
    edges = 2.0 * special.betainc(shape, shape, np.append(low_half.low[low_half.parent == 0], 0.5))
    panel = np.searchsorted(edges[1:-1], np.tile(chance, 2), "right")
    expected = edges[panel] + within * (edges[panel + 1] - edges[panel])
    np.testing.assert_allclose(2.0 * special.betainc(shape, shape, found), expected, rtol=0, atol=1e-11)


def test_a_parent_gets_no_share_of_its_neighbour() -> None:
    panels = Panels(
        np.array([0, 1, 1, 2]), np.zeros(4, dtype=bool), np.array([0.0, 0.1, 0.2, 0.3]), np.full(4, 0.4)
    )
    panels = panels._replace(high=np.array([0.1, 0.2, 0.3, 0.4]))
    count = _quadrature.points(panels).weight
    for chance in (0.0, 1.0):  # one more than a generator gives
        found = shares(panels, count, np.array([2, 1, 0]), Given(chance, 0.5))  # type: ignore[arg-type]
        assert (found[::-1] > [0.0, 0.1, 0.3]).all()
        assert (found[::-1] < [0.1, 0.3, 0.4]).all()


@pytest.mark.parametrize("shape", [3.0, 40.0, 1000.0])
def test_an_own_density_is_drawn_at_its_quantiles(shape: float) -> None:
    beta = fragments.beta(shape=shape)
    own = fragments.from_function(beta.density, 2.0)
    parent = np.full(1000, 1e-18)
    share = own.sample(parent, np.random.default_rng(4))[:, 0] / parent
    # given the panel, the place in it is uniform: so is the quantile; 1.95 / sqrt(n) is exceeded once in 1000
    quantile = np.sort(2.0 * special.betainc(shape, shape, share))
    uniform = (np.arange(1000) + 0.5) / 1000
    assert np.abs(quantile - uniform).max() < 1.95 / math.sqrt(1000)


@pytest.mark.parametrize(
    ("law", "words"),
    [
        (
            fragments.power_law(exponent=-0.6),
            r"exponent.*=-0\.6, 3\.5 pieces.*Try: -0\.5 \(3 pieces\) or -0\.666666666667 \(4 pieces\); or simulate",
        ),
        (
            fragments.from_function(lambda v, u: 1.5 / u * (v / u) ** -0.5, 3.0),
            "pieces of fragments that are drawn at random=3 for a parent of 1e-21 m3.*allowed: 2",
        ),
        (
            fragments.from_function(lambda v, u: 2.0 / u + 0.0 * v, lambda u: np.where(u > 1e-20, 2.5, 2.0)),
            "2.5 for a parent of 1e-18 m3",
        ),
        (fragments.from_function(lambda v, u: 2.0 / u + 0.0 * v, lambda u: np.nan * u), "nan"),
        # two pieces and the whole volume on average: now and then three, now and then one
        (
            fragments.from_function(
                lambda v, u: (1.8 + 2.4 * v / u - 6.0 * (v / u) ** 2 + 4.0 * (v / u) ** 3) / u, 2.0
            ),
            "without a counterpart",
        ),
        (fragments.from_function(lambda v, u: 1.8 / u + 0.0 * v, 2.0), r"1\.8 fragments"),
        (fragments.from_function(lambda v, u: -2.0 / u + 0.0 * v, 2.0), "at least 0"),
    ],
    ids=str,
)
def test_what_cannot_be_drawn_is_refused(law: Any, words: str) -> None:
    with pytest.raises(BreakageError, match=words):
        law.sample(PARENT, np.random.default_rng(0))


def test_what_a_power_law_may_be_is_taken_up() -> None:
    law = fragments.power_law(exponent=-0.666666666667)
    assert law.sample(PARENT, np.random.default_rng(0)).shape == (2, 4)
