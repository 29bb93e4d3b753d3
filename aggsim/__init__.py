"""aggsim: how a suspension's particle-size distribution changes by aggregation.

The flow: physical inputs -> kernel -> vessel -> simulate <- starting distribution, grid, scheme.
Everything is in SI units; particle volume [m3] is the size coordinate.
"""

from aggsim import errors as errors
from aggsim import interaction as interaction
from aggsim import kernels as kernels
from aggsim.inputs import Compact as Compact
from aggsim.inputs import Flow as Flow
from aggsim.inputs import Fractal as Fractal
from aggsim.inputs import Medium as Medium
from aggsim.inputs import Particles as Particles
from aggsim.interaction import critical_coagulation_concentration as critical_coagulation_concentration
from aggsim.interaction import pairwise_stability_ratio as pairwise_stability_ratio
from aggsim.interaction import required_barrier as required_barrier
from aggsim.interaction import stability_ratio as stability_ratio
from aggsim.outputs import figures as figures
from aggsim.outputs import load as load
from aggsim.outputs import save as save
from aggsim.outputs import tables as tables
from aggsim.result import Outcome as Outcome
from aggsim.result import Result as Result
from aggsim.schemes import FixedPivot as FixedPivot
from aggsim.schemes import Monomer as Monomer
from aggsim.schemes import Sectional as Sectional
from aggsim.sizes import Box as Box
from aggsim.sizes import Exponential as Exponential
from aggsim.sizes import Gamma as Gamma
from aggsim.sizes import LogNormal as LogNormal
from aggsim.sizes import Measured as Measured
from aggsim.sizes import Mixture as Mixture
from aggsim.sizes import Monodisperse as Monodisperse
from aggsim.sizes import SizeGrid as SizeGrid
from aggsim.sizes import StartingDistribution as StartingDistribution
from aggsim.solvers import methods as methods
from aggsim.solvers import simulate as simulate
from aggsim.studies import MeanSizeGrowth as MeanSizeGrowth
from aggsim.studies import ShelfLife as ShelfLife
from aggsim.studies import SingleParticlesLeft as SingleParticlesLeft
from aggsim.studies import SizeLimit as SizeLimit
from aggsim.studies import shelf_life as shelf_life
from aggsim.vessels import Batch as Batch

__version__ = "0.1.0"
