"""One run under way: steps, jumps in time, a grid that grows, and the reasons to end."""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import dataclass, field

import numpy as np

from aggsim._checks import FloatArray
from aggsim.result import Outcome, Status
from aggsim.schemes import Scheme
from aggsim.sizes import SizeGrid
from aggsim.solvers.base import Method, Problem, Stepper
from aggsim.solvers.growth import (
    AT_THE_END,
    BEYOND_SHARE,
    LOST_SHARE,
    NEGATIVE_LIMIT,
    REMAINING,
    TOP_SHARE,
    GrowthWatch,
)
from aggsim.solvers.ladder import Ladder
from aggsim.solvers.progress import Progress
from aggsim.solvers.system import NotFiniteError, System, WorkLimitError
from aggsim.vessels import Vessel, collision_rates

ATOL = 1e-6  # absolute tolerance over rtol, in units of the number or volume scale of a section


@dataclass(eq=False)
class Run:
    """State and bookkeeping of one run; `execute` carries it out."""

    vessel: Vessel
    scheme: Scheme
    method: Method
    ladder: Ladder
    start: FloatArray
    outputs: FloatArray
    rtol: float
    progress: Progress
    steps: int = 0
    restarts: int = -1  # the first start is no restart
    extensions: int = 0
    _judged: bool = False
    _beyond: float = 0.0
    _spent: tuple[int, int] = (0, 0)
    _rows: list[tuple[float, FloatArray]] = field(default_factory=list)

    def __post_init__(self) -> None:
        grid, number = self.ladder.first(self.start)
        self.initial_volume = float(number @ grid.volume)
        self._initial_number = float(number.sum())
        self._time = 0.0
        self._state = np.concatenate([number, [0.0, 0.0]])
        self._watch = GrowthWatch(self.initial_volume)
        self._use(grid)

    def execute(self) -> Status:
        """Integrate to the last output time, or to the reason why that is not possible."""
        end = float(self.outputs[-1])
        if self.outputs[0] == 0.0:
            self._rows.append((0.0, np.concatenate([self.start, [0.0, 0.0]])))
        jumps = [t for t in self._system.jumps if 0.0 < t < end]
        status = None
        try:
            with self.method.session():
                for stop in [*jumps, end] if end > 0.0 else []:
                    self._watch.begin(self._time)
                    status = self._segment(self._time, stop)
                    if status is not None:
                        break
        except KeyboardInterrupt:
            status = Status(Outcome.INTERRUPTED, self._time)
        except NotFiniteError as error:
            status = Status(Outcome.NOT_FINITE, self._time, f"{error}; look at the kernel for these sizes.")
        except WorkLimitError:
            detail = f"max_evaluations={self.method.max_evaluations}; try a larger one, or a looser rtol."
            status = Status(Outcome.WORK_LIMIT, self._time, detail)
        if status is None:
            return Status(Outcome.COMPLETED, end)
        if not self._rows or self._rows[-1][0] < self._time:
            self._rows.append((self._time, self._state))
        return status

    @property
    def rate_evaluations(self) -> int:
        """Rate evaluations on all grids so far."""
        return self._spent[0] + self._system.rate_evaluations

    @property
    def jacobian_evaluations(self) -> int:
        """Jacobian evaluations on all grids so far."""
        return self._spent[1] + self._system.jacobian_evaluations

    @property
    def grid(self) -> SizeGrid:
        """Grid of the result."""
        return self.ladder.result_grid(self._grid)

    def times(self) -> FloatArray:
        """Times of the recorded states (n_times,) [s]."""
        return np.array([t for t, _ in self._rows])

    def states(self) -> FloatArray:
        """Recorded states (n_times, n_sections + 2) on the grid of the result."""
        return np.array([_padded(state, self.grid) for _, state in self._rows])

    def collisions(self) -> dict[str, tuple[FloatArray, FloatArray]]:
        """Collision events [1/(m3 s)] and volume flux [1/s] of each named part, (n_times,) each."""
        used = self._grid.sections  # recorded states hold nothing above the sections in use
        number = self.states()[:, :used]
        return collision_rates(self._system.terms, self._grid.volume, self.times(), number)

    def _use(self, grid: SizeGrid) -> None:
        self._grid = grid
        allowed = self.method.max_evaluations - self._spent[0]
        self._system = System(self.vessel, self.scheme, grid, allowed)
        self._watch.on(grid)
        scale = np.minimum(self._initial_number, self.initial_volume / grid.volume)
        beyond = [self._initial_number, self.initial_volume]
        self._atol = self.rtol * ATOL * np.concatenate([scale, beyond])

    def _begin(self, start: float, stop: float) -> Stepper:
        self.restarts += 1
        self._system.on(start, stop)
        system = self._system
        problem = Problem(system.rates, system.jacobian, self._time, self._state, stop, self.rtol, self._atol)
        return self.method.stepper(problem)

    def _segment(self, start: float, stop: float) -> Status | None:
        """Integrate over one stretch without jumps; None when its end is reached."""
        stepper = self._begin(start, stop)
        outputs = self.outputs.tolist()
        enough = min(TOP_SHARE, self.rtol)
        next_output = bisect_right(outputs, self._time)
        while self._time < stop:
            failure = stepper.step(min(outputs[next_output], stop))
            if failure is not None:
                stalled = Status(Outcome.STALLED, self._time, f"{self.method.name}: {failure}")
                return self._gelled(AT_THE_END) or stalled
            self.steps += 1
            top, beyond, doubled = self._watch.look(stepper.state)
            longer = self.ladder.next(self._grid) if top > enough else None
            if longer is not None and abs(beyond - self._beyond) > LOST_SHARE * enough:
                # too much has passed the top to be let go: take the step again on more sections
                stepper = self._climb(longer, start, stop)
                continue
            self._time, self._state, self._beyond = stepper.time, stepper.state, beyond
            if self._time == outputs[next_output]:
                self._rows.append((self._time, self._state))
                next_output += 1
            if doubled or (top > BEYOND_SHARE and not self._judged):
                self._judged = top > BEYOND_SHARE
                self._watch.sight(self._time, self._state, self._system.rates(self._time, self._state))
                status = self._verdict(top)
                if status is not None:
                    return status
            negative = self._watch.negative_share(self._state)
            if negative > NEGATIVE_LIMIT:
                return Status(Outcome.UNRESOLVED, self._time, _unresolved(negative))
            if longer is not None and self._time < stop:
                stepper = self._climb(longer, start, stop)
            self.progress.update(self._time / outputs[-1], self._time)
        return None

    def _climb(self, longer: SizeGrid, start: float, stop: float) -> Stepper:
        """Take more sections into use and begin again from the last state."""
        self._spent = (self.rate_evaluations, self.jacobian_evaluations)
        self._use(longer)
        self._state = _padded(self._state, longer)
        self.extensions += 1
        return self._begin(start, stop)

    def _verdict(self, top: float) -> Status | None:
        """Gelation, or an outgrown grid of our own choice."""
        full = top > BEYOND_SHARE
        gelled = self._gelled(AT_THE_END if full else REMAINING)
        if gelled is None and full and self.ladder.automatic:
            detail = (
                f"{self.grid.sections} sections reach {self.grid.volume[-1]:.3g} m3. Try: fewer sections per "
                "doubling on a grid of your own, or shorter times."
            )
            return Status(Outcome.OUTGROWN, self._time, detail)
        return gelled

    def _gelled(self, within: float) -> Status | None:
        expected = self._watch.gelation_near(self._time, within)
        if expected is None:
            return None
        detail = (
            f"The second moment becomes infinite at about t = {expected:.6g} s. Beyond it the equation loses "
            "volume to particles without limit of size; a sink (settling out, breakage) or a shorter time helps."
        )
        return Status(Outcome.GELATION, self._time, detail, gelation_time=expected)


def _unresolved(negative: float) -> str:
    return (
        f"They hold {negative:.2g} of the volume; {NEGATIVE_LIMIT:g} is allowed. Try: more sections per doubling, "
        "SizeGrid.monomers_then_geometric for a monodisperse start, or FixedPivot(moments=2)."
    )


def _padded(state: FloatArray, grid: SizeGrid) -> FloatArray:
    """A state on a lower part of `grid`, with zeros in the sections above."""
    missing = grid.sections + 2 - state.size
    return np.concatenate([state[:-2], np.zeros(missing), state[-2:]]) if missing else state
