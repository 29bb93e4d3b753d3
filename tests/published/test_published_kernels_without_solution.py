"""Kernels without a closed solution: tables of a direct solution of the discrete equation, monodisperse start.

The equation is that of M. von Smoluchowski, Z. Phys. Chem. 92 (1917) 129, the kernels are his Brownian and shear
kernels and the Brownian kernel of fractal aggregates. The figures come from an independent solution of all
300 to 3600 sizes by direct sums and a Runge-Kutta method of 8th order at rtol = 1e-11 to 1e-12, which gives the
closed solution of the constant kernel to all digits. Units: K(1, 1) = 1, N0 = 1. Stated tolerance 1e-7; figures
printed to 7 digits are rounded to about that.
"""

from __future__ import annotations

import numpy as np
import pytest
from reference_runs import BROWNIAN_TIMES, MONODISPERSE, brownian, every_size, shear

import aggsim as ag

Array = np.ndarray

KMERS = np.array([1, 2, 3, 5, 10])

# t; n1, n2, n3, n5, n10, K = (i^a + j^a)(i^-a + j^-a) / 4 with a = 1/3
BROWNIAN_NUMBERS = np.array(
    [
        [0.5, 0.6395649878, 0.1276084686, 0.02576608759, 0.001062670309, 3.740043811e-7],
        [1, 0.4434170783, 0.1473189144, 0.04944629455, 0.005632302395, 2.513993404e-5],
        [2, 0.2481905169, 0.1237895936, 0.06213079702, 0.01579998328, 5.250637844e-4],
        [5, 0.07931054218, 0.05716808728, 0.04093437983, 0.02103962648, 0.004039024560],
        [10, 0.02580275591, 0.02229094988, 0.01873446035, 0.01309271604, 0.005343528282],
        [20, 0.006966964461, 0.006930039617, 0.006468606820, 0.005438082220, 0.003416617915],
        [50, 9.477339194e-4, 1.137352603e-3, 1.182520973e-3, 1.161308553e-3, 9.916126069e-4],
        [100, 1.677598691e-4, 2.406500603e-4, 2.731371175e-4, 2.972308575e-4, 2.950284756e-4],
    ]
)  # fmt: skip
# t; M0, M2, M3, M(1/3); number-based geometric standard deviation of diameter
BROWNIAN_MOMENTS = np.array(
    [
        [0.5, 0.7995005789, 1.50280858, 2.8917577, 0.848116899, 1.1156614],
        [1, 0.6653655988, 2.00968531, 5.5720796, 0.741805074, 1.1591427],
        [2, 0.4973839383, 3.03044500, 13.316997, 0.601320868, 1.2127805],
        [5, 0.2815910815, 6.11652665, 55.761719, 0.401783026, 1.2923804],
        [10, 0.1625025637, 11.28422635, 190.81825, 0.274269269, 1.3494769],
        [20, 0.0875614734, 21.63938197, 702.5692, 0.179782907, 1.3950169],
        [50, 0.0365090453, 52.72713778, 4171.9613, 0.099730826, 1.4308081],
        [100, 0.0184656958, 104.54709272, 16401.816, 0.063224963, 1.4418443],
    ]
)  # fmt: skip
MOMENT_ORDERS = [0.0, 2.0, 3.0, 1.0 / 3.0]

# t; M0; n1, n2, n5, n10; M2, M3, with a = 1 / 1.8
FRACTAL = [
    [1, 0.6629689706, 0.4415226946, 0.1458342336, 0.005898443801, 3.059954547e-5, 2.02784027, 5.7093360],
    [10, 0.1548560445, 0.02220059432, 0.02074571685, 0.01254188349, 0.005255212683, 11.84203429, 210.98009],
]

# t; n1, n2, n3, n5, n10, K = (i^(1/3) + j^(1/3))^3 / 8
SHEAR_NUMBERS = np.array(
    [
        [0.25, 0.7853953974, 0.08254029587, 0.01258131591, 4.305233024e-4, 1.958859376e-7],
        [0.5, 0.6266841640, 0.1121763747, 0.02927082748, 0.002952236183, 2.026755093e-5],
        [1, 0.4160600914, 0.1117177455, 0.04414466450, 0.01032256042, 5.931892792e-4],
    ]
)  # fmt: skip
# t; M0, M2, M3
SHEAR_MOMENTS = np.array(
    [
        [0.25, 0.8832914038, 1.27968016, 2.0102883],
        [0.5, 0.7816255868, 1.62760758, 3.7555455],
        [1, 0.6154804143, 2.59351750, 11.547887],
    ]
)  # fmt: skip


def every_k(kernel: ag.kernels.Kernel, times: list[float], sizes: int) -> ag.Result:
    grid = ag.SizeGrid.monomers(1.0, sizes)
    return ag.simulate(ag.Batch(kernel), MONODISPERSE, times, grid=grid, scheme=ag.Monomer(), rtol=1e-11)


def test_brownian_kernel_resolved_by_size() -> None:
    result = every_size()
    np.testing.assert_array_equal(BROWNIAN_NUMBERS[:, 0], BROWNIAN_TIMES)
    np.testing.assert_array_equal(BROWNIAN_MOMENTS[:, 0], BROWNIAN_TIMES)
    np.testing.assert_allclose(result.number[:, KMERS - 1], BROWNIAN_NUMBERS[:, 1:], rtol=1e-7)
    for column, k in enumerate(MOMENT_ORDERS, start=1):
        np.testing.assert_allclose(result.moment(k), BROWNIAN_MOMENTS[:, column], rtol=1e-7)
    gsd = result.geometric_standard_deviation(0)
    np.testing.assert_allclose(gsd, BROWNIAN_MOMENTS[:, -1], rtol=1e-7)


# largest relative errors over all times from t = 0.5 on: M0, M2, M3, M(1/3), geometric standard deviation;
# of order (ln 2 / per_doubling)^6, largest early, when neighbouring sizes differ most
GRID_LIMITED = {3: [2e-5, 5e-6, 1.5e-5, 2e-5, 5e-5], 8: [1e-7, 2e-8, 6e-8, 1e-7, 2.5e-7]}


@pytest.mark.parametrize("per_doubling", list(GRID_LIMITED))
def test_brownian_kernel_on_sections(per_doubling: int) -> None:
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 2e4, per_doubling=per_doubling)
    result = ag.simulate(
        ag.Batch(brownian()),
        MONODISPERSE,
        BROWNIAN_TIMES,
        grid=grid,
        scheme=ag.FixedPivot(moments=6),
        rtol=1e-10,
    )
    tolerance = np.array(GRID_LIMITED[per_doubling]) + 1e-7  # of the figures printed
    got = [result.moment(k) for k in MOMENT_ORDERS] + [result.geometric_standard_deviation(0)]
    for value, expected, limit in zip(got, BROWNIAN_MOMENTS.T[1:], tolerance, strict=True):
        np.testing.assert_allclose(value, expected, rtol=limit)
    # sizes that are pivots, as long as the stencil of a birth beside the first gap does not reach them
    if per_doubling == 8:  # 1 to 12 are pivots
        np.testing.assert_allclose(result.number[:, KMERS[:4] - 1], BROWNIAN_NUMBERS[:, 1:5], rtol=2e-7)


@pytest.mark.parametrize("row", FRACTAL, ids=lambda row: f"t = {row[0]:g}")
def test_brownian_kernel_of_fractal_aggregates(row: list[float]) -> None:
    result = every_k(brownian(1.0 / 1.8), [row[0]], 400)
    assert result.total_number()[0] == pytest.approx(row[1], rel=1e-8)
    np.testing.assert_allclose(result.number[0, [0, 1, 4, 9]], row[2:6], rtol=1e-7)
    assert result.moment(2)[0] == pytest.approx(row[6], rel=1e-7)
    assert result.moment(3)[0] == pytest.approx(row[7], rel=1e-7)
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 2000.0, per_doubling=8)
    sections = ag.simulate(ag.Batch(brownian(1.0 / 1.8)), MONODISPERSE, row[0], grid=grid, rtol=1e-10)
    for k, column in ((0, 1), (2, 6), (3, 7)):
        assert sections.moment(k)[0] == pytest.approx(row[column], rel=2e-7)


def test_shear_kernel() -> None:
    times = SHEAR_MOMENTS[:, 0].tolist()
    result = every_k(shear(), times, 500)
    np.testing.assert_allclose(result.number[:, KMERS - 1], SHEAR_NUMBERS[:, 1:], rtol=1e-7)
    grid = ag.SizeGrid.monomers_then_geometric(1.0, 4000.0, per_doubling=8)
    sections = ag.simulate(ag.Batch(shear()), MONODISPERSE, times, grid=grid, rtol=1e-10)
    for column, k in enumerate(MOMENT_ORDERS[:3], start=1):
        np.testing.assert_allclose(result.moment(k), SHEAR_MOMENTS[:, column], rtol=1e-7)
        np.testing.assert_allclose(sections.moment(k), SHEAR_MOMENTS[:, column], rtol=2e-7)
