"""aggsim: how a suspension's particle-size distribution changes by aggregation.

The flow: physical inputs -> kernel -> vessel -> simulate <- starting distribution, grid, scheme.
Everything is in SI units; particle volume [m3] is the size coordinate.
"""

from aggsim import errors as errors
from aggsim import interaction as interaction
from aggsim import kernels as kernels
from aggsim.breakage import Breakage as Breakage
from aggsim.breakage import fragments as fragments
from aggsim.breakage import rates as rates
from aggsim.ensembles import EnsembleResult as EnsembleResult
from aggsim.ensembles import Estimate as Estimate
from aggsim.ensembles import monte_carlo as monte_carlo
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
from aggsim.schemes import CellAverage as CellAverage
from aggsim.schemes import FiniteVolume as FiniteVolume
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
from aggsim.solvers import steady_state as steady_state
from aggsim.solvers import steady_states as steady_states
from aggsim.studies import DesignRule as DesignRule
from aggsim.studies import HeadLoss as HeadLoss
from aggsim.studies import Impeller as Impeller
from aggsim.studies import MeanSizeGrowth as MeanSizeGrowth
from aggsim.studies import MixingPlan as MixingPlan
from aggsim.studies import MixingStage as MixingStage
from aggsim.studies import MotorPower as MotorPower
from aggsim.studies import Paddles as Paddles
from aggsim.studies import ShelfLife as ShelfLife
from aggsim.studies import SingleParticlesLeft as SingleParticlesLeft
from aggsim.studies import SizeLimit as SizeLimit
from aggsim.studies import Transfer as Transfer
from aggsim.studies import design_rules as design_rules
from aggsim.studies import mixing_plan as mixing_plan
from aggsim.studies import overflow_volume_fraction as overflow_volume_fraction
from aggsim.studies import settled_share as settled_share
from aggsim.studies import shelf_life as shelf_life
from aggsim.studies import slower_share as slower_share
from aggsim.studies import transfer as transfer
from aggsim.vessels import Batch as Batch
from aggsim.vessels import Feed as Feed
from aggsim.vessels import Recycle as Recycle
from aggsim.vessels import Schedule as Schedule
from aggsim.vessels import SettlingOut as SettlingOut
from aggsim.vessels import SideStream as SideStream
from aggsim.vessels import Stage as Stage
from aggsim.vessels import StirredTank as StirredTank
from aggsim.vessels import Tank as Tank
from aggsim.vessels import Train as Train
from aggsim.vessels import Withdrawal as Withdrawal

__version__ = "0.1.0"
