"""Stability ratios of all pairs of 100 sections: time, and difference to adaptive quadrature on a sample of pairs."""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np
from _common import machine, one_thread, seconds, table, target
from scipy.integrate import quad

import aggsim as ag
from aggsim.interaction import PairEnergy, WholeSpheres, pair_energy, pairwise_stability_ratio

SECTIONS = 100
SAMPLE = 40
LATEX = ag.Particles(diameter=100e-9, density=1055.0, hamaker=9e-21, surface_potential=-0.025)
SIZES = LATEX.volume * 2.0 ** (np.arange(SECTIONS) / 5.0)  # 100 nm to 9.7 um
SALT = (1.0, 30.0, 100.0, 150.0, 500.0)  # mol/m3, from stable to rapid


def adaptive(energy: PairEnergy) -> float:
    """Logarithm of the stability ratio by scipy's quad in ln h, cut into pieces around every peak."""
    r1, r2 = 0.5 * energy.first.diameter, 0.5 * energy.second.diameter
    reach, a, kt = r1 + r2, 2.0 * r1 * r2 / (r1 + r2), energy.medium.thermal_energy

    def logarithm(x):
        h = np.exp(x)
        u = h / a
        film = (6.0 * u**2 + 13.0 * u + 2.0) / (6.0 * u**2 + 4.0 * u)
        return energy(h) / kt + np.log(film * reach * h / (reach + h) ** 2)

    x = np.linspace(math.log(1e-13), math.log(1e9 * reach), 20001)
    f = logarithm(x)
    top = float(f.max())
    peaks = x[1:-1][(f[1:-1] > f[:-2]) & (f[1:-1] >= f[2:])]
    shifts = np.array([-0.3, -0.1, -0.03, -0.01, 0.0, 0.01, 0.03, 0.1, 0.3])
    cuts = np.unique(np.concatenate([np.linspace(x[0], x[-1], 12), (peaks[:, None] + shifts).ravel()]))
    options = {"epsabs": 1e-14, "epsrel": 1e-9, "limit": 500}
    return top + math.log(
        sum(quad(lambda y: math.exp(logarithm(y) - top), a, b, **options)[0] for a, b in pairwise(cuts))
    )


def main() -> None:
    one_thread()
    machine()
    draw = np.random.default_rng(1)
    rows, slowest, largest = [], 0.0, 0.0
    for salt in SALT:
        water = ag.Medium.water(temperature=298.15, ionic_strength=salt)
        ratio = pairwise_stability_ratio(ag.Compact(LATEX), water, carried_by=WholeSpheres())
        (taken,) = seconds(lambda ratio=ratio: ratio(SIZES[:, None], SIZES))
        logs = ratio.logarithm(SIZES[:, None], SIZES)
        worst = 0.0
        for i, j in draw.integers(SECTIONS, size=(SAMPLE, 2)):
            one, two = (
                ag.Particles(
                    diameter=float(np.cbrt(6.0 / math.pi * SIZES[k])),
                    density=LATEX.density,
                    hamaker=LATEX.hamaker,
                    surface_potential=LATEX.surface_potential,
                )
                for k in (i, j)
            )
            # difference of logarithms: relative difference of the ratios, also where these exceed any number
            worst = max(worst, abs(logs[i, j] - adaptive(pair_energy(one, water, two))))
        slowest, largest = max(slowest, taken), max(largest, worst)
        low, high = (f"1e{float(value) / math.log(10.0):.2f}" for value in (logs.min(), logs.max()))
        rows.append([f"{salt:g}", f"{low} to {high}", 1e3 * taken, f"{worst:.1e}"])
    header = [
        "ionic strength [mol/m3]",
        "stability ratios",
        "all pairs [ms]",
        f"largest difference of {SAMPLE} pairs",
    ]
    table(f"Stability ratios of all pairs of {SECTIONS} sections (spheres of 100 nm to 9.7 um)", header, rows)
    target("slowest time for all pairs [s]", slowest, 0.1, at_most=True)
    target("largest relative difference to adaptive quadrature", largest, 1e-6, at_most=True)


if __name__ == "__main__":
    main()
