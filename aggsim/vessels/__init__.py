"""Vessels: the suspension and what happens to it."""

from aggsim.vessels.aggregation import Aggregation as Aggregation
from aggsim.vessels.base import Process as Process
from aggsim.vessels.base import Term as Term
from aggsim.vessels.base import TimeFactor as TimeFactor
from aggsim.vessels.base import Vessel as Vessel
from aggsim.vessels.base import collision_rates as collision_rates
from aggsim.vessels.batch import Batch as Batch
