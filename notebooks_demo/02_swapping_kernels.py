# %% [markdown]
# # Swapping kernels: which mechanism explains a measurement?
#
# A suspension of 1 µm silica spheres, 120 mg/L in salt water of 25 °C, was stirred in a vessel of 1 L at 60 and at
# 120 rpm, and its particles were counted and sized over time. Which collisions made them aggregate?
#
# The data are invented: a model made them, and noise was added. The head of `data/stirred_silica.csv` says which
# model and how much noise.
#
# Known: the starting sizes (log-normal, median 1.00 µm, geometric standard deviation 1.10) and the power that
# reaches the liquid, 0.50 mW at 60 rpm and 4.0 mW at 120 rpm. Assumed: fractal flocs of dimension 2.4, and one
# attachment efficiency that depends neither on size nor on speed. That efficiency is the only parameter fitted.

# %%
import os
from pathlib import Path

import matplotlib.pyplot as plt
import numpy as np
from scipy.optimize import least_squares

import aggsim as ag

FOLDER = Path(__file__).resolve().parent if "__file__" in globals() else Path.cwd()
OUTPUT = FOLDER / "output"
OUTPUT.mkdir(exist_ok=True)

# %%
table = np.loadtxt(FOLDER / "data" / "stirred_silica.csv", delimiter=",", skiprows=7)
POWER = {60: 0.50e-3, 120: 4.0e-3}  # W, in 1 L
NUMBER_ERROR, SIZE_ERROR = 0.04, 0.03  # standard deviations, relative

times, number, size = {}, {}, {}
for rpm in POWER:
    rows = table[table[:, 0] == rpm]
    times[rpm], number[rpm], size[rpm] = 60.0 * rows[:, 1], 1e6 * rows[:, 2], 1e-6 * rows[:, 3]  # s, 1/m3, m

water = ag.Medium.water(temperature=298.15)
flocs = ag.Fractal(ag.Particles(diameter=1e-6, density=2000.0), dimension=2.4)
start = ag.LogNormal(median_diameter=1e-6, gsd=1.10, mass_concentration=0.12, density=2000.0)
mixing = {rpm: ag.Flow.from_power(power=p, volume=1e-3, medium=water) for rpm, p in POWER.items()}
for rpm, flow in mixing.items():
    print(f"{rpm} rpm: G = {flow.shear_rate:.0f} 1/s")

# %% [markdown]
# ## Six candidates
#
# Each is a function from the flow to a kernel; those that ignore the flow predict the same at both speeds. The
# constant one is the Brownian rate of equal spheres, 8 kT/(3 µ), for every pair.

# %%
brownian = ag.kernels.brownian(flocs, water)
candidates = {
    "constant": lambda flow: ag.kernels.constant(8.0 * water.thermal_energy / (3.0 * water.viscosity)),
    "Brownian": lambda flow: brownian,
    "laminar shear": lambda flow: ag.kernels.shear(flocs, flow),
    "turbulent shear": lambda flow: ag.kernels.turbulent_shear(flocs, flow),
    "settling": lambda flow: ag.kernels.settling(flocs, water),
    "Brownian + turbulent shear": lambda flow: brownian + ag.kernels.turbulent_shear(flocs, flow),
}


def predict(candidate, factor, rpm, at, scheme=None):
    """Result of a candidate at one speed; a run that meets runaway growth ends early, without an error."""
    vessel = ag.Batch(factor * candidate(mixing[rpm]))
    return ag.simulate(vessel, start, at, scheme=scheme, raise_unfinished=False)


def residuals(log_factor, candidate, scheme=None):
    """ln(model / measured number) in standard deviations, both speeds; an early end keeps its last number."""
    out = []
    for rpm, t in times.items():
        run = predict(candidate, np.exp(log_factor).item(), rpm, t, scheme)
        out.append(np.log(np.interp(t, run.times, run.total_number()) / number[rpm]) / NUMBER_ERROR)
    return np.concatenate(out)


SCAN = np.log(np.logspace(-2.0, 2.0, 9))


def fit(candidate, scheme=None, scan=SCAN):
    """Best factor, its relative standard error, and the sum of squares: a coarse scan, then least squares."""
    first = min(scan, key=lambda x: np.sum(residuals(x, candidate, scheme) ** 2))
    best = least_squares(residuals, first, args=(candidate, scheme), diff_step=1e-3)
    return np.exp(best.x).item(), 1.0 / np.linalg.norm(best.jac), 2.0 * best.cost


# %% [markdown]
# ## One factor each, fitted to the numbers at both speeds
#
# D[4,3] is left out of the fit and kept for a check. With known errors the sum of squares should come near the
# number of points less one. Every candidate has one parameter, so differences of the Akaike criterion (dAIC) are
# differences of that sum.


# %%
def misfit_of_size(runs):
    """Sum of squares of ln(model / measured D[4,3]) in standard deviations."""
    return sum(
        np.sum((np.log(run.mean_diameter(4, 3) / size[rpm]) / SIZE_ERROR) ** 2) for rpm, run in runs.items()
    )


fits = {name: fit(candidate) for name, candidate in candidates.items()}
least = min(squares for _, _, squares in fits.values())
points = sum(t.size for t in times.values())
finished = []  # candidates that reach the end of both experiments
print(f"{points} numbers fitted, {points} sizes for a check")
print("                                     factor  sum of squares   dAIC  sizes, not fitted")
for name, (factor, error, squares) in fits.items():
    runs = {rpm: predict(candidates[name], factor, rpm, t) for rpm, t in times.items()}
    if all(run.status.completed for run in runs.values()):
        finished.append(name)
        value, check = f"{factor:.3g} ± {error * factor:.1g}", misfit_of_size(runs)
        print(f"{name:27s}  {value:>14s}  {squares:14.0f}  {squares - least:5.0f}  {check:17.0f}")
    else:
        print(f"{name:27s}  {'no fit':>14s}  (runs away within the experiment)")

# %% [markdown]
# A factor is an attachment efficiency (1/W for Brownian motion), so it cannot exceed 1. That alone rules out
# the constant kernel and Brownian motion. Settling is out too: equal spheres settle together, and with a
# factor that is large enough to start them, the largest flocs run away. None of the three knows the mixer.
# Laminar and turbulent shear are the same function of size and of G with prefactors that differ by 3 %, so no
# experiment of this kind tells them apart.

# %%
LINES = {  # colour, style and width: wide ones lie below those that they coincide with
    "constant": ("#BBBBBB", "-", 4.0),
    "Brownian": ("#56B4E9", "--", 1.8),
    "laminar shear": ("#E69F00", "-", 4.0),
    "turbulent shear": ("#000000", (0, (1, 2)), 1.8),
    "Brownian + turbulent shear": ("#0072B2", "-", 1.8),
}


def panels(height):
    """A figure with one panel for each speed and a common vertical axis."""
    figure, axes = plt.subplots(1, 2, figsize=(10.0, height), sharey=True, layout="constrained")
    for ax, rpm in zip(axes, times, strict=True):
        ax.set_title(f"{rpm} rpm, G = {mixing[rpm].shear_rate:.0f} 1/s", fontsize="medium")
        ax.set_xlabel("time [min]")
        ax.set_xticks(times[rpm][::2] / 60.0)
        ax.grid(color="0.92")
    return figure, dict(zip(times, axes, strict=True))


def model(ax, name, rpm, quantity):
    """Line of a fitted candidate."""
    colour, style, width = LINES[name]
    run = predict(candidates[name], fits[name][0], rpm, np.linspace(0.0, times[rpm][-1], 101))
    ax.plot(run.times / 60.0, quantity(run), color=colour, linestyle=style, linewidth=width, label=name)


def measured(ax, rpm, values, error, label):
    """Measured points with bars of one standard deviation."""
    look = {"fmt": "o", "color": "black", "markersize": 4, "capsize": 3, "zorder": 5}
    ax.errorbar(times[rpm] / 60.0, values, error * values, label=label, **look)


def finish(figure, axes, name):
    """Legend below the panels, and the figure in the output folder."""
    handles, labels = axes[60].get_legend_handles_labels()
    figure.legend(handles, labels, loc="outside lower center", ncols=3, frameon=False)
    figure.savefig(OUTPUT / name, dpi=100)


figure, axes = panels(4.8)
for rpm, ax in axes.items():
    for name in finished:
        model(ax, name, rpm, lambda run: 1e-13 * run.total_number())
    measured(ax, rpm, 1e-13 * number[rpm], NUMBER_ERROR, "measured")
    ax.set_yscale("log")
    ax.set_yticks([2, 3, 4, 6, 8, 10], labels=["2", "3", "4", "6", "8", "10"])
    ax.minorticks_off()
axes[60].set_ylabel("number concentration [10¹³ 1/m³]")
finish(figure, axes, "kernels_number.png")

# %% [markdown]
# Brownian motion and the constant kernel are a compromise between two speeds and fit neither.
#
# ## Residuals
#
# Shear alone is too slow at 60 rpm and too fast at 120 rpm, in runs of one sign. With Brownian motion beside it
# the residuals scatter as the errors do; the band is two standard deviations.

# %%
figure, axes = panels(4.4)
for rpm, ax in axes.items():
    ax.axhspan(-2.0, 2.0, color="0.93", zorder=0)
    ax.axhline(0.0, color="0.5", linewidth=0.8)
    for name, marker in {"Brownian": "s", "turbulent shear": "^", "Brownian + turbulent shear": "o"}.items():
        scaled = np.split(residuals(np.log(fits[name][0]), candidates[name]), 2)[list(times).index(rpm)]
        ax.plot(times[rpm] / 60.0, scaled, marker, color=LINES[name][0], markersize=5, label=name)
    ax.set_yscale("symlog", linthresh=5.0)
    ax.set_yticks([-10, -5, -2, 0, 2, 5, 10, 20], labels=["-10", "-5", "-2", "0", "2", "5", "10", "20"])
    ax.minorticks_off()
axes[60].set_ylabel("ln(model / measured)\n[standard deviations]")
finish(figure, axes, "kernels_residuals.png")

# %% [markdown]
# ## A check on what was not fitted
#
# The sizes, measured with an error of 3 %, were left out of the fit. Only one of the two survives them.

# %%
figure, axes = panels(4.4)
for rpm, ax in axes.items():
    for name in ("turbulent shear", "Brownian + turbulent shear"):
        model(ax, name, rpm, lambda run: 1e6 * run.mean_diameter(4, 3))
    measured(ax, rpm, 1e6 * size[rpm], SIZE_ERROR, "measured, not fitted")
axes[60].set_ylabel("D[4,3], volume-equivalent [µm]")
finish(figure, axes, "kernels_size.png")

# %% [markdown]
# ## Does it hang on the discretisation?
#
# The two best candidates again with other schemes, each on the grid that it chooses for itself.

# %%
rivals = ("turbulent shear", "Brownian + turbulent shear")
print("                       turbulent shear         Brownian + turbulent shear")
print("                       factor  sum of squares  factor  sum of squares")
for scheme in (ag.FixedPivot(moments=2), ag.FixedPivot(moments=4), ag.FixedPivot(moments=6), ag.Sectional()):
    row = f"{scheme!r:21s}"
    for name in rivals:
        near = np.log(fits[name][0] * np.array([0.8, 1.0, 1.25]))
        factor, _, squares = fit(candidates[name], scheme, near)
        row += f"  {factor:6.4f}  {squares:14.1f}"
    print(row)
print(f"figures are in {os.path.relpath(OUTPUT)}")
if plt.get_backend().lower() != "agg":
    plt.show()

# %% [markdown]
# The schemes move the factors by less than a tenth of their standard error, and no conclusion with them. (On a
# geometric grid `Sectional()` and `FixedPivot(moments=2)` share each birth between the same two sections, so they
# count as one check.)
#
# ## Conclusion
#
# Brownian motion and shear side by side, a quarter of their collisions sticking, explain numbers and sizes at both
# speeds. Shear alone misses by more than its errors allow, though it looks close to the eye, and the mechanisms
# that ignore the mixer are out. Since the data are invented, the answer is known: they were made with that sum and
# an efficiency of 0.25.
#
# What the fit takes for granted is not tested by it: the fractal dimension, and an efficiency that is the same for
# all sizes. The model supports and never replaces jar tests, pilot trials or stability tests; local codes and
# licensed practice decide.
