"""The integration methods that a user can pass to `simulate`."""

from aggsim.solvers.base import Method as Method
from aggsim.solvers.scipy_methods import BDF as BDF
from aggsim.solvers.scipy_methods import DOP853 as DOP853
from aggsim.solvers.scipy_methods import LSODA as LSODA
from aggsim.solvers.scipy_methods import Radau as Radau
from aggsim.solvers.sundials_methods import CVODE as CVODE
