"""Liquid water at 0.1 MPa from the published IAPWS formulations, as pure functions of temperature [K].

References
----------
1. IAPWS SR6-08(2011), Revised Supplementary Release on Properties of Liquid Water at 0.1 MPa;
   J. Pátek, J. Hrubý, J. Klomfar, M. Součková, A. H. Harvey (2009), J. Phys. Chem. Ref. Data 38, 21,
   DOI 10.1063/1.3043575.
2. IAPWS R12-08 (2008), Release on the IAPWS Formulation 2008 for the Viscosity of Ordinary Water Substance;
   M. L. Huber et al. (2009), J. Phys. Chem. Ref. Data 38, 101, DOI 10.1063/1.3088050.
"""

from __future__ import annotations

import math

# SR6-08, specific volume at 0.1 MPa: coefficients and exponents of 10 K/(593 K - T) and of 10 K/(T - 232 K)
_SPECIFIC_GAS_CONSTANT = 461.51805  # J/(kg K), a coefficient of the formulation, not a constant of nature
_VOLUME_OFFSET = 1.93763157e-2
_VOLUME_HOT = (
    (6.74458446e3, 4),
    (-2.22521604e5, 5),
    (1.00231247e8, 7),
    (-1.63552118e9, 8),
    (8.32299658e9, 9),
)
_VOLUME_COLD = (
    (5.78545292e-3, 1),
    (-1.53195665e-2, 2),
    (3.11337859e-2, 3),
    (-4.23546241e-2, 4),
    (3.38713507e-2, 5),
    (-1.19946761e-2, 6),
)
# SR6-08, static dielectric constant: coefficients and exponents of T/300 K
_PERMITTIVITY = ((-43.7527, -0.05), (299.504, -1.47), (-399.364, -2.11), (221.327, -2.31))
# R12-08, viscosity of the dilute gas (by power of 1/T) and effect of density (powers of 1/T - 1 and rho - 1)
_DILUTE = (1.67752, 2.20462, 0.6366564, -0.241605)
_DENSE = (
    (0, 0, 5.20094e-1),
    (1, 0, 8.50895e-2),
    (2, 0, -1.08374),
    (3, 0, -2.89555e-1),
    (0, 1, 2.22531e-1),
    (1, 1, 9.99115e-1),
    (2, 1, 1.88797),
    (3, 1, 1.26613),
    (5, 1, 1.20573e-1),
    (0, 2, -2.81378e-1),
    (1, 2, -9.06851e-1),
    (2, 2, -7.72479e-1),
    (3, 2, -4.89837e-1),
    (4, 2, -2.57040e-1),
    (0, 3, 1.61913e-1),
    (1, 3, 2.57399e-1),
    (0, 4, -3.25372e-2),
    (3, 4, 6.98452e-2),
    (4, 5, 8.72102e-3),
    (3, 6, -4.35673e-3),
    (5, 6, -5.93264e-4),
)


def density(temperature: float) -> float:
    """Density [kg/m3] of water at 0.1 MPa and `temperature` [K], 253.15 to 383.15 K (reference 1)."""
    hot = 10.0 / (593.0 - temperature)
    cold = 10.0 / (temperature - 232.0)
    series = _VOLUME_OFFSET
    series += sum(factor * hot**power for factor, power in _VOLUME_HOT)
    series += sum(factor * cold**power for factor, power in _VOLUME_COLD)
    specific_volume = _SPECIFIC_GAS_CONSTANT * 10.0 / 0.1e6 * series
    return 1.0 / specific_volume


def viscosity(temperature: float, density: float) -> float:
    """Viscosity [Pa s] of water at `temperature` [K] and `density` [kg/m3], critical enhancement left out.

    The enhancement matters only within some kelvin of the critical point; leaving it out
    elsewhere is what the release offers for industrial use (reference 2).
    """
    t = temperature / 647.096
    r = density / 322.0
    dilute = 100.0 * math.sqrt(t) / sum(h / t**i for i, h in enumerate(_DILUTE))
    dense = math.exp(r * sum(h * (1.0 / t - 1.0) ** i * (r - 1.0) ** j for i, j, h in _DENSE))
    return 1e-6 * dilute * dense


def relative_permittivity(temperature: float) -> float:
    """Static relative permittivity [1] of water at 0.1 MPa and `temperature` [K] (reference 1)."""
    t = temperature / 300.0
    return math.fsum(factor * t**power for factor, power in _PERMITTIVITY)
