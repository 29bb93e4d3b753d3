"""What is in the vessel: the medium, the primary particles, the structure of their aggregates, the flow."""

from __future__ import annotations

from aggsim.inputs.flow import Flow as Flow
from aggsim.inputs.medium import Medium as Medium
from aggsim.inputs.particles import Particles as Particles
from aggsim.inputs.structure import Compact as Compact
from aggsim.inputs.structure import Fractal as Fractal
from aggsim.inputs.structure import Structure as Structure
