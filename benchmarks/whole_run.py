"""A whole run of 80 sections against the same scheme in vectorised NumPy under scipy's solve_ivp.

Both include the preparation of births and coefficients, both are warm, both use LSODA with the same
tolerances. The NumPy side (numpy_twin.py) exists in four forms: numpy.bincount over the list of pairs is the
vectorised script that the target speaks of; three that turn the pairs into matrix products are shown beside it.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from _common import (
    BROWNIAN,
    MONOMERS,
    TAU,
    brownian,
    machine,
    monomer_grid,
    one_thread,
    seconds,
    table,
    target,
)
from numpy_twin import FORMS, run

import aggsim as ag

SECTIONS = 80
DENSITIES = (3, 6)  # sections per doubling: 26 doublings of volume (nearly eight decades), and 15


def compare(per_doubling: float, moments: int) -> list[float]:
    """Median seconds: ours, then each form of the twin."""
    grid = monomer_grid(SECTIONS, per_doubling)
    x = np.array(grid.volume)
    scheme = ag.FixedPivot(moments=moments)

    def ours() -> Any:
        return ag.simulate(ag.Batch(BROWNIAN), MONOMERS, TAU, grid=grid, scheme=scheme)

    twins = [lambda form=form: run(x, brownian, moments, TAU, form) for form in FORMS]
    result = ours()
    for twin in twins:
        number, _ = twin()
        for k in (0, 2):
            np.testing.assert_allclose(number @ x**k, result.moment(k)[-1], rtol=1e-5)
    return seconds(ours, *twins, repeats=11)


def main() -> None:
    one_thread()
    machine()
    rows, ratios = [], []
    for per_doubling in DENSITIES:
        for moments in (2, 4, 6):
            ours, *twins = compare(per_doubling, moments)
            cells = [f"{1e3 * t:.1f} ({t / ours:.1f} x)" for t in twins]
            rows.append([moments, per_doubling, f"{1e3 * ours:.1f}", *cells])
            ratios.append((twins[0] / ours, min(twins) / ours))
    header = ["moments", "per doubling", "ours [ms]", *(f"NumPy, {form} [ms]" for form in FORMS)]
    table(
        f"Whole run, {SECTIONS} sections, tau = {TAU:g}, rtol = 1e-6 (medians; M0 and M2 agree to 1e-5)",
        header,
        rows,
    )
    plain, fastest = (min(column) for column in zip(*ratios, strict=True))
    target("time of vectorised NumPy (bincount) over ours, worst row,", plain, 8.0)
    print(f"the fastest of the matrix forms over ours, worst row: {fastest:.1f}")


if __name__ == "__main__":
    main()
