"""How long a dispersion keeps, as a band: every input has its uncertainty, and the model of the barrier too."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.errors import InputError
from aggsim.inputs import Compact, Medium, Particles
from aggsim.interaction import (
    ConstantCharge,
    ConstantPotential,
    LinearSuperposition,
    log_stability_ratio,
    model_name,
    pair_energy,
)
from aggsim.interaction.profile import assembled_pair
from aggsim.kernels import brownian
from aggsim.sizes import StartingDistribution
from aggsim.solvers.simulate import simulate
from aggsim.studies.criteria import Criterion, SingleParticlesLeft
from aggsim.vessels import Batch

YEAR = 365.25 * 24 * 3600.0
CAUTION = (
    "A computed shelf life guides and never replaces storage tests: zeta potential is not surface potential, "
    "and the barrier enters as an exponential."
)
_SAMPLES = 256  # for each model; a power of two balances the sequence
_TINY, _HUGE = -300.0, 300.0  # powers of ten beyond which a time is no number any more


@dataclass(frozen=True)
class Source:
    """One input of a shelf life and how much of the band is its own.

    Attributes
    ----------
    name : str
    low, high : float or str
        Ends of its range, in SI units, or the models between which it lies.
    times : (float, float)
        Shortest and longest shelf life [s] over the range, the other inputs at their central values.
    decades : float
        Powers of ten between the two.
    """

    name: str
    low: Any
    high: Any
    times: tuple[float, float]
    decades: float

    @property
    def label(self) -> str:
        """The name in words."""
        return "Hamaker constant" if self.name == "hamaker" else self.name.replace("_", " ")


@dataclass(frozen=True, eq=False)
class ShelfLife:
    """Time until a criterion is met, with its band.

    Attributes
    ----------
    criterion : str
        What ends the life of the product.
    time : float
        Time [s] at the central inputs with the first model.
    low, high : float
        Time [s] below which 5 % and 95 % of the draws over all ranges and models lie.
    rapid_time : float
        Time [s] without any barrier or drag between particles (stability ratio 1), from the simulation.
    models : dict
        Time [s] at the central inputs for each double-layer model.
    sources : tuple of Source
        Inputs with a range, the one that moves the time most first.
    wanted : float or None
        Time [s] that the product should keep.
    """

    criterion: str
    time: float
    low: float
    high: float
    rapid_time: float
    models: Mapping[str, float]
    sources: tuple[Source, ...]
    wanted: float | None = None

    @property
    def verdict(self) -> str:
        """What the band says, in words."""
        band = f"between {duration(self.low)} and {duration(self.high)}"
        if self.wanted is None:
            return f"{self.criterion} is expected {band}"
        if self.low > self.wanted:
            return (
                f"keeps: {self.criterion} is expected {band}, later than the {duration(self.wanted)} wanted"
            )
        if self.high < self.wanted:
            return f"does not keep: {self.criterion} is expected {band}, before the {duration(self.wanted)} wanted"
        return (
            f"undecided: {self.criterion} is expected {band}; {duration(self.wanted)} wanted. "
            f"Most is gained by knowing the {self.sources[0].label} better"
        )

    def __str__(self) -> str:
        lines = [self.verdict]
        lines += [f"  {s.label}: {s.decades:.1f} powers of ten over its range" for s in self.sources]
        return "\n".join([*lines, CAUTION])


def shelf_life(
    particles: Particles,
    medium: Medium,
    start: StartingDistribution,
    *,
    criterion: Criterion | None = None,
    surface_potential: tuple[float, float] | None = None,
    ionic_strength: tuple[float, float] | None = None,
    hamaker: tuple[float, float] | None = None,
    double_layers: Sequence[Any] = (LinearSuperposition(), ConstantPotential(), ConstantCharge()),
    van_der_waals: Any = None,
    steric: Any = None,
    structure: Any = None,
    wanted: float | None = None,
    seed: int = 1,
) -> ShelfLife:
    """Time until a dispersion meets a criterion, as a band over the uncertainty of its inputs.

    Aggregates carry the interaction of their primary particles, so that one stability ratio W divides the
    Brownian kernel for every pair, and time scales with it: the simulation gives the time of rapid
    coagulation, each draw multiplies it by its own W (with hydrodynamics).

    Parameters
    ----------
    particles : Particles
        With `hamaker` [J] and `surface_potential` [V] (usually the zeta potential stands for it).
    medium : Medium
        With ionic strength [mol/m3] and permittivity.
    start : StartingDistribution
        Sizes and amount of the product.
    criterion : Criterion, optional
        `SingleParticlesLeft`, `MeanSizeGrowth` or `SizeLimit`; SingleParticlesLeft(share=0.9) without it.
    surface_potential, ionic_strength, hamaker : (low, high), optional
        Ranges [V, mol/m3, J] of the inputs that are not known better; drawn uniformly (the Hamaker constant and
        the ionic strength in the logarithm).
    double_layers : sequence
        Models to consider; they are the largest single source of doubt more often than not. The first one
        gives the central time.
    van_der_waals, steric : optional
        As in `interaction.pair_energy`.
    structure : Compact or Fractal, optional
        Shape of the aggregates, compact without it.
    wanted : float, optional
        Time [s] that the product should keep; the verdict compares it with the band.
    seed : int
        Of the quasi-random draws.

    Raises
    ------
    InputError
        If an input is missing or a range is not one.

    References
    ----------
    .. [1] N. Fuchs, Z. Phys. 89 (1934) 736, doi:10.1007/BF01341386 (stability ratio).
    .. [2] E. P. Honig, G. J. Roebersen, P. H. Wiersema, J. Colloid Interface Sci. 36 (1971) 97,
       doi:10.1016/0021-9797(71)90202-1 (drag between approaching particles).
    """
    criterion = SingleParticlesLeft() if criterion is None else criterion
    criterion.check(start)
    if not double_layers:
        raise InputError(
            "double_layers is empty; at least one model is needed. Try: (LinearSuperposition(),)."
        )
    if wanted is not None:
        _checks.scalar("wanted", wanted, "s", above=0.0, hint="2 * 365.25 * 86400 for two years")
    shape = Compact(particles) if structure is None else structure
    options: dict[str, Any] = {"steric": steric}
    if van_der_waals is not None:
        options["van_der_waals"] = van_der_waals

    ranges = _ranges(surface_potential, ionic_strength, hamaker)
    centre: dict[str, Any] = {
        "surface_potential": particles.surface_potential,
        "ionic_strength": medium.ionic_strength,
        "hamaker": particles.hamaker,
    }
    rapid = _rapid_time(shape, medium, start, criterion)

    def decades(model: Any, **changed: float) -> float:
        """Logarithm (base 10) of the shelf life [s]."""
        inputs = {**centre, **changed}
        grain = replace(particles, surface_potential=inputs["surface_potential"], hamaker=inputs["hamaker"])
        liquid = replace(medium, ionic_strength=inputs["ionic_strength"])
        energy = assembled_pair(
            grain, liquid, double_layer=model, **options
        )  # the range is judged once, below
        log_ratio = log_stability_ratio(energy)
        return math.log10(rapid) + log_ratio / math.log(10.0)

    pair_energy(particles, medium, double_layer=double_layers[0], **options)  # refuses, warns
    models = {model_name(model): decades(model) for model in double_layers}
    sources = []
    for name, (low, high) in ranges.items():
        ends = sorted(decades(double_layers[0], **{name: value}) for value in (low, high))
        sources.append(Source(name, low, high, (_time(ends[0]), _time(ends[1])), ends[1] - ends[0]))
    if len(models) > 1:
        least, most = min(models, key=models.__getitem__), max(models, key=models.__getitem__)
        times = _time(models[least]), _time(models[most])
        sources.append(Source("double-layer model", least, most, times, models[most] - models[least]))
    drawn = [decades(model, **draw) for model in double_layers for draw in _draws(ranges, seed)]
    low, high = np.quantile(drawn, [0.05, 0.95])
    return ShelfLife(
        criterion=str(criterion),
        time=_time(next(iter(models.values()))),
        low=_time(float(low)),
        high=_time(float(high)),
        rapid_time=rapid,
        models={name: _time(value) for name, value in models.items()},
        sources=tuple(sorted(sources, key=lambda s: -s.decades)),
        wanted=wanted,
    )


def duration(seconds: float) -> str:
    """A time in words of everyday units."""
    for unit, length in (("years", YEAR), ("days", 86400.0), ("hours", 3600.0), ("minutes", 60.0)):
        if seconds >= 2 * length:
            value = seconds / length
            return f"{value:.3g} {unit}" if value < 1e4 else f"more than 10^{int(math.log10(value))} {unit}"
    return f"{seconds:.3g} s"


def _ranges(
    surface_potential: tuple[float, float] | None,
    ionic_strength: tuple[float, float] | None,
    hamaker: tuple[float, float] | None,
) -> dict[str, tuple[float, float]]:
    given = {"surface_potential": surface_potential, "ionic_strength": ionic_strength, "hamaker": hamaker}
    out = {}
    for name, value in given.items():
        if value is None:
            continue
        pair = _checks.array(name, value, size=2, increasing=True, hint="(low, high)")
        out[name] = (float(pair[0]), float(pair[1]))
    return out


def _draws(ranges: Mapping[str, tuple[float, float]], seed: int) -> list[dict[str, float]]:
    """Quasi-random draws from the ranges; one empty draw where there is no range."""
    if not ranges:
        return [{}]
    from scipy.stats import qmc  # half a second of import that only this function needs

    points: FloatArray = qmc.Sobol(len(ranges), rng=seed).random(_SAMPLES)
    draws = []
    for point in points:
        draw = {}
        for (name, (low, high)), u in zip(ranges.items(), point, strict=True):
            logarithmic = name != "surface_potential" and low > 0.0
            draw[name] = low * (high / low) ** u if logarithmic else low + u * (high - low)
        draws.append(draw)
    return draws


def _rapid_time(structure: Any, medium: Medium, start: StartingDistribution, criterion: Criterion) -> float:
    """Time [s] at which the criterion is met when every collision sticks."""
    kernel = brownian(structure, medium)
    typical = start.total_volume / start.total_number
    unit = 2.0 / (float(kernel(typical, typical)) * start.total_number)  # half-life of the number
    for longest in (10.0, 1e3, 1e5, 1e7):
        times = unit * np.concatenate([[0.0], np.geomspace(1e-4, longest, 400)])
        result = simulate(Batch(kernel), start, times)
        met = result.first_time(criterion.quantity(result), criterion.limit(result))
        if math.isfinite(met):
            return met
    raise InputError(
        f"the criterion ({criterion}) is not met within 1e7 half-lives of rapid coagulation. Try: a limit nearer "
        "to the start."
    )


def _time(decades: float) -> float:
    return float(10.0 ** min(max(decades, _TINY), _HUGE))
