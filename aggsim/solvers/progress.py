"""Progress of a run, shown where somebody is looking."""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from typing import Any, Protocol

from aggsim.errors import InputError

PATIENCE = 2.0  # s before an automatic display appears


class Progress(Protocol):
    """What a run tells about itself."""

    def update(self, fraction: float, time: float) -> None:
        """The run has covered `fraction` of its work and reached `time` [s]."""

    def close(self) -> None:
        """The run is over."""


class NoProgress:
    """Says nothing."""

    def update(self, fraction: float, time: float) -> None:
        """Say nothing."""

    def close(self) -> None:
        """Say nothing."""


class CallbackProgress:
    """Calls a function of the user's own with (fraction, time)."""

    def __init__(self, function: Callable[[float, float], Any]) -> None:
        self._function = function

    def update(self, fraction: float, time: float) -> None:
        self._function(fraction, time)

    def close(self) -> None:
        """Nothing is left open."""


class TerminalProgress:
    """A line on stderr that appears when a run takes longer than a moment."""

    def __init__(self, patience: float) -> None:
        self._start = time.monotonic()
        self._patience = patience
        self._next = 0.0
        self._shown = False

    def update(self, fraction: float, time_reached: float) -> None:
        elapsed = time.monotonic() - self._start
        if elapsed < max(self._patience, self._next):
            return
        self._next = elapsed + 0.2
        self._shown = True
        bar = "#" * int(30 * fraction)
        sys.stderr.write(f"\r[{bar:<30}] {fraction:4.0%}  t = {time_reached:.4g} s  {elapsed:.0f} s elapsed ")
        sys.stderr.flush()

    def close(self) -> None:
        if self._shown:
            sys.stderr.write("\n")
            sys.stderr.flush()


def progress_for(choice: Any) -> Progress:
    """Turn the `progress` argument of `simulate` into an object.

    None shows a line on a terminal when the run takes longer than 2 s, True at once, False never; nothing is
    shown where stderr is not a terminal. A function is called with (fraction, time).
    """
    if callable(choice):
        return CallbackProgress(choice)
    if choice is None or choice is True:
        if not sys.stderr.isatty():
            return NoProgress()
        return TerminalProgress(PATIENCE if choice is None else 0.0)
    if choice is False:
        return NoProgress()
    raise InputError(
        f"progress={choice!r} is not allowed; allowed: None (automatic), True, False, or a function of "
        "(fraction, time). Try: progress=True."
    )
