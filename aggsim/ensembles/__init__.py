"""Ensembles: many random samples of one suspension, and what they say together."""

from aggsim.ensembles.estimates import EnsembleResult as EnsembleResult
from aggsim.ensembles.estimates import Estimate as Estimate
from aggsim.ensembles.stochastic import monte_carlo as monte_carlo
