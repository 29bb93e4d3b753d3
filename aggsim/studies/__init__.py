"""Studies: questions that take physics and simulation together."""

from aggsim.studies.criteria import MeanSizeGrowth as MeanSizeGrowth
from aggsim.studies.criteria import SingleParticlesLeft as SingleParticlesLeft
from aggsim.studies.criteria import SizeLimit as SizeLimit
from aggsim.studies.shelf_life import ShelfLife as ShelfLife
from aggsim.studies.shelf_life import shelf_life as shelf_life
