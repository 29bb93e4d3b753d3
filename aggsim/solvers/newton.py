"""Newton's method in a pseudo time, for the state at which a vessel no longer changes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from aggsim._checks import FloatArray
from aggsim.errors import InputError
from aggsim.result import SteadyState
from aggsim.schemes import Scheme
from aggsim.sizes import SizeGrid
from aggsim.solvers.ladder import Ladder
from aggsim.solvers.system import NotFiniteError, System
from aggsim.vessels import Vessel

TOLERANCE = 1e-10  # largest relative change of a section in the last step, beside a floor:
FLOOR = 1e-6  # share of the scale of a section (as in a run) below which its number does not count
TOP_SHARE = 1e-10  # of the volume in the last doubling at which the grid is continued
OUTGROWN_SHARE = 1e-3  # of the volume there at which a search on the longest grid is given up
FIRST_STEP = 0.01  # of the scale of a section that may be gained in the first pseudo time step
NEGATIVE = 1e-3  # share of the volume that a step may turn negative; more, and it is taken again, shorter
ATTEMPTS = 100  # steps, refused ones included


@dataclass(eq=False)
class Found:
    """A solution: numbers (n_tanks, n_sections), the system they solve and the Jacobian there."""

    number: FloatArray
    grid: SizeGrid
    system: System
    jacobian: FloatArray
    change: float


class Search:
    """Newton steps in pseudo time for one vessel; `volume` is the conserved one, None where streams pass."""

    def __init__(
        self,
        vessel: Vessel,
        scheme: Scheme,
        ladder: Ladder,
        feeds: dict[int, FloatArray],
        everything: FloatArray,
        volume: float | None,
    ) -> None:
        self.vessel, self.scheme, self.ladder, self.volume = vessel, scheme, ladder, volume
        self.iterations = 0
        self._feeds = feeds
        self.fed = sum(feeds.values(), start=np.zeros(ladder.whole.sections))
        self._shares = np.array(vessel.volumes)
        self._number_scale = float(everything.sum())
        self._volume_scale = float(everything @ ladder.whole.volume)

    def placed(self, near: SteadyState) -> FloatArray:
        """Numbers of a state on another grid, if its pivots begin or continue those of this one."""
        x, known = self.ladder.whole.volume, near.grid.volume
        count = min(x.size, known.size)
        if not np.allclose(x[:count], known[:count], rtol=1e-9):
            raise InputError(
                "near has another grid. Try: steady_state without `near`, or with the grid of `near`."
            )
        out = np.zeros((near.tanks.shape[0], x.size))
        out[:, :count] = near.tanks[:, :count]
        return out

    def system(self, grid: SizeGrid) -> System:
        """The vessel on a grid."""
        system = System(
            self.vessel,
            self.scheme,
            grid,
            streams=self.vessel.streams,
            project=lambda feed: self.ladder.cut(self._feeds[id(feed)], grid),
        )
        if system.jumps or any(term.strength is not None for term in system.terms):
            raise InputError(
                "vessel changes in time (a kernel, feed, flow or loss has a strength) and has no steady state. "
                "Try: the vessel without the Strength."
            )
        system.on(0.0, np.inf)
        return system

    def newton(self, number: FloatArray, grid: SizeGrid, step: float | None) -> Found | None:
        """Newton steps from `number` (n_tanks, n_sections), the first one of the pseudo time `step` [s]."""
        system = self.system(grid)
        try:
            rates = self.rates(system, number)
            if step is None:
                gain = np.abs(rates) / (np.abs(number) + FIRST_STEP * self.scale(grid))
                step = 1.0 / max(float(gain.max()), 1e-300)
            before = 0.0  # volume in negative sections, which a step may leave but not make more
            for _ in range(ATTEMPTS):
                jacobian = self._jacobian(system, number)
                change = self._step(jacobian, rates, number, grid.volume, step)
                there = number + change
                negative = -float(self._shares @ (np.minimum(there, 0.0) @ grid.volume))
                self.iterations += 1
                if not np.isfinite(there).all() or negative > max(
                    NEGATIVE * self._volume_of(there, grid), before
                ):
                    step = 0.25 * min(step, 1e12 / max(float(np.abs(jacobian).max()), 1e-300))
                    continue
                size = np.abs(number) + FLOOR * self.scale(grid)
                largest = float((np.abs(change) / size).max())
                after = self.rates(system, there)
                ratio = _norm(rates / size) / max(
                    _norm(after / (np.abs(there) + FLOOR * self.scale(grid))), 1e-300
                )
                number, rates, before = there, after, negative
                if largest < TOLERANCE and np.isinf(step):
                    return Found(number, grid, system, self._jacobian(system, number), largest)
                # a small change proves nothing while the pseudo time step is short: the last one is a full step
                step = np.inf if largest < TOLERANCE else step * min(max(1.5 * ratio, 2.0), 100.0)
                top = self._top_share(number, grid)
                longer = self.ladder.next(grid) if top > TOP_SHARE else None
                if longer is None and top > OUTGROWN_SHARE and self.ladder.automatic:
                    return None
                if longer is not None:
                    number = np.pad(number, ((0, 0), (0, longer.sections - grid.sections)))
                    grid, system = longer, self.system(longer)
                    rates = self.rates(system, number)
        except (NotFiniteError, np.linalg.LinAlgError):
            return None
        return None

    def scale(self, grid: SizeGrid) -> FloatArray:
        """Number (n_sections,) [1/m3] that a section may hold."""
        return np.minimum(self._number_scale, self._volume_scale / grid.volume)

    def _volume_of(self, number: FloatArray, grid: SizeGrid) -> float:
        return float(self._shares @ (np.abs(number) @ grid.volume))

    def _state(self, system: System, number: FloatArray) -> FloatArray:
        state = np.zeros((system.tanks, system.width))
        state[:, : number.shape[1]] = number
        return state.ravel()

    def rates(self, system: System, number: FloatArray) -> FloatArray:
        """Rates of change (n_tanks, n_sections) of the numbers."""
        return self.all_rates(system, number)[:, : number.shape[1]]

    def all_rates(self, system: System, number: FloatArray) -> FloatArray:
        """Rates of the whole state (n_tanks, width), streams included."""
        return system.rates(0.0, self._state(system, number)).reshape(system.tanks, -1)

    def _jacobian(self, system: System, number: FloatArray) -> FloatArray:
        n, tanks = number.shape[1], system.tanks
        whole = system.jacobian(0.0, self._state(system, number)).reshape(
            tanks, system.width, tanks, system.width
        )
        return whole[:, :n, :, :n].reshape(tanks * n, tanks * n)

    def _step(
        self, jacobian: FloatArray, rates: FloatArray, number: FloatArray, x: FloatArray, step: float
    ) -> FloatArray:
        """Implicit step (1 / step - J) change = rates, at constant volume where that is conserved."""
        matrix = np.diag(np.full(number.size, 1.0 / step)) - jacobian
        # unknowns in units of what a section may hold, which keeps the elimination accurate
        unit = np.tile(np.minimum(self._number_scale, self._volume_scale / x), number.shape[0])
        matrix *= unit
        right = rates.ravel()
        if self.volume is None:
            change: FloatArray = unit * _solve_in_turn(matrix, right, number.shape[1])
            return change.reshape(number.shape)
        weight = np.outer(self._shares, x).ravel()
        border = np.zeros((number.size + 1, number.size + 1))
        border[:-1, :-1] = matrix
        border[:-1, -1] = number.ravel() / self.volume
        border[-1, :-1] = weight * unit
        missing = self.volume - float(weight @ number.ravel())
        bordered = np.linalg.solve(border, np.append(right, missing))
        change = unit * bordered[:-1]
        return change.reshape(number.shape)

    def _top_share(self, number: FloatArray, grid: SizeGrid) -> float:
        """Share of the volume in the last doubling of the grid."""
        upper = grid.volume >= 0.5 * grid.volume[-1]
        return float(self._shares @ (np.abs(number[:, upper]) @ grid.volume[upper])) / self._volume_scale


def _norm(values: FloatArray) -> float:
    return float(np.sqrt(np.mean(values * values)))


def in_turn(matrix: FloatArray, size: int) -> bool:
    """True where no tank depends on one behind it: blocks of this size above the diagonal are empty."""
    return not any(matrix[k : k + size, k + size :].any() for k in range(0, matrix.shape[0], size))


def _solve_in_turn(matrix: FloatArray, right: FloatArray, size: int) -> FloatArray:
    """Solution of a linear system, tank after tank where the flow allows it."""
    out: FloatArray = np.zeros_like(right)
    if not in_turn(matrix, size):
        size = right.size
    for k in range(0, right.size, size):
        rows = slice(k, k + size)
        out[rows] = np.linalg.solve(matrix[rows, rows], right[rows] - matrix[rows, :k] @ out[:k])
    return out
