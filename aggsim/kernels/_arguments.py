"""Refusals that several kernels share."""

from __future__ import annotations

from typing import Any

from aggsim._checks import refuse
from aggsim.inputs import Flow, Medium, Particles, Structure


def require_structure(structure: Any) -> None:
    """Refuse what has no diameters, with the usual slips named."""
    if isinstance(structure, Structure):
        return
    hint = "Compact(particles) or Fractal(particles, dimension=2.1)"
    if isinstance(structure, Particles):
        hint = "Compact(...) or Fractal(..., dimension=2.1) around these particles"
    elif isinstance(structure, Medium):
        hint = "structure first, medium second"
    refuse("structure", _short(structure), "Compact, Fractal or another Structure", hint)


def require_medium(medium: Any) -> None:
    """Refuse what is not a medium."""
    if not isinstance(medium, Medium):
        refuse("medium", _short(medium), "Medium", "Medium.water(temperature=298.15)")


def require_flow(flow: Any) -> None:
    """Refuse what is not a flow."""
    if not isinstance(flow, Flow):
        refuse("flow", _short(flow), "Flow", "Flow(shear_rate=50.0)")


def _short(value: Any) -> str:
    text = repr(value)
    return text if len(text) <= 80 else f"{type(value).__name__}(...)"
