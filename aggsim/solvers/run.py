"""One run under way: steps, jumps in time, a grid that grows, and the reasons to end."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

import numpy as np

from aggsim._checks import FloatArray
from aggsim.result import Outcome, Status
from aggsim.schemes import BEYOND, Scheme
from aggsim.sizes import SizeGrid, StartingDistribution
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
from aggsim.vessels import DILUTED, DOSED, Span, Term, Vessel, collision_rates


class Row(NamedTuple):
    """A recorded state, the grid it stands on, and the number of the span it belongs to."""

    time: float
    state: FloatArray
    grid: SizeGrid
    span: int


SAME_TIME = 1e-13  # relative; times no further apart than round-off are one, and no method steps between them
ATOL = 1e-6  # absolute tolerance over rtol, in units of the number or volume scale of a section


@dataclass(eq=False)
class Run:
    """State and bookkeeping of one run; `execute` carries it out.

    `starts` holds the starting numbers of each tank on the whole grid of the ladder (n_tanks, n_sections).
    """

    vessel: Vessel
    scheme: Scheme
    method: Method
    ladder: Ladder
    starts: FloatArray
    outputs: FloatArray
    rtol: float
    progress: Progress
    negative_limit: float = NEGATIVE_LIMIT
    steps: int = 0
    restarts: int = -1  # the first start is no restart
    extensions: int = 0
    _judged: bool = False
    _beyond: float = 0.0
    _spent: tuple[int, int] = (0, 0)
    _rows: list[Row] = field(default_factory=list)
    _terms: list[tuple[SizeGrid, Sequence[Term]]] = field(default_factory=list)  # of each span so far

    def __post_init__(self) -> None:
        self.streams = self.vessel.streams
        self._shares = np.array(self.vessel.volumes)
        self._placed = {id(feed): self.scheme.project(feed, self.ladder.whole) for feed in self.vessel.feeds}
        everything = sum(self._placed.values(), start=self.starts.sum(axis=0))
        grid = self.ladder.first(everything)
        volume = self.ladder.whole.volume
        self.initial_volume = float(self._shares @ (self.starts @ volume))
        # what is there and what comes in set the scales of the tolerances
        self._number_scale = float(everything.sum()) / (self._shares.size if not self._placed else 1)
        self._volume_scale = float(everything @ volume) / (self._shares.size if not self._placed else 1)
        self._time = 0.0
        self._span = self.vessel.spans[0]
        self._watch = GrowthWatch(self._volume_scale)
        self._use(grid)
        self._state = np.concatenate([self._tank_state(start, grid) for start in self.starts])

    def execute(self) -> Status:
        """Integrate to the last output time, or to the reason why that is not possible."""
        end = float(self.outputs[-1])
        if self.outputs[0] == 0.0:
            whole = self.ladder.whole
            state = np.concatenate([self._tank_state(start, whole) for start in self.starts])
            self._rows.append(Row(0.0, state, whole, 0))
        status = None
        try:
            with self.method.session():
                for span in self.vessel.spans:
                    if span.start < end and status is None:
                        status = self._through(span, min(span.stop, end))
        except KeyboardInterrupt:
            status = Status(Outcome.INTERRUPTED, self._time)
        except NotFiniteError as error:
            status = Status(Outcome.NOT_FINITE, self._time, f"{error}; look at the kernel for these sizes.")
        except WorkLimitError:
            detail = f"max_evaluations={self.method.max_evaluations}; try a larger one, or a looser rtol."
            status = Status(Outcome.WORK_LIMIT, self._time, detail)
        if status is None:
            return Status(Outcome.COMPLETED, end)
        if not self._rows or self._rows[-1].time < self._time:
            self._record()
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
        return np.array([row.time for row in self._rows])

    def states(self) -> FloatArray:
        """Recorded states (n_times, n_tanks, n_sections + 2 + n_streams) on the grid of the result."""
        tanks = self._shares.size
        return np.array([_padded(row.state, row.grid, self.grid, tanks) for row in self._rows])

    def collisions(self, states: FloatArray, tank: int) -> dict[str, tuple[FloatArray, FloatArray]]:
        """Collision events [1/(m3 s)] and volume flux [1/s] of each named part in a tank, (n_times,) each."""
        number, times = states[:, tank], self.times()
        span_of = np.array([row.span for row in self._rows])
        out: dict[str, tuple[FloatArray, FloatArray]] = {}
        for k, (grid, terms) in enumerate(self._terms):
            here = span_of == k
            own = [term for term in terms if term.tank == tank]
            # recorded states hold nothing above the sections in use
            found = collision_rates(own, grid.volume, times[here], number[here][:, : grid.sections])
            for name, (events, flux) in found.items():
                whole = out.setdefault(name, (np.zeros(times.size), np.zeros(times.size)))
                whole[0][here], whole[1][here] = events, flux
        return out

    def _tank_state(self, number: FloatArray, grid: SizeGrid) -> FloatArray:
        """State of a tank on `grid` that holds these numbers of the whole grid and no account yet."""
        return np.concatenate([self.ladder.cut(number, grid), np.zeros(BEYOND + len(self.streams))])

    def _record(self) -> None:
        self._rows.append(Row(self._time, self._state, self._grid, len(self._terms) - 1))

    def _use(self, grid: SizeGrid) -> None:
        self._grid = grid
        allowed = self.method.max_evaluations - self._spent[0]

        def place(distribution: StartingDistribution) -> FloatArray:
            return self.ladder.cut(self._placed[id(distribution)], grid)

        self._system = System(self._span.vessel, self.scheme, grid, allowed, self.streams, place)
        self._watch.on(grid, self.vessel.volumes, len(self.streams))
        scale = np.minimum(self._number_scale, self._volume_scale / grid.volume)
        account = [self._number_scale, self._volume_scale, *(self._volume_scale for _ in self.streams)]
        tank = self.rtol * ATOL * np.concatenate([scale, account])
        self._atol = np.tile(tank, self._shares.size)
        self._terms[-1:] = [(grid, self._system.terms)]

    def _through(self, span: Span, end: float) -> Status | None:
        """Integrate over one span, or what the outputs ask of it."""
        if span.start > 0.0:
            self._span = span
            self._spent = (self.rate_evaluations, self.jacobian_evaluations)
            self._terms.append((self._grid, ()))
            self._use(self._grid)
            if span.dose is not None or span.dilution > 0.0:
                self._add(span)
        jumps = [t for t in self._system.jumps if span.start < t < end]
        for stop in [*jumps, end]:
            self._watch.begin(self._time)
            status = self._segment(self._time, stop)
            if status is not None:
                return status
        return None

    def _add(self, span: Span) -> None:
        """Dilute and dose at the beginning of a span, which the vessel allows for one tank alone."""
        n, x = self._grid.sections, self._grid.volume
        state = self._state.copy()
        before = float(state[:n] @ x)
        state[:n] /= 1.0 + span.dilution
        if span.dilution > 0.0:
            state[n + BEYOND + self.streams.index(DILUTED)] += before - float(state[:n] @ x)
        if span.dose is not None:
            dose = self.ladder.cut(self._placed[id(span.dose)], self._grid)
            state[:n] += dose
            state[n + BEYOND + self.streams.index(DOSED)] += float(dose @ x)
        self._state = state

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
            goal = min(outputs[next_output], stop)
            if goal - self._time <= SAME_TIME * goal:
                self._time = goal
                if goal == outputs[next_output]:
                    self._record()
                    next_output += 1
                continue
            failure = stepper.step(goal)
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
                self._record()
                next_output += 1
            if doubled or (top > BEYOND_SHARE and not self._judged):
                self._judged = top > BEYOND_SHARE
                self._watch.sight(self._time, self._state, self._system.rates(self._time, self._state))
                status = self._verdict(top)
                if status is not None:
                    return status
            negative = self._watch.negative_share(self._state)
            if negative > self.negative_limit:
                return Status(Outcome.UNRESOLVED, self._time, _unresolved(negative))
            if longer is not None and self._time < stop:
                stepper = self._climb(longer, start, stop)
            self.progress.update(self._time / outputs[-1], self._time)
        return None

    def _climb(self, longer: SizeGrid, start: float, stop: float) -> Stepper:
        """Take more sections into use and begin again from the last state."""
        self._spent = (self.rate_evaluations, self.jacobian_evaluations)
        self._state = _padded(self._state, self._grid, longer, self._shares.size).ravel()
        self._use(longer)
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


def _padded(state: FloatArray, grid: SizeGrid, longer: SizeGrid, tanks: int) -> FloatArray:
    """A state on `grid` on a longer one, tank by tank (n_tanks, ...), with zeros in the sections above."""
    rows = state.reshape(tanks, -1)
    missing = longer.sections - grid.sections
    if not missing:
        return rows
    n = grid.sections
    return np.concatenate([rows[:, :n], np.zeros((tanks, missing)), rows[:, n:]], axis=1)
