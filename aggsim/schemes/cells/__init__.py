"""Schemes that take a section for a cell between two limits: averaged births, and fluxes through the limits."""

from aggsim.schemes.cells.cell_average import CellAverage as CellAverage
from aggsim.schemes.cells.finite_volume import FiniteVolume as FiniteVolume
