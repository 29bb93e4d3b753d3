"""Verification: the library against closed solutions and published figures, each beside its source."""

from aggsim.verification.checks import Case as Case
from aggsim.verification.checks import Check as Check
