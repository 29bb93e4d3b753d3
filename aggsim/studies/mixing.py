"""A plan of mixed stages: power, shear rate and time in each, in winter and in summer, against design rules."""

from __future__ import annotations

import textwrap
from collections.abc import Mapping, Sequence
from dataclasses import KW_ONLY, dataclass

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.inputs import Flow, Medium
from aggsim.studies.design_rules import Departure, DesignRule, figures, outside
from aggsim.studies.mixers import Mixer

CAUTION = "Local codes and licensed practice decide."
_HEADER = (
    ("stage", "medium", "power", "P/V", "G", "time", "G t", "smallest eddies"),
    ("", "", "[kW]", "[W/m3]", "[1/s]", "[min]", "[1]", "[um]"),
)


@dataclass(frozen=True)
class MixingStage:
    """One mixed tank.

    Parameters
    ----------
    name : str
    volume : float
        Of the water in it [m3].
    mixer : Impeller, Paddles, MotorPower or another Mixer
    rule : DesignRule, optional
        What the stage is meant to keep to, such as `design_rules.FLOCCULATION`.

    Raises
    ------
    InputError
        If an argument is of another kind, or the volume is not positive.
    """

    name: str
    volume: float
    mixer: Mixer
    _: KW_ONLY
    rule: DesignRule | None = None

    def __post_init__(self) -> None:
        if not isinstance(self.name, str) or not self.name:
            _checks.refuse("name", repr(self.name), "a name", "'rapid mix'")
        volume = _checks.scalar("volume", self.volume, "m3", above=0.0, hint="a volume in m3: 2e-3 for 2 L")
        object.__setattr__(self, "volume", volume)
        if isinstance(self.mixer, type) or not isinstance(self.mixer, Mixer):
            hint = "Impeller(power_number=1.3, diameter=1.5, rpm=20.0)"
            _checks.refuse("mixer", repr(self.mixer), "a mixer, with a method power(medium)", hint)
        if self.rule is not None and not isinstance(self.rule, DesignRule):
            _checks.refuse("rule", repr(self.rule), "DesignRule or None", "design_rules.FLOCCULATION")

    def flow(self, medium: Medium) -> Flow:
        """Flow of the `medium` in the tank, for `kernels.shear` and the like."""
        return Flow.from_power(power=self.mixer.power(medium), volume=self.volume, medium=medium)


@dataclass(frozen=True, eq=False)
class MixingPlan:
    """Figures of each stage with each medium; `str` gives the table.

    Attributes
    ----------
    stages, media : tuple of str
        Their names.
    rules : (n_stages,) tuple of DesignRule or None
    power : (n_stages, n_media) W
        Power that reaches the medium.
    power_per_volume : (n_stages, n_media) W/m3
    shear_rate : (n_stages, n_media) 1/s
        Root-mean-square velocity gradient G = sqrt(P/(mu V)).
    detention_time : (n_stages,) s
        t = V/Q.
    camp_number : (n_stages, n_media)
        G t [1].
    kolmogorov_length : (n_stages, n_media) m
        Size of the smallest eddies, sqrt(nu/G); G describes collisions of particles below it.
    """

    stages: tuple[str, ...]
    media: tuple[str, ...]
    rules: tuple[DesignRule | None, ...]
    power: FloatArray
    power_per_volume: FloatArray
    shear_rate: FloatArray
    detention_time: FloatArray
    camp_number: FloatArray
    kolmogorov_length: FloatArray

    def __post_init__(self) -> None:
        for value in vars(self).values():
            if isinstance(value, np.ndarray):
                value.setflags(write=False)

    @property
    def departures(self) -> tuple[Departure, ...]:
        """Figures outside the rules: G of each stage, time and G t of all stages of one rule together."""
        found: list[Departure] = []
        for rule, which, together in self._groups():
            time = float(self.detention_time[which].sum())
            if outside(time, rule.detention_time):
                found.append(Departure(together, None, "time", time, rule.detention_time, rule))
            for j, medium in enumerate(self.media):
                judged = [(self.stages[i], "G", self.shear_rate[i, j], rule.shear_rate) for i in which]
                judged.append((together, "G t", self.camp_number[which, j].sum(), rule.camp_number))
                found += [
                    Departure(where, medium, quantity, float(value), limits, rule)
                    for where, quantity, value, limits in judged
                    if outside(value, limits)
                ]
        return tuple(found)

    def __str__(self) -> str:
        departures = self.departures
        marked = {
            (departure.where, medium, departure.quantity)
            for departure in departures
            for medium in (self.media if departure.medium is None else [departure.medium])
        }
        rows: list[list[str]] = [list(line) for line in _HEADER]

        def add(where: str, medium: str, values: Mapping[str, float]) -> None:
            cells = [
                figures(values[name]) + (" *" if (where, medium, name) in marked else "")
                if name in values
                else ""
                for name in _HEADER[0][2:]
            ]
            rows.append([where, medium, *cells])

        for i, stage in enumerate(self.stages):
            for j, medium in enumerate(self.media):
                values = (
                    self.power[i, j] / 1e3,
                    self.power_per_volume[i, j],
                    self.shear_rate[i, j],
                    self.detention_time[i] / 60.0,
                    self.camp_number[i, j],
                    self.kolmogorov_length[i, j] * 1e6,
                )
                add(stage, medium, dict(zip(_HEADER[0][2:], values, strict=True)))
        for _, which, together in self._groups():
            if len(which) > 1:
                time = self.detention_time[which].sum() / 60.0
                for j, medium in enumerate(self.media):
                    power = self.power[which, j].sum() / 1e3
                    camp_number = self.camp_number[which, j].sum()
                    add(together, medium, {"power": power, "time": time, "G t": camp_number})
        used = dict.fromkeys(rule for rule in self.rules if rule is not None)
        notes = [f"* {departure}" for departure in departures]
        notes += [textwrap.fill(f"{rule.name}: {rule.source}", 100, subsequent_indent="  ") for rule in used]
        return "\n".join([*_aligned(rows), "", *notes, CAUTION])

    def _groups(self) -> list[tuple[DesignRule, list[int], str]]:
        """Each rule, its stages, and what they are called together."""
        rules = dict.fromkeys(rule for rule in self.rules if rule is not None)
        groups = [(rule, [i for i, other in enumerate(self.rules) if other == rule]) for rule in rules]
        return [
            (rule, which, self.stages[which[0]] if len(which) == 1 else f"{rule.name}, all {len(which)}")
            for rule, which in groups
        ]


def mixing_plan(
    stages: Sequence[MixingStage], *, flow_rate: float, media: Mapping[str, Medium]
) -> MixingPlan:
    """Power, shear rate, time and G t of mixed stages in series, for each medium.

    G = sqrt(P/(mu V)) [1]_, t = V/Q, and the Kolmogorov length (nu**3 rho V/P)**(1/4).

    Parameters
    ----------
    stages : sequence of MixingStage
        In the order of the flow.
    flow_rate : float
        Q [m3/s], above 0 and at most 100.
    media : mapping of str to Medium
        For example {"winter": Medium.water(temperature=277.15), "summer": Medium.water(temperature=293.15)}.

    Raises
    ------
    InputError
        If there is no stage or no medium, or the flow rate is out of range.

    References
    ----------
    .. [1] T. R. Camp, P. C. Stein (1943), J. Boston Soc. Civil Eng. 30, 219.
    """
    if isinstance(stages, MixingStage) or not all(isinstance(stage, MixingStage) for stage in stages):
        _checks.refuse("stages", repr(stages), "a list of MixingStage", "[MixingStage('tank', 500.0, mixer)]")
    hint = "a flow in m3/s: 1000 m3/h is 1000/3600, 10 ML/d is 10e3/86400"
    rate = _checks.scalar("flow_rate", flow_rate, "m3/s", above=0.0, most=100.0, hint=hint)
    named = isinstance(media, Mapping) and all(isinstance(medium, Medium) for medium in media.values())
    if not named or not media:
        hint = "{'winter': Medium.water(temperature=277.15)}"
        _checks.refuse("media", repr(media), "names with a Medium each, at least one", hint)
    names = [stage.name for stage in stages]
    if not names or len(set(names)) < len(names):
        _checks.refuse("stages", names, "at least one stage, each with a name of its own")
    volume = np.array([stage.volume for stage in stages])
    flows = [[stage.flow(medium) for medium in media.values()] for stage in stages]
    shear_rate = np.array([[flow.shear_rate for flow in row] for row in flows])
    per_volume = shear_rate**2 * np.array([medium.viscosity for medium in media.values()])
    lengths = [
        [flow.kolmogorov_length(medium) for flow, medium in zip(row, media.values(), strict=True)]
        for row in flows
    ]
    return MixingPlan(
        stages=tuple(names),
        media=tuple(media),
        rules=tuple(stage.rule for stage in stages),
        power=per_volume * volume[:, None],
        power_per_volume=per_volume,
        shear_rate=shear_rate,
        detention_time=volume / rate,
        camp_number=shear_rate * (volume / rate)[:, None],
        kolmogorov_length=np.array(lengths),
    )


def _aligned(rows: Sequence[Sequence[str]]) -> list[str]:
    """Lines of the table; figures to the right, with room for a mark behind each."""
    texts = [[cell if k < 2 or cell.endswith("*") else f"{cell}  " for k, cell in enumerate(r)] for r in rows]
    widths = [max(map(len, column)) for column in zip(*texts, strict=True)]
    lines = []
    for row in texts:
        cells = [
            c.ljust(w) if k < 2 else c.rjust(w) for k, (c, w) in enumerate(zip(row, widths, strict=True))
        ]
        lines.append("  ".join(cells).rstrip())
    return lines
