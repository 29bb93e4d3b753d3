"""Vessels: the suspension and what happens to it."""

from aggsim.vessels.aggregation import Aggregation as Aggregation
from aggsim.vessels.base import Process as Process
from aggsim.vessels.base import Site as Site
from aggsim.vessels.base import Span as Span
from aggsim.vessels.base import Stream as Stream
from aggsim.vessels.base import Term as Term
from aggsim.vessels.base import TimeFactor as TimeFactor
from aggsim.vessels.base import Vessel as Vessel
from aggsim.vessels.base import collision_rates as collision_rates
from aggsim.vessels.batch import Batch as Batch
from aggsim.vessels.breaking import Breaking as Breaking
from aggsim.vessels.losses import Loss as Loss
from aggsim.vessels.losses import SettlingOut as SettlingOut
from aggsim.vessels.losses import Withdrawal as Withdrawal
from aggsim.vessels.schedule import DILUTED as DILUTED
from aggsim.vessels.schedule import DOSED as DOSED
from aggsim.vessels.schedule import Schedule as Schedule
from aggsim.vessels.schedule import Stage as Stage
from aggsim.vessels.stirred_tank import StirredTank as StirredTank
from aggsim.vessels.streams import Feed as Feed
from aggsim.vessels.train import Recycle as Recycle
from aggsim.vessels.train import SideStream as SideStream
from aggsim.vessels.train import Tank as Tank
from aggsim.vessels.train import Train as Train
