"""A well-mixed tank with flow through it."""

from __future__ import annotations

from dataclasses import KW_ONLY, dataclass
from functools import cached_property
from typing import Any

from aggsim import _checks
from aggsim.vessels.base import Process, TimeFactor, Vessel
from aggsim.vessels.batch import contents
from aggsim.vessels.streams import Inflow, Outflow, feeds_of, require_time_factor


@dataclass(frozen=True)
class StirredTank(Vessel):
    """A well-mixed tank of constant volume through which suspension flows.

        dn/dt = (n_feed - n) / residence_time + aggregation + breakage - losses

    Parameters
    ----------
    kernel : Kernel or None
        Collision kernel [m3/s].
    residence_time : float
        Volume of the tank over the flow through it [s].
    feed : StartingDistribution, Feed or sequence of Feed, optional
        What flows in: particles per volume of feed. Several feeds state their shares of the flow; what the
        shares leave is clear liquid, which dilutes. None: clear liquid alone. A Feed may change in time.
    breakage : Breakage or sequence of them, optional
    losses : SettlingOut, Withdrawal or sequence of them, optional
    flow : Strength, optional
        Factor in time on the flow in and out [1], jumps included.

    Raises
    ------
    InputError
        If the residence time is not positive and finite, the shares of the feeds make more than 1, or an
        argument is of another kind.

    References
    ----------
    .. [1] A. D. Randolph, M. A. Larson, Theory of Particulate Processes, 2nd ed., Academic Press 1988.
    """

    kernel: Any
    _: KW_ONLY
    residence_time: float
    feed: Any = None
    breakage: Any = None
    losses: Any = None
    flow: TimeFactor | None = None

    def __post_init__(self) -> None:
        hint = "volume over flow in seconds, 600.0 for ten minutes; Batch(kernel) where nothing flows"
        time = _checks.scalar("residence_time", self.residence_time, "s", above=0.0, hint=hint)
        object.__setattr__(self, "residence_time", time)
        require_time_factor("flow", self.flow)
        _ = self.processes  # refuses what cannot be used

    @cached_property
    def processes(self) -> tuple[Process, ...]:
        rate = 1.0 / self.residence_time
        inflows = tuple(Inflow(feed, rate, self.flow) for feed in feeds_of(self.feed))
        return (
            *contents(self.kernel, self.breakage, self.losses),
            *inflows,
            Outflow(rate, self.flow),
        )
