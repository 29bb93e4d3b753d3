"""Results: what a run leaves behind."""

from aggsim.result.account import Balance as Balance
from aggsim.result.account import Contribution as Contribution
from aggsim.result.account import Contributions as Contributions
from aggsim.result.result import Result as Result
from aggsim.result.status import Outcome as Outcome
from aggsim.result.status import RunStatistics as RunStatistics
from aggsim.result.status import Status as Status
