"""Breakage: how often particles fall apart [1/s], and into what."""

from __future__ import annotations

from aggsim.breakage import fragments as fragments
from aggsim.breakage import rates as rates
from aggsim.breakage.law import Breakage as Breakage
from aggsim.breakage.law import FragmentTable as FragmentTable
