# %% [markdown]
# # How long does it keep? A latex with salt creeping in
#
# A latex-like product of an invented works: spheres of 220 nm, zeta potential about -32 mV, 2 % of polymer by
# volume. Batches of the raw material bring more and more salt. How much is too much, how long does the product keep,
# and which measurement would narrow the answer most? **All figures are invented.**
#
# A computed shelf life guides and never replaces storage tests: the zeta potential stands for a surface potential
# that nobody measures, and the barrier enters as an exponential.

# %%
import os
from pathlib import Path

import matplotlib.pyplot as plt
import numpy as np

import aggsim as ag

FOLDER = Path(__file__).resolve().parent if "__file__" in globals() else Path.cwd()
OUTPUT = FOLDER / "output"
OUTPUT.mkdir(exist_ok=True)

# %% [markdown]
# ## What is on the label, and what has to be assumed
#
# Size, zeta potential, salt and solids are on the label. The Hamaker constant is not: polystyrene across water is in
# the table with its spread.

# %%
table = ag.interaction.hamaker_across_water("polystyrene")
print(
    f"polystyrene across water: {table.value:.2g} J, between {table.low:.2g} and {table.high:.2g} J ({table.status})"
)

latex = ag.Particles(diameter=220e-9, density=1055.0, hamaker=table.value, surface_potential=-0.032)
water = ag.Medium.water(temperature=298.15, ionic_strength=60.0)
start = ag.Monodisperse(diameter=220e-9, volume_fraction=0.02)

energy = ag.interaction.pair_energy(latex, water)
print(f"barrier: {energy.barrier / water.thermal_energy:.1f} kT at {energy.barrier_separation * 1e9:.2f} nm")

# %% [markdown]
# ## The barrier, and how salt takes it down

# %%
figure, (left, right) = plt.subplots(1, 2, figsize=(11, 4.2), layout="constrained")
ag.figures.pair_energy(energy, farthest=12e-9, ax=left)
scan = ag.interaction.salt_scan(latex, water, np.geomspace(10.0, 600.0, 40))
ag.figures.stability_over_salt(scan, ax=right)
right.axhline(0.0, color="0.7", linewidth=0.8)
for name, critical in scan.critical.items():
    print(
        f"critical coagulation concentration, {name}: {critical:.0f} mol/m3"
        if critical
        else f"{name}: none found"
    )
figure.savefig(OUTPUT / "barrier.png", dpi=100)

# %% [markdown]
# Linear superposition, constant potential and constant charge are three published answers to one question: what
# happens to the charge of two surfaces that approach each other. At the same inputs they lie orders of magnitude
# apart, so the answer is a band.

# %% [markdown]
# ## How long it keeps, as a band
#
# Two years are wanted with 90 % of the particles still single. Zeta is known to 3 mV, the Hamaker constant to the
# spread of the table. The salt has crept up over three batches.

# %%
year = 365.25 * 86400.0
lives = {}
for salt in (40.0, 60.0, 90.0):
    lives[salt] = ag.shelf_life(
        latex,
        ag.Medium.water(temperature=298.15, ionic_strength=salt),
        start,
        criterion=ag.SingleParticlesLeft(share=0.9),
        surface_potential=(-0.035, -0.029),
        ionic_strength=(0.9 * salt, 1.1 * salt),
        hamaker=(table.low, table.high),
        wanted=2.0 * year,
    )
    print(f"{salt:.0f} mol/m3 of salt\n{lives[salt]}\n")

# %% [markdown]
# ## What to measure better

# %%
figure, axis = plt.subplots(figsize=(8.5, 4.2), layout="constrained")
ag.figures.shelf_life(lives[60.0], ax=axis)
figure.savefig(OUTPUT / "shelf_life.png", dpi=100)
widest = lives[60.0].sources
print(
    "the band at 60 mol/m3 comes, in this order, from:", ", ".join(s.name.replace("_", " ") for s in widest)
)

# %% [markdown]
# The choice of the double-layer model cannot be settled at the desk. One coagulation experiment with this product
# at a few salt levels gives its critical concentration, and that tells which curve it follows. After that the Hamaker
# constant, zeta and salt are what is left. What cannot be had from any of it is the last word: that belongs to the
# storage test.

# %%
print(f"figures are in {os.path.relpath(OUTPUT)}")
if plt.get_backend().lower() != "agg":
    plt.show()
