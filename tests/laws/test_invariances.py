"""What must not change, or must change in a known way, whatever the kernel, the grid, the start and the scheme."""

from __future__ import annotations

import warnings

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from reference_runs import MONODISPERSE, brownian, settling, shear
from scheme_cases import NUMBER_KEEPING, SCHEMES, grid_for

import aggsim as ag
from aggsim.errors import AccuracyWarning

KERNELS = {
    "constant": ag.kernels.constant(1.0),
    "sum": ag.kernels.additive(0.3),
    "product": ag.kernels.multiplicative(0.1),
    "brownian": brownian(),
    "fractal": brownian(1.0 / 1.8),
    "shear": shear(),
    "settling": 0.1 * settling(),
}
EXPONENTIAL = ag.Exponential(mean_volume=1.0, number=1.0)
STARTS = {
    "monodisperse": MONODISPERSE,
    "two sizes": MONODISPERSE + ag.Monodisperse(volume=4.0, number=0.2),
    "exponential": EXPONENTIAL,
    "gamma": ag.Gamma(mean_volume=2.0, shape=3.0, number=0.5),
}
ON_PIVOTS = [s for s in STARTS if s in ("monodisperse", "two sizes")]

kernels = st.sampled_from(list(KERNELS)).map(KERNELS.__getitem__)
continuous_schemes = st.sampled_from([s for s in SCHEMES if s != ag.Monomer()])
factors = st.floats(1e-3, 1e3)


def room(scheme: ag.schemes.Scheme, start: str, per_doubling: int = 3, doublings: int = 12) -> ag.SizeGrid:
    """A grid with room above what happens in the short times of these tests."""
    if start in ON_PIVOTS:
        return grid_for(scheme, 8 if scheme == ag.Monomer() else doublings, per_doubling)
    return ag.SizeGrid.geometric(smallest=1e-4, largest=2.0**doublings, per_doubling=per_doubling)


@st.composite
def cases(draw: st.DrawFn) -> tuple[ag.schemes.Scheme, ag.kernels.Kernel, str, ag.SizeGrid]:
    scheme = draw(st.sampled_from(SCHEMES))
    start = draw(st.sampled_from(ON_PIVOTS if scheme == ag.Monomer() else list(STARTS)))
    kernel = draw(kernels) + draw(st.floats(0.0, 1.0)) * draw(kernels)
    return scheme, kernel, start, room(scheme, start, draw(st.integers(2, 5)))


@given(case=cases(), time=st.floats(0.05, 0.8))
def test_volume_is_kept_and_number_falls(
    case: tuple[ag.schemes.Scheme, ag.kernels.Kernel, str, ag.SizeGrid], time: float
) -> None:
    """To round-off, which a few hundred steps add up to 1e-11 at most."""
    scheme, kernel, start, grid = case
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", AccuracyWarning)  # coarse grids are drawn on purpose
        result = ag.simulate(
            ag.Batch(kernel), STARTS[start], [0.0, time / 2, time], grid=grid, scheme=scheme, rtol=1e-6
        )
    balance = result.balance
    assert np.abs(balance.closure).max() <= 1e-11
    assert balance.initial == pytest.approx(STARTS[start].total_volume, rel=1e-12)
    everything = result.total_number() + balance.beyond_grid_number
    assert (np.diff(everything) <= 0.0).all()  # settling alone does nothing to equal sizes
    assert np.isfinite(result.number).all()


@given(
    kernel=kernels,
    start=st.sampled_from(list(STARTS)),
    scheme=st.sampled_from([ag.FixedPivot(moments=2), ag.Sectional()]),
    per_doubling=st.integers(2, 5),
)
def test_linear_sharing_leaves_no_negative_number(
    kernel: ag.kernels.Kernel, start: str, scheme: ag.schemes.Scheme, per_doubling: int
) -> None:
    """Beyond what the absolute tolerance of the integration (1e-12 N0 here) lets through."""
    grid = room(scheme, start, per_doubling)
    result = ag.simulate(ag.Batch(kernel), STARTS[start], [0.2, 0.8], grid=grid, scheme=scheme, rtol=1e-6)
    assert result.number.min() >= -1e-12
    assert result.balance.negative_share.max() <= 1e-10


@pytest.mark.parametrize("kernel", ["constant", "brownian", "fractal", "shear"])
@pytest.mark.parametrize("start", list(STARTS))
@pytest.mark.parametrize(("moments", "bound"), [(4, 2e-5), (6, 5e-7)])
def test_high_orders_leave_a_small_negative_share(
    kernel: str, start: str, moments: int, bound: float
) -> None:
    """3 sections per doubling (monomers first where the start asks for them), from early times on, when a
    monodisperse start has made few sizes only and the distribution is at its steepest."""
    if start in ON_PIVOTS:
        grid = ag.SizeGrid.monomers_then_geometric(1.0, 1e5, per_doubling=3)
    else:
        grid = ag.SizeGrid.geometric(smallest=1e-4, largest=1e5, per_doubling=3)
    result = ag.simulate(
        ag.Batch(KERNELS[kernel]),
        STARTS[start],
        [0.3, 1.0, 3.0],
        grid=grid,
        scheme=ag.FixedPivot(moments=moments),
    )
    assert result.balance.negative_share.max() <= bound


# ---- scales: what is pure number may depend on none of them


def scaled(kernel: ag.kernels.Kernel, volume: float, rate: float) -> ag.kernels.Kernel:
    return rate * ag.kernels.from_function(lambda v, w: kernel(v / volume, w / volume))


@given(kernel=kernels, scheme=continuous_schemes, volume=factors, rate=factors, amount=factors)
def test_units_of_volume_time_and_amount_cancel(
    kernel: ag.kernels.Kernel, scheme: ag.schemes.Scheme, volume: float, rate: float, amount: float
) -> None:
    """v -> s v, K -> c K, n -> a n, t -> t / (c a): the same run in other units.

    Steps could differ by round-off alone, but a decision of the method may tip over: then the difference is that
    of the integration, a few times rtol.
    """
    rtol = 1e-8
    grid = ag.SizeGrid.geometric(smallest=1e-3, largest=512.0, per_doubling=3)
    other = ag.SizeGrid.geometric(smallest=1e-3 * volume, largest=512.0 * volume, per_doubling=3)
    times = np.array([0.1, 0.5])
    first = ag.simulate(ag.Batch(kernel), EXPONENTIAL, times, grid=grid, scheme=scheme, rtol=rtol)
    second = ag.simulate(
        ag.Batch(scaled(kernel, volume, rate)),
        ag.Exponential(mean_volume=volume, number=amount),
        times / (rate * amount),
        grid=other,
        scheme=scheme,
        rtol=rtol,
    )
    assert other.sections == grid.sections
    np.testing.assert_allclose(second.number / amount, first.number, rtol=20 * rtol, atol=20 * rtol * 1e-6)
    for k in (0.0, 1.0, 2.0):
        np.testing.assert_allclose(second.moment(k) / (amount * volume**k), first.moment(k), rtol=10 * rtol)


def test_metres_and_the_unit_of_the_start_give_the_same_run() -> None:
    """Powers of two leave every operation the same to the last bit."""
    grid = ag.SizeGrid.geometric(smallest=2.0**-10, largest=512.0, per_doubling=3)
    tiny = ag.SizeGrid.from_pivots(grid.volume * 2.0**-70)
    one = ag.simulate(ag.Batch(brownian()), EXPONENTIAL, 3.0, grid=grid)
    two = ag.simulate(
        ag.Batch(scaled(brownian(), 2.0**-70, 1.0)),
        ag.Exponential(mean_volume=2.0**-70, number=1.0),
        3.0,
        grid=tiny,
    )
    np.testing.assert_allclose(two.number, one.number, rtol=1e-9, atol=1e-15)


def test_a_run_can_be_repeated_to_the_last_bit() -> None:
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 1e4, per_doubling=3)
    runs = [ag.simulate(ag.Batch(brownian() + shear()), MONODISPERSE, 2.0, grid=grid) for _ in range(2)]
    np.testing.assert_array_equal(runs[0].number, runs[1].number)


@given(first=kernels, second=kernels, share=st.floats(0.0, 3.0), scheme=continuous_schemes)
def test_a_sum_of_kernels_is_one_kernel(
    first: ag.kernels.Kernel, second: ag.kernels.Kernel, share: float, scheme: ag.schemes.Scheme
) -> None:
    grid = ag.SizeGrid.geometric(smallest=1e-3, largest=512.0, per_doubling=3)
    together = ag.kernels.from_function(lambda v, w: first(v, w) + share * second(v, w))
    runs = [
        ag.simulate(ag.Batch(kernel), EXPONENTIAL, 0.2, grid=grid, scheme=scheme, rtol=1e-8)
        for kernel in (first + share * second, together)
    ]
    np.testing.assert_allclose(runs[0].number, runs[1].number, rtol=2e-7, atol=2e-13)


@given(kernel=kernels, v=st.floats(1e-3, 1e3), w=st.floats(1e-3, 1e3))
def test_partners_may_change_places(kernel: ag.kernels.Kernel, v: float, w: float) -> None:
    assert kernel(v, w) == pytest.approx(float(kernel(w, v)), rel=1e-14, abs=0.0)
    ((_, matrix, _),) = kernel.part_matrices(np.sort([v, 2 * w + v, 4 * w + 2 * v]))
    np.testing.assert_array_equal(matrix, matrix.T)


@given(scheme=continuous_schemes, split=st.floats(0.1, 0.9))
def test_output_times_do_not_change_the_run(scheme: ag.schemes.Scheme, split: float) -> None:
    grid = ag.SizeGrid.geometric(smallest=1e-3, largest=512.0, per_doubling=3)
    direct = ag.simulate(ag.Batch(brownian()), EXPONENTIAL, 2.0, grid=grid, scheme=scheme)
    passing = ag.simulate(ag.Batch(brownian()), EXPONENTIAL, [2.0 * split, 2.0], grid=grid, scheme=scheme)
    np.testing.assert_array_equal(passing.number[-1], direct.number[-1])


# ---- what passes the top


@pytest.mark.parametrize("scheme", NUMBER_KEEPING, ids=repr)
def test_what_passes_the_top_is_accounted_for(scheme: ag.schemes.Scheme) -> None:
    """A grid that ends at 16 monomers, at a mean size of 6: volume is kept with the account, and so is number,
    of which every collision inside the grid takes one."""
    grid = grid_for(scheme, doublings=4)
    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always", AccuracyWarning)
        result = ag.simulate(
            ag.Batch(ag.kernels.constant(1.0)),
            MONODISPERSE,
            np.linspace(0.0, 10.0, 201),
            grid=grid,
            scheme=scheme,
            rtol=1e-10,
        )
    assert any("top of the grid" in str(warning.message) for warning in caught)
    balance = result.balance
    assert balance.beyond_grid[-1] > 0.1
    assert np.abs(balance.closure).max() <= 1e-11
    # births of 4 and 6 moments may put a little less than nothing past the top, within the share that is reported
    linear = scheme in (ag.FixedPivot(moments=2), ag.Sectional(), ag.Monomer())
    assert np.diff(balance.beyond_grid).min() >= (0.0 if linear else -balance.negative_share.max())
    # mean size of what has left: above the top, and below twice the top
    mean = balance.beyond_grid[-1] / balance.beyond_grid_number[-1]
    assert grid.volume[-1] < mean < 2.0 * grid.volume[-1]
    # number: dN/dt + d(beyond)/dt = - events = - N^2 / 2 with the number that is still inside
    inside = result.total_number()
    events = np.trapezoid(0.5 * inside**2, result.times)
    assert inside[-1] + balance.beyond_grid_number[-1] == pytest.approx(1.0 - events, rel=1e-3)
