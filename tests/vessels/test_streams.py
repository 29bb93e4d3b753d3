from __future__ import annotations

import numpy as np
import pytest

import aggsim as ag
from aggsim.errors import InputError
from aggsim.vessels import Stream
from aggsim.vessels.streams import FED, WITHDRAWN, Drain, Inflow, Outflow, Source, feeds_of, product

MONO = ag.Monodisperse(volume=1.0, number=1.0)
LOGNORMAL = ag.LogNormal(median_diameter=1e-6, gsd=1.5, volume_fraction=1e-4)


def test_a_source_does_not_depend_on_what_is_there() -> None:
    source = Source(np.array([1.0, 2.0]), 5.0, entry=4)
    for number in (np.zeros(5), np.arange(5.0)):
        out, jacobian = np.ones(5), np.ones((5, 5))
        assert np.isfinite(source.add_rates(number, 0.5, out))
        source.add_jacobian(number, 0.5, jacobian)
        np.testing.assert_array_equal(out, [1.5, 2.0, 1.0, 1.0, 3.5])
        np.testing.assert_array_equal(jacobian, 1.0)


def test_a_drain_takes_in_proportion_and_keeps_account() -> None:
    rate, volume = np.array([0.1, 0.3]), np.array([1.0, 4.0])
    drain = Drain(rate, volume, entry=4)
    number = np.array([2.0, 5.0, 9.0, 9.0, 9.0])
    out = np.zeros(5)
    drain.add_rates(number, 0.5, out)
    np.testing.assert_allclose(out, [-0.1, -0.75, 0.0, 0.0, 0.1 + 3.0], rtol=1e-14)
    jacobian = np.zeros((5, 5))
    drain.add_jacobian(number, 0.5, jacobian)
    np.testing.assert_allclose(jacobian @ number, out, rtol=1e-14)  # linear
    assert not jacobian[:, 2:].any()
    number[1] = np.nan
    assert not np.isfinite(drain.add_rates(number, 1.0, np.zeros(5)))


def test_feeds_come_as_one_or_several() -> None:
    assert feeds_of(None) == ()
    assert feeds_of(MONO) == (ag.Feed(distribution=MONO),)
    two = [ag.Feed(distribution=MONO, share=0.3), ag.Feed(distribution=LOGNORMAL, share=0.7)]
    assert feeds_of(two) == tuple(two)


def test_streams_and_feeds_are_named() -> None:
    assert Inflow(ag.Feed(distribution=MONO), 0.1).streams == (FED,)
    assert Inflow(ag.Feed(distribution=MONO), 0.1).feeds == (MONO,)
    assert Outflow(0.1).streams == (WITHDRAWN,)
    assert Outflow(0.1).feeds == ()
    assert Stream("fed", inward=True) == FED


def test_factors_in_time_multiply() -> None:
    steps = ag.kernels.Strength.steps([1.0], [1.0, 2.0])
    assert product(None, None) is None
    assert product(steps, None) is steps
    assert product(None, steps) is steps
    both = product(steps, ag.kernels.Strength(lambda t: t))
    assert both is not None
    assert (both(0.5), both(3.0)) == (0.5, 6.0)
    assert both.jumps == (1.0,)


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"distribution": 1.0}, "not a starting distribution"),
        ({"distribution": ag.SizeGrid.monomers(1.0, 3)}, "not a starting distribution"),
        ({"share": 0.0}, "share=0"),
        ({"share": 1.1}, "share=1.1"),
        ({"share": -0.5}, "share=-0.5"),
        ({"share": np.nan}, "share=nan"),
        ({"share": None}, "share=None"),
        ({"strength": 0.5}, "not a factor in time"),
        ({"strength": lambda t: 1.0}, "not a factor in time"),
    ],
)
def test_feeds_that_are_none_are_refused(options: dict[str, object], words: str) -> None:
    with pytest.raises(InputError, match=words):
        ag.Feed(**{"distribution": MONO, **options})  # type: ignore[arg-type]


@pytest.mark.parametrize("feed", [3.0, [MONO, 3.0], "feed", [[MONO]]])
def test_what_is_no_feed_is_refused(feed: object) -> None:
    with pytest.raises(InputError, match=r"feed=.*allowed: a starting distribution, a Feed"):
        ag.StirredTank(None, residence_time=1.0, feed=feed)


def test_shares_make_the_whole_flow_at_most() -> None:
    thirds = [ag.Feed(distribution=MONO, share=1.0 / 3.0)] * 3
    assert len(feeds_of(thirds)) == 3  # 1 to round-off
    with pytest.raises(InputError, match=r"shares that make 1\.2"):
        feeds_of([ag.Feed(distribution=MONO, share=0.6)] * 2)
    with pytest.raises(InputError, match="shares that make 2"):
        feeds_of([MONO, LOGNORMAL])  # each of them would be the whole flow
