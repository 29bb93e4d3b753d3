"""Results: what a run leaves behind."""

from aggsim.result.account import Balance as Balance
from aggsim.result.account import Contribution as Contribution
from aggsim.result.account import Contributions as Contributions
from aggsim.result.error import FIGURES as FIGURES
from aggsim.result.error import Comparison as Comparison
from aggsim.result.error import ErrorEstimate as ErrorEstimate
from aggsim.result.error import Later as Later
from aggsim.result.error import Snapshot as Snapshot
from aggsim.result.readings import Readings as Readings
from aggsim.result.result import Result as Result
from aggsim.result.status import Outcome as Outcome
from aggsim.result.status import RunStatistics as RunStatistics
from aggsim.result.status import Status as Status
from aggsim.result.steady import SteadyBalance as SteadyBalance
from aggsim.result.steady import SteadyCurve as SteadyCurve
from aggsim.result.steady import SteadyState as SteadyState
