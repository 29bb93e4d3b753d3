"""The exceptions and warnings that aggsim raises, one family.

Every message says what came, what is allowed, and what to try.
"""

from __future__ import annotations

from typing import Any


class AggsimError(Exception):
    """Base of every error that aggsim raises on purpose."""


class InputError(AggsimError, ValueError):
    """An argument has a value that nothing can be computed from."""


class GridError(InputError):
    """A size grid is malformed, or does not fit the scheme or the starting distribution."""


class DistributionError(InputError):
    """A table or a law does not describe a particle-size distribution."""


class KernelError(InputError):
    """A collision kernel gives values that are not collision rates (negative, not finite, not symmetric)."""


class BreakageError(InputError):
    """A breakage law gives values that are not breakage rates, or fragments that do not make up their parent."""


class TimesError(InputError):
    """The output times cannot be used."""


class SimulationError(AggsimError, RuntimeError):
    """A run ended before its last output time.

    `result` holds everything that was computed up to that moment, with the reason in `result.status`.
    """

    def __init__(self, message: str, result: Any = None) -> None:
        super().__init__(message)
        self.result = result


class ArchiveError(AggsimError, ValueError):
    """A file is not a saved aggsim result, or comes from a format version that this release cannot read."""


class AggsimWarning(UserWarning):
    """Base of every warning that aggsim issues."""


class ValidityWarning(AggsimWarning):
    """A published formula is used outside the range its source states, or an input is unusual."""


class AccuracyWarning(AggsimWarning):
    """A run completed, but one of its own quality figures is worse than it should be."""
