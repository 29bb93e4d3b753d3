"""Interaction of two particles: energy over separation, barrier and minima, stability ratio."""

from __future__ import annotations

from aggsim.interaction.critical import critical_coagulation_closed_form as critical_coagulation_closed_form
from aggsim.interaction.critical import (
    critical_coagulation_concentration as critical_coagulation_concentration,
)
from aggsim.interaction.fuchs import log_stability_ratio as log_stability_ratio
from aggsim.interaction.fuchs import stability_ratio as stability_ratio
from aggsim.interaction.materials import HamakerConstant as HamakerConstant
from aggsim.interaction.materials import hamaker_across_water as hamaker_across_water
from aggsim.interaction.materials import materials_across_water as materials_across_water
from aggsim.interaction.models import ConstantCharge as ConstantCharge
from aggsim.interaction.models import ConstantPotential as ConstantPotential
from aggsim.interaction.models import DoubleLayer as DoubleLayer
from aggsim.interaction.models import Hamaker as Hamaker
from aggsim.interaction.models import LinearSuperposition as LinearSuperposition
from aggsim.interaction.models import Repulsion as Repulsion
from aggsim.interaction.models import VanDerWaals as VanDerWaals
from aggsim.interaction.potentials import constant_charge as constant_charge
from aggsim.interaction.potentials import constant_potential as constant_potential
from aggsim.interaction.potentials import hamaker_derjaguin as hamaker_derjaguin
from aggsim.interaction.potentials import hamaker_spheres as hamaker_spheres
from aggsim.interaction.potentials import linear_superposition as linear_superposition
from aggsim.interaction.potentials import retardation_gregory as retardation_gregory
from aggsim.interaction.profile import PairEnergy as PairEnergy
from aggsim.interaction.profile import pair_energy as pair_energy
from aggsim.interaction.repulsions import Born as Born
from aggsim.interaction.repulsions import Brush as Brush
from aggsim.interaction.repulsions import Hydration as Hydration
from aggsim.interaction.repulsions import born as born
from aggsim.interaction.repulsions import brush_elastic as brush_elastic
from aggsim.interaction.repulsions import brush_osmotic as brush_osmotic
from aggsim.interaction.repulsions import hydration as hydration
from aggsim.interaction.required import RequiredBarrier as RequiredBarrier
from aggsim.interaction.required import required_barrier as required_barrier
from aggsim.interaction.scans import SaltScan as SaltScan
from aggsim.interaction.scans import StabilityMap as StabilityMap
from aggsim.interaction.scans import model_name as model_name
from aggsim.interaction.scans import salt_scan as salt_scan
from aggsim.interaction.scans import stability_map as stability_map
from aggsim.interaction.stability import Carrier as Carrier
from aggsim.interaction.stability import PairwiseStabilityRatio as PairwiseStabilityRatio
from aggsim.interaction.stability import PrimaryParticles as PrimaryParticles
from aggsim.interaction.stability import WholeSpheres as WholeSpheres
from aggsim.interaction.stability import pairwise_stability_ratio as pairwise_stability_ratio
