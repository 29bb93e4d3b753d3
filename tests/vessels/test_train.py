from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.special import gammainc

import aggsim as ag
from aggsim.errors import InputError
from aggsim.vessels import Site
from aggsim.vessels.train import FROM_TANKS, TO_TANKS, Exchange

Array = np.ndarray

MONO = ag.Monodisperse(volume=1.0, number=1.0)
LARGE = ag.Monodisperse(volume=4.0, number=2.0)
GRID = ag.SizeGrid.monomers_then_geometric(1.0, 4096.0, per_doubling=3)
EMPTY = ag.Tank(None, volume=2.0)


def tanks(*volumes: float, kernel: object = None) -> list[ag.Tank]:
    return [ag.Tank(kernel, volume=volume) for volume in volumes]


def run(train: ag.Train, start: object, times: object) -> ag.Result:
    return ag.simulate(train, start, times, grid=GRID, rtol=1e-9)  # type: ignore[arg-type]


def balanced(result: ag.Result) -> bool:
    """Volume of all tanks together and of each one alone; found 1.5e-13, round-off where LSODA changes its order."""
    return all(np.abs(r.balance.closure).max() <= 1e-12 for r in (result, *result.tanks))


# ---- residence times: O. Levenspiel, Chemical Reaction Engineering, 3rd ed., ch. 14, Wiley 1999


@pytest.mark.parametrize("count", [1, 2, 3, 6])
def test_equal_tanks_answer_a_step_and_a_pulse_as_the_gamma_distribution(count: int) -> None:
    """A step: the gamma distribution function of order n. A pulse into the first tank: its density."""
    times = np.array([0.5, 1.0, 2.0, 5.0, 12.0, 30.0])
    step = run(ag.Train([EMPTY] * count, flow=1.0, feed=MONO), None, times)
    np.testing.assert_allclose(step.total_number(), gammainc(count, times / 2.0), rtol=1e-7, atol=1e-12)
    pulse = run(ag.Train([EMPTY] * count, flow=1.0), [MONO, *[None] * (count - 1)], times)
    y = times / 2.0
    density = y ** (count - 1) / math.factorial(count - 1) * np.exp(-y)
    np.testing.assert_allclose(pulse.total_number(), density, rtol=1e-6, atol=1e-12)
    assert balanced(step)
    assert balanced(pulse)
    # all that entered leaves
    later = run(ag.Train([EMPTY] * count, flow=1.0), [MONO, *[None] * (count - 1)], [200.0])
    assert later.balance.withdrawn[-1] == pytest.approx(1.0 / count, rel=1e-9)


def test_a_pulse_of_the_feed_answers_alike() -> None:
    """A short burst of 1 / width leaves as the pulse does, to the second order in its width."""
    width = 1e-3
    burst = ag.Feed(
        distribution=MONO, strength=ag.kernels.Strength.steps([1.0, 1.0 + width], [0.0, 2.0 / width, 0.0])
    )
    times = np.array([1.0, 2.0, 4.0, 9.0])
    result = run(ag.Train([EMPTY] * 3, flow=1.0, feed=burst), None, times)
    y = (times - 1.0 - width / 2) / 2.0
    np.testing.assert_allclose(result.total_number()[1:], (y**2 / 2 * np.exp(-y))[1:], rtol=1e-6)
    np.testing.assert_allclose(result.balance.fed, [0.0, *[2.0 / 6.0] * 3], rtol=1e-10, atol=1e-15)


def test_unequal_tanks_pass_volume_on_as_their_flows_say() -> None:
    """Two tanks, V = 1 and 3, flow 2: number in the second (1 - (t1 e1 - t2 e2) / (t1 - t2))."""
    times = np.array([0.2, 1.0, 5.0])
    first, second = 0.5, 1.5
    result = run(ag.Train(tanks(1.0, 3.0), flow=2.0, feed=MONO), None, times)
    np.testing.assert_allclose(result.tanks[0].total_number(), 1 - np.exp(-times / first), rtol=1e-7)
    both = 1 - (first * np.exp(-times / first) - second * np.exp(-times / second)) / (first - second)
    np.testing.assert_allclose(result.tanks[1].total_number(), both, rtol=1e-7)
    np.testing.assert_array_equal(result.number, result.tanks[1].number)


# ---- flows


def test_flows_add_up() -> None:
    train = ag.Train(
        tanks(1.0, 2.0, 3.0, 4.0),
        flow=1.0,
        feed=MONO,
        side_streams=[ag.SideStream(into=1, flow=0.5), ag.SideStream(into=2, flow=0.25)],
        recycles=[ag.Recycle(source=3, target=0, flow=0.4), ag.Recycle(source=2, target=1, flow=0.3)],
    )
    np.testing.assert_allclose(train.through, [1.0, 1.5, 1.75, 1.75])
    expected = np.zeros((4, 4))
    expected[0, 1] = 1.0 + 0.4
    expected[1, 2] = 1.5 + 0.4 + 0.3
    expected[2, 3], expected[2, 1] = 1.75 + 0.4, 0.3
    expected[3, 0] = 0.4
    np.testing.assert_allclose(train.exchange, expected)
    # what flows into each tank flows out of it
    entering = expected.sum(axis=0) + np.array([1.0, 0.5, 0.25, 0.0])
    leaving = expected.sum(axis=1) + np.array([0.0, 0.0, 0.0, 1.75])
    np.testing.assert_allclose(entering, leaving)
    np.testing.assert_allclose(train.residence_times, np.array([1.0, 2.0, 3.0, 4.0]) / leaving)
    np.testing.assert_allclose(train.volumes, [0.1, 0.2, 0.3, 0.4])


@given(
    volumes=st.lists(st.floats(0.1, 10.0), min_size=2, max_size=5),
    side=st.floats(0.01, 2.0),
    shares=st.lists(st.floats(0.01, 0.99), min_size=1, max_size=3),
    data=st.data(),
)
def test_any_flows_leave_the_volume_of_each_tank_as_it_is(
    volumes: list[float], side: float, shares: list[float], data: st.DataObject
) -> None:
    last = len(volumes) - 1
    into = data.draw(st.integers(0, last))
    recycles = []
    for share in shares:
        source = data.draw(st.integers(0, last))
        recycles.append(ag.Recycle(source=source, target=data.draw(st.integers(0, source)), flow=share))
    train = ag.Train(
        tanks(*volumes), flow=1.0, side_streams=ag.SideStream(into=into, flow=side), recycles=recycles
    )
    entering = train.exchange.sum(axis=0)
    entering[0] += 1.0
    entering[into] += side
    leaving = train.exchange.sum(axis=1)
    leaving[-1] += train.through[-1]
    np.testing.assert_allclose(entering, leaving, rtol=1e-13)
    assert train.through[-1] == pytest.approx(1.0 + side, rel=1e-14)
    # suspension of one composition everywhere stays as it is
    same = [ag.Feed(distribution=LARGE)]
    fed = ag.Train(
        tanks(*volumes),
        flow=1.0,
        feed=same,
        side_streams=ag.SideStream(into=into, flow=side, feed=same),
        recycles=recycles,
    )
    result = ag.simulate(fed, LARGE, [0.0, 3.0], grid=GRID)
    for tank in result.tanks:
        np.testing.assert_allclose(tank.number[1], tank.number[0], rtol=1e-10, atol=1e-15)
    assert balanced(result)


def test_a_side_stream_dilutes_and_feeds() -> None:
    streams = [
        ag.SideStream(into=1, flow=1.0),
        ag.SideStream(into=2, flow=2.0, feed=ag.Feed(distribution=LARGE, share=0.5)),
    ]
    train = ag.Train(tanks(1.0, 1.0, 1.0), flow=1.0, feed=MONO, side_streams=streams)
    result = run(train, None, [60.0])
    singles = [float(tank.number[0, 0]) for tank in result.tanks]
    fours = [float(tank.number[0, 3]) for tank in result.tanks]
    np.testing.assert_allclose(singles, [1.0, 0.5, 0.25], rtol=1e-7)
    np.testing.assert_allclose(fours, [0.0, 0.0, 0.5], rtol=1e-7, atol=1e-15)
    assert balanced(result)


def test_a_recycle_makes_tanks_of_one_size_more_alike_and_one_tank_in_the_limit() -> None:
    """With R Q sent back, 0 = N_feed + R N2 - (1 + R) N1 - losses: checked against the two by two balance."""
    sink = ag.Withdrawal(0.3)
    flow, back = 1.0, 0.7
    train = ag.Train(
        [ag.Tank(None, volume=2.0, losses=sink), ag.Tank(None, volume=5.0)],
        flow=flow,
        feed=MONO,
        recycles=ag.Recycle(source=1, target=0, flow=back),
    )
    result = run(train, None, [200.0])
    matrix = np.array([[flow + back + 0.3 * 2.0, -back], [-(flow + back), flow + back]])
    expected = np.linalg.solve(matrix, [flow, 0.0])
    found = [float(tank.total_number()[0]) for tank in result.tanks]
    np.testing.assert_allclose(found, expected, rtol=1e-8)
    assert balanced(result)
    # at a steady state what enters leaves, volume by volume
    state = ag.steady_state(train, grid=GRID)
    np.testing.assert_allclose(state.tanks.sum(axis=1), expected, rtol=1e-12)
    inward, outward = sum(state.balance.inward.values()), sum(state.balance.outward.values())
    assert inward == pytest.approx(flow / 7.0, rel=1e-13)
    assert outward == pytest.approx(inward, rel=1e-12)
    with pytest.raises(
        InputError, match=r"recycles\[0\]\.flow=1\.5 m3/s.*at most the flow that passes tank 1, 1 m3/s"
    ):
        ag.Train(tanks(1.0, 1.0), flow=1.0, recycles=ag.Recycle(source=1, target=0, flow=1.5))


def test_a_recycle_to_its_own_tank_changes_nothing() -> None:
    kernel = ag.kernels.constant(1.0)
    plain = ag.Train(tanks(1.0, 2.0, kernel=kernel), flow=1.0, feed=MONO)
    own = ag.Train(
        tanks(1.0, 2.0, kernel=kernel),
        flow=1.0,
        feed=MONO,
        recycles=ag.Recycle(source=1, target=1, flow=0.5),
    )
    np.testing.assert_array_equal(run(own, None, [2.0]).number, run(plain, None, [2.0]).number)
    np.testing.assert_array_equal(own.residence_times, plain.residence_times)


# ---- what it must agree with


def test_a_train_of_one_tank_is_a_stirred_tank() -> None:
    kernel = ag.kernels.constant(1.0)
    one = run(ag.Train(tanks(5.0, kernel=kernel), flow=2.5, feed=MONO), None, [1.0, 4.0])
    tank = run(ag.StirredTank(kernel, residence_time=2.0, feed=MONO), None, [1.0, 4.0])
    np.testing.assert_array_equal(one.number, tank.number)
    assert one.tanks == ()
    assert list(one.balance.inward) == ["fed"]


def test_a_chain_is_each_tank_fed_by_the_one_before() -> None:
    """At the steady state, with the first tank's contents as the feed of a single second one."""
    kernel = ag.kernels.constant(1.0) + ag.kernels.additive(0.05)
    state = ag.steady_state(ag.Train(tanks(1.0, 2.0, kernel=kernel), flow=1.0, feed=MONO), grid=GRID)
    first = ag.steady_state(ag.StirredTank(kernel, residence_time=1.0, feed=MONO), grid=GRID)
    np.testing.assert_allclose(state.tank(0).number, first.number, rtol=1e-9, atol=1e-15)
    between = sum(
        (
            ag.Monodisperse(volume=v, number=n)
            for v, n in zip(GRID.volume[1:], first.number[1:], strict=True)
            if n > 1e-13
        ),
        start=ag.Monodisperse(volume=GRID.volume[0], number=first.number[0]),
    )
    second = ag.steady_state(
        ag.StirredTank(kernel, residence_time=2.0, feed=between), grid=GRID, scheme=ag.FixedPivot(moments=6)
    )
    for k in (0, 1, 2):
        assert state.moment(k) == pytest.approx(float(second.moment(k)), rel=1e-9)


def test_tanks_differ_in_what_happens_in_them() -> None:
    """Collisions in the first, settling in the second: contributions and accounts of each tank alone."""
    train = ag.Train(
        [
            ag.Tank(ag.kernels.constant(1.0).named("rapid mix"), volume=1.0),
            ag.Tank(
                ag.kernels.constant(0.1).named("slow mix"),
                volume=10.0,
                losses=ag.SettlingOut(lambda v: 0.1 * np.cbrt(v), depth=1.0),
            ),
        ],
        flow=1.0,
        feed=MONO,
    )
    result = run(train, [MONO, None], np.linspace(0.0, 20.0, 6))
    assert balanced(result)
    mix, settle = result.tanks
    assert list(mix.contributions) == ["rapid mix"]
    assert list(settle.contributions) == ["slow mix"]
    np.testing.assert_allclose(
        mix.contributions["rapid mix"].events, 0.5 * mix.total_number() ** 2, rtol=1e-10
    )
    # streams of the whole, per volume of the train; streams of a tank, per volume of its own
    assert set(result.balance.outward) == {"settled", "withdrawn"}
    assert set(settle.balance.inward) == {FROM_TANKS.name}
    np.testing.assert_allclose(result.balance.settled, settle.balance.settled * 10.0 / 11.0, rtol=1e-12)
    np.testing.assert_allclose(result.balance.fed, result.times / 11.0, rtol=1e-10, atol=1e-15)
    moved = mix.balance.outward[TO_TANKS.name]
    np.testing.assert_allclose(moved, 10.0 * settle.balance.inward[FROM_TANKS.name], rtol=1e-10, atol=1e-15)
    present = (mix.balance.present + 10.0 * settle.balance.present) / 11.0
    np.testing.assert_allclose(result.balance.present, present, rtol=1e-13)


def test_one_start_fills_every_tank() -> None:
    train = ag.Train(tanks(1.0, 2.0), flow=1.0, feed=MONO)
    one, each = run(train, LARGE, [0.0, 1.0]), run(train, [LARGE, LARGE], [0.0, 1.0])
    np.testing.assert_array_equal(one.number, each.number)
    np.testing.assert_allclose(one.number[0, 3], 2.0)
    np.testing.assert_allclose(one.tanks[0].number[0, 3], 2.0)


@given(
    volumes=st.lists(st.floats(0.2, 5.0), min_size=2, max_size=4),
    rate=st.floats(0.0, 2.0),
    breaking=st.floats(0.0, 1.0),
    back=st.floats(0.01, 0.9),
)
def test_any_train_balances(volumes: list[float], rate: float, breaking: float, back: float) -> None:
    law = ag.Breakage(
        rate=ag.rates.power_law(coefficient=breaking, exponent=0.3),
        fragments=ag.fragments.equal_binary(),
        smallest=1.0,
    )
    each = [ag.Tank(ag.kernels.constant(rate), volume=v, breakage=law) for v in volumes]
    train = ag.Train(
        each,
        flow=1.0,
        feed=MONO,
        side_streams=ag.SideStream(into=1, flow=0.3, feed=LARGE),
        recycles=ag.Recycle(source=len(volumes) - 1, target=0, flow=back),
    )
    grid = ag.SizeGrid.geometric(smallest=1.0, largest=2.0**14, per_doubling=1)
    start = [LARGE, *[None] * (len(volumes) - 1)]
    result = ag.simulate(train, start, [0.0, 1.0, 4.0], grid=grid, scheme=ag.FixedPivot(moments=2))
    assert balanced(result)
    fed = np.array([0.0, 1.0, 4.0]) * (1.0 + 0.3 * 8.0) / sum(volumes)
    np.testing.assert_allclose(result.balance.fed, fed, rtol=1e-11)


# ---- the operator between tanks


@given(seed=st.integers(0, 2**32 - 1), count=st.integers(2, 4))
def test_exchange_is_linear_and_keeps_what_it_moves(seed: int, count: int) -> None:
    random = np.random.default_rng(seed)
    flow = random.uniform(0.0, 1.0, (count, count)) * (1.0 - np.eye(count))
    volumes, size = random.uniform(0.5, 2.0, count), np.array([1.0, 2.0, 5.0])
    width = 3 + 2 + 3
    exchange = Exchange(flow, volumes, size, 6, 7)
    state = random.uniform(0.0, 1.0, count * width)
    rates, jacobian = np.zeros(state.size), np.zeros((state.size, state.size))
    exchange.add_rates(state, 0.5, rates)
    exchange.add_jacobian(state, 0.5, jacobian)
    np.testing.assert_allclose(jacobian @ state, rates, rtol=1e-12, atol=1e-14)
    number, rate = state.reshape(count, width)[:, :3], rates.reshape(count, width)
    # tank by tank, from the sum over flows
    plain = np.zeros((count, 3))
    for i in range(count):
        for j in range(count):
            plain[j] += 0.5 * flow[i, j] * number[i] / volumes[j]
            plain[i] -= 0.5 * flow[i, j] * number[i] / volumes[i]
    np.testing.assert_allclose(rate[:, :3], plain, rtol=1e-12, atol=1e-14)
    np.testing.assert_allclose(rate[:, 6] - rate[:, 7], plain @ size, rtol=1e-12, atol=1e-13)
    assert float(volumes @ rate[:, 6]) == pytest.approx(float(volumes @ rate[:, 7]), rel=1e-13)
    assert not rate[:, 3:6].any()
    state[1] = np.inf
    with np.errstate(invalid="ignore"):
        assert not np.isfinite(exchange.add_rates(state, 0.5, np.zeros(state.size)))


def test_terms_know_their_tank() -> None:
    train = ag.Train(tanks(1.0, 2.0, kernel=ag.kernels.constant(1.0)), flow=1.0, feed=MONO)
    scheme = ag.FixedPivot(moments=2)
    site = Site(scheme.prepare(GRID), train.streams, lambda d: scheme.project(d, GRID), GRID.sections + 2)
    # collisions and feed of the first; collisions and outflow of the second; and what flows between them
    assert [term.tank for term in train.terms(site)] == [0, 0, 1, 1, None]
    assert train.streams[-2:] == (FROM_TANKS, TO_TANKS)


# ---- what is refused


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (lambda: ag.Train([], flow=1.0), "at least one Tank"),
        (lambda: ag.Train([ag.Batch(None)], flow=1.0), "tanks=Batch"),
        (lambda: ag.Train([EMPTY], flow=0.0), "flow=0 m3/s"),
        (lambda: ag.Train([EMPTY], flow=np.nan), "flow=nan"),
        (lambda: ag.Train([EMPTY], flow=1.0, feed=1.0), "feed=1.0"),
        (lambda: ag.Train([EMPTY], flow=1.0, side_streams=1.0), "side_streams=1.0"),
        (lambda: ag.Train([EMPTY], flow=1.0, recycles=[1.0]), "recycles=1.0"),
        (
            lambda: ag.Train([EMPTY], flow=1.0, side_streams=ag.SideStream(into=1, flow=1.0)),
            r"side_streams\[0\]\.into=1.*at most 0.*count from 0",
        ),
        (
            lambda: ag.Train([EMPTY], flow=1.0, recycles=ag.Recycle(source=1, target=0, flow=1.0)),
            r"recycles\[0\]\.source=1.*at most 0",
        ),
        (lambda: ag.Tank(None, volume=0.0), "volume=0 m3"),
        (lambda: ag.Tank(None, volume=-1.0), "volume=-1"),
        (lambda: ag.Tank(None, volume=np.inf), "volume=inf"),
        (lambda: ag.Tank(1.0, volume=1.0), "not a collision kernel"),
        (lambda: ag.Tank(None, volume=1.0, breakage=1.0), "not a breakage law"),
        (lambda: ag.Tank(None, volume=1.0, losses=1.0), "losses=1.0"),
        (lambda: ag.SideStream(into=-1, flow=1.0), "into=-1"),
        (lambda: ag.SideStream(into=0.5, flow=1.0), "into=0.5"),  # type: ignore[arg-type]
        (lambda: ag.SideStream(into=0, flow=0.0), "flow=0"),
        (lambda: ag.SideStream(into=0, flow=1.0, feed="sand"), "feed='sand'"),
        (lambda: ag.Recycle(source=0, target=1, flow=1.0), "target=1.*a tank up to the source, 0"),
        (lambda: ag.Recycle(source=-1, target=0, flow=1.0), "source=-1"),
        (lambda: ag.Recycle(source=1, target=0, flow=-1.0), "flow=-1"),
    ],
)
def test_trains_that_are_none_are_refused(make, words: str) -> None:  # type: ignore[no-untyped-def]
    with pytest.raises(InputError, match=words):
        make()


def test_starts_are_one_for_each_tank() -> None:
    train = ag.Train(tanks(1.0, 2.0), flow=1.0, feed=MONO)
    for starts in ([MONO], [MONO] * 3, []):
        with pytest.raises(InputError, match=rf"start has {len(starts)} distributions for 2 tanks"):
            ag.simulate(train, starts, 1.0)
    with pytest.raises(InputError, match=r"start=1\.0 is not a StartingDistribution"):
        ag.simulate(train, [MONO, 1.0], 1.0)  # type: ignore[list-item]
    with pytest.raises(InputError, match="without particles"):
        ag.simulate(ag.Train(tanks(1.0, 2.0), flow=1.0), [None, None], 1.0)
