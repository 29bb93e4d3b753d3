"""Solvers: integration in time."""

from aggsim.solvers import methods as methods
from aggsim.solvers.simulate import InterruptedRunError as InterruptedRunError
from aggsim.solvers.simulate import simulate as simulate
from aggsim.solvers.steady import steady_state as steady_state
from aggsim.solvers.steady import steady_states as steady_states
