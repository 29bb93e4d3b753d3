"""Stages of one vessel: rapid mix, slow mix, settle."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import KW_ONLY, dataclass
from functools import cached_property
from itertools import pairwise
from typing import Any

from aggsim import _checks
from aggsim.errors import InputError, TimesError
from aggsim.sizes import StartingDistribution
from aggsim.vessels.base import Process, Span, Stream, Vessel

DOSED = Stream("dosed", inward=True)
DILUTED = Stream("diluted", inward=False)

_SLACK = 1e-9  # of the stop of a stage, by which the next one may miss it


@dataclass(frozen=True)
class Stage:
    """What a vessel is from `start` to `stop`.

    Parameters
    ----------
    vessel : Vessel
        With its own kernel, breakage and losses. Strengths in time count from the start of the whole schedule.
    start, stop : float
        Limits of the stage [s].
    dose : StartingDistribution, optional
        Particles that are added when the stage begins, per volume of suspension in the vessel.
    dilution : float
        Volume of clear liquid that is added when the stage begins, per volume of suspension [1]. Numbers fall to
        1 / (1 + dilution) before a dose is added.
    name : str
        What the stage is called in messages.

    Raises
    ------
    InputError
        If the vessel is none, or changes in stages itself; if the stop does not lie after the start; if the dose
        is no distribution, or the dilution is negative.
    """

    vessel: Vessel
    _: KW_ONLY
    start: float
    stop: float
    dose: StartingDistribution | None = None
    dilution: float = 0.0
    name: str = ""

    def __post_init__(self) -> None:
        if not isinstance(self.vessel, Vessel) or isinstance(self.vessel, Schedule):
            raise InputError(
                f"vessel={self.vessel!r} is not allowed in a stage; allowed: Batch(...), StirredTank(...), "
                "Train(...). Try: one Schedule with all stages."
            )
        start = _checks.scalar("start", self.start, "s", least=0.0)
        hint = f"a stop after the start at {start:g} s"
        stop = _checks.scalar("stop", self.stop, "s", above=start, hint=hint)
        if self.dose is not None and not isinstance(self.dose, StartingDistribution):
            raise InputError(
                f"dose={self.dose!r} is not a starting distribution. Try: Monodisperse(...), or None."
            )
        dilution = _checks.scalar("dilution", self.dilution, least=0.0, hint="0.1 for a tenth more liquid")
        for name, value in (("start", start), ("stop", stop), ("dilution", dilution)):
            object.__setattr__(self, name, value)


@dataclass(frozen=True)
class Schedule(Vessel):
    """Stages that follow each other in one vessel.

    An integration stops at every limit of a stage, and what stands in the sections is handed on as it is. An
    output at the limit shows the state before a dose or a dilution.

    Parameters
    ----------
    stages : sequence of Stage
        The first from t = 0, each from the stop of the one before.

    Raises
    ------
    TimesError
        If the first stage does not start at 0, or the stages leave a gap or overlap.
    InputError
        If there is no stage, their tanks differ in number or volume, or a first stage has a dose or a dilution
        (which belongs in the start) or one of several tanks does.
    """

    stages: Sequence[Stage]

    def __post_init__(self) -> None:
        stages = tuple(self.stages) if isinstance(self.stages, (tuple, list)) else (self.stages,)
        if not stages or not all(isinstance(stage, Stage) for stage in stages):
            raise InputError(
                f"stages={self.stages!r} is not allowed; allowed: a sequence of Stage. "
                "Try: Schedule([Stage(Batch(kernel), start=0.0, stop=60.0)])."
            )
        object.__setattr__(self, "stages", stages)
        if stages[0].start != 0.0:
            _checks.refuse(
                "stages[0].start", f"{stages[0].start:g} s", "0 s, where a run begins", error=TimesError
            )
        for k, (before, stage) in enumerate(pairwise(stages), start=1):
            if abs(stage.start - before.stop) > _SLACK * before.stop:
                kind = "a gap" if stage.start > before.stop else "an overlap"
                _checks.refuse(
                    f"stages[{k}].start",
                    f"{stage.start:g} s",
                    f"{before.stop:g} s, where the stage before it stops ({kind} otherwise)",
                    "Schedule.in_turn, which takes durations",
                    error=TimesError,
                )
            if stage.vessel.volumes != stages[0].vessel.volumes:
                _checks.refuse(
                    f"stages[{k}].vessel",
                    f"a vessel with tanks of the shares {stage.vessel.volumes}",
                    f"tanks as in the first stage, {stages[0].vessel.volumes}",
                )
        for k, stage in enumerate(stages):
            added = stage.dose is not None or stage.dilution > 0.0
            if added and (k == 0 or len(stage.vessel.volumes) > 1):
                _checks.refuse(
                    f"stages[{k}]",
                    "a dose or a dilution",
                    "one that begins a later stage of a single tank",
                    "the start of the run, or the feed of a tank",
                )

    @classmethod
    def in_turn(cls, *stages: tuple[Vessel, float]) -> Schedule:
        """Schedule of (vessel, duration [s]) pairs, one after the other."""
        out, time = [], 0.0
        for k, pair in enumerate(stages):
            if not isinstance(pair, tuple) or len(pair) != 2:
                raise InputError(f"stages[{k}]={pair!r} is not a pair of a vessel and a duration [s].")
            vessel, duration = pair
            length = _checks.scalar(f"duration of stages[{k}]", duration, "s", above=0.0)
            out.append(Stage(vessel, start=time, stop=time + length))
            time += length
        return cls(out)

    @classmethod
    def following(cls, vessel: Callable[[float], Vessel], times: Any) -> Schedule:
        """Schedule of a vessel that is a function of time: temperature, salt or mixing that drift.

        Parameters
        ----------
        vessel : callable
            vessel(time [s]) -> Vessel.
        times : (n + 1,)
            Limits [s] of n stages, the first 0. Each stage holds the vessel of its middle, which is second
            order in the length of the stages.
        """
        limits = _checks.array("times", times, "s", least=0.0, increasing=True, error=TimesError)
        pairs = zip(limits[:-1].tolist(), limits[1:].tolist(), strict=True)
        return cls([Stage(vessel(0.5 * (a + b)), start=a, stop=b) for a, b in pairs])

    @cached_property
    def processes(self) -> tuple[Process, ...]:
        """The processes of all stages."""
        return tuple(process for stage in self.stages for process in stage.vessel.processes)

    @property
    def volumes(self) -> tuple[float, ...]:
        return self.stages[0].vessel.volumes

    @property
    def spans(self) -> tuple[Span, ...]:
        return tuple(Span(s.start, s.stop, s.vessel, s.dose, s.dilution) for s in self.stages)

    @property
    def streams(self) -> tuple[Stream, ...]:
        extra = [DOSED] if any(stage.dose is not None for stage in self.stages) else []
        extra += [DILUTED] if any(stage.dilution > 0.0 for stage in self.stages) else []
        return tuple(dict.fromkeys((*(s for stage in self.stages for s in stage.vessel.streams), *extra)))

    @property
    def feeds(self) -> tuple[StartingDistribution, ...]:
        doses = tuple(stage.dose for stage in self.stages if stage.dose is not None)
        return (*super().feeds, *doses)
