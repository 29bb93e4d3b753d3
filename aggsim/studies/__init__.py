"""Studies: questions that take physics and simulation together."""

from aggsim.studies import design_rules as design_rules
from aggsim.studies.clarifier import overflow_volume_fraction as overflow_volume_fraction
from aggsim.studies.clarifier import settled_share as settled_share
from aggsim.studies.clarifier import slower_share as slower_share
from aggsim.studies.criteria import MeanSizeGrowth as MeanSizeGrowth
from aggsim.studies.criteria import SingleParticlesLeft as SingleParticlesLeft
from aggsim.studies.criteria import SizeLimit as SizeLimit
from aggsim.studies.design_rules import DesignRule as DesignRule
from aggsim.studies.mixers import HeadLoss as HeadLoss
from aggsim.studies.mixers import Impeller as Impeller
from aggsim.studies.mixers import Mixer as Mixer
from aggsim.studies.mixers import MotorPower as MotorPower
from aggsim.studies.mixers import Paddles as Paddles
from aggsim.studies.mixing import MixingPlan as MixingPlan
from aggsim.studies.mixing import MixingStage as MixingStage
from aggsim.studies.mixing import mixing_plan as mixing_plan
from aggsim.studies.shelf_life import ShelfLife as ShelfLife
from aggsim.studies.shelf_life import shelf_life as shelf_life
from aggsim.studies.transfer import Transfer as Transfer
from aggsim.studies.transfer import transfer as transfer
