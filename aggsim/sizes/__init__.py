"""Sizes: starting distributions, measured distributions, grids and mean sizes."""

from aggsim.sizes.grid import SizeGrid as SizeGrid
from aggsim.sizes.measured import Measured as Measured
from aggsim.sizes.projection import project as project
from aggsim.sizes.starting import Box as Box
from aggsim.sizes.starting import Exponential as Exponential
from aggsim.sizes.starting import Gamma as Gamma
from aggsim.sizes.starting import LogNormal as LogNormal
from aggsim.sizes.starting import Mixture as Mixture
from aggsim.sizes.starting import Monodisperse as Monodisperse
from aggsim.sizes.starting import StartingDistribution as StartingDistribution
from aggsim.sizes.starting_grid import starting_grid as starting_grid
