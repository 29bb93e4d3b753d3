"""Collision kernels: how often two particles of given volumes meet and stick [m3/s]."""

from __future__ import annotations

from aggsim.kernels.base import Kernel as Kernel
from aggsim.kernels.base import Part as Part
from aggsim.kernels.base import PartFunction as PartFunction
from aggsim.kernels.base import PartMatrix as PartMatrix
from aggsim.kernels.base import from_function as from_function
from aggsim.kernels.brownian import brownian as brownian
from aggsim.kernels.brownian import brownian_in_gas as brownian_in_gas
from aggsim.kernels.efficiency import ShearEfficiency as ShearEfficiency
from aggsim.kernels.efficiency import shear_efficiency as shear_efficiency
from aggsim.kernels.ideal import additive as additive
from aggsim.kernels.ideal import constant as constant
from aggsim.kernels.ideal import multiplicative as multiplicative
from aggsim.kernels.settling import Drag as Drag
from aggsim.kernels.settling import SchillerNaumann as SchillerNaumann
from aggsim.kernels.settling import SettlingVelocity as SettlingVelocity
from aggsim.kernels.settling import Stokes as Stokes
from aggsim.kernels.settling import settling as settling
from aggsim.kernels.settling import settling_velocity as settling_velocity
from aggsim.kernels.shear import shear as shear
from aggsim.kernels.shear import turbulent_shear as turbulent_shear
from aggsim.kernels.slip import slip_correction as slip_correction
from aggsim.kernels.strength import Strength as Strength
