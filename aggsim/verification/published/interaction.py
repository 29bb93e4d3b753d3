"""Published figures of interaction energies, stability ratios and critical concentrations.

Figures without a measurement behind them were computed from the named formulas at high precision.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Any

from scipy import constants

from aggsim.inputs import Medium, Particles
from aggsim.interaction import (
    ConstantCharge,
    ConstantPotential,
    Hamaker,
    LinearSuperposition,
    critical_coagulation_closed_form,
    critical_coagulation_concentration,
    hamaker_across_water,
    pair_energy,
    stability_ratio,
)
from aggsim.verification.checks import Case, Check

Checks = Iterator[Check]

ENERGY, STABILITY = "Interaction of two particles", "Stability of suspensions"
HAMAKER = "H. C. Hamaker, Physica 4 (1937) 1058, doi:10.1016/S0031-8914(37)80203-7"
DERJAGUIN = "B. V. Derjaguin, Kolloid-Z. 69 (1934) 155, doi:10.1007/BF01433225"
VERWEY = "E. J. W. Verwey, J. Th. G. Overbeek, Theory of the Stability of Lyophobic Colloids (1948)"
HOGG = "R. Hogg, T. W. Healy, D. W. Fuerstenau (1966), doi:10.1039/TF9666201638"
FUCHS = "N. Fuchs (1934), doi:10.1007/BF01341386"
HONIG = "E. P. Honig et al. (1971), doi:10.1016/0021-9797(71)90202-1"

SUPERPOSITION, POTENTIAL, CHARGE = LinearSuperposition(), ConstantPotential(), ConstantCharge()
EXACT, FLAT = Hamaker(), Hamaker(derjaguin=True)
NAMES = {SUPERPOSITION: "superposition", POTENTIAL: "constant potential", CHARGE: "constant charge"}
FORMS = {EXACT: "", FLAT: ", Derjaguin's attraction"}


def salt_water(molar: float, permittivity: float = 78.5, kelvin: float = 298.15) -> Medium:
    """Water with so much of a 1:1 salt [mol/L]."""
    return Medium(
        temperature=kelvin,
        viscosity=0.89e-3,
        density=997.0,
        relative_permittivity=permittivity,
        ionic_strength=1000.0 * molar,
    )


def sphere(radius: float, hamaker: float, potential: float | None = None) -> Particles:
    """Radius [m], Hamaker constant [J], surface potential [V]."""
    return Particles(diameter=2.0 * radius, density=1055.0, hamaker=hamaker, surface_potential=potential)


KT = salt_water(0.0).thermal_energy

# ---- double layers and attraction

# relative permittivity: Debye length of 1 mol/L at 25 C [nm]; the rule of thumb 0.304, and its value from constants
DEBYE_OF_ONE_MOLAR = {78.4085: 0.30403, 78.5: 0.30421}
# t [C]: relative permittivity of IAPWS R8-97, Debye length of 0.1 mol/L [nm]
DEBYE = {
    5.0: (85.9155, 0.972054),
    10.0: (83.9745, 0.969610),
    20.0: (80.2226, 0.964292),
    25.0: (78.4085, 0.961422),
    40.0: (73.2006, 0.952026),
    60.0: (66.7745, 0.937865),
}
SEPARATIONS = (0.2e-9, 0.5e-9, 1e-9, 2e-9, 5e-9, 10e-9)
# part, models: energies [kT] at the separations; radius 100 nm, 10 zJ, 25 mV, 0.1 mol/L
ENERGIES: tuple[tuple[str, str, dict[str, Any], tuple[float, ...]], ...] = (
    (
        "attraction [kT]",
        "van der Waals",
        {"van_der_waals": EXACT},
        (-98.85565889, -38.49256963, -18.52656248, -8.68024155, -2.96365212, -1.19687394),
    ),
    (
        "Derjaguin's attraction [kT]",
        "van der Waals",
        {"van_der_waals": FLAT},
        (-101.22100894, -40.48840358, -20.24420179, -10.12210089, -4.04884036, -2.02442018),
    ),
    (
        "linear superposition [kT]",
        "double layer",
        {"double_layer": SUPERPOSITION},
        (51.80458547, 37.92546727, 22.55288832, 7.97525591, 0.35267283, 0.00195022),
    ),
    (
        "constant potential [kT]",
        "double layer",
        {"double_layer": POTENTIAL},
        (39.42545467, 30.94306017, 20.07685997, 7.81282170, 0.36565746, 0.00202758),
    ),
    (
        "constant charge [kT]",
        "double layer",
        {"double_layer": CHARGE},
        (110.92060888, 59.87781815, 28.93475798, 8.85789801, 0.36768510, 0.00202764),
    ),
)
# constant potential and attraction [kT]; radii 100 and 250 nm, 30 and 15 mV, 10 zJ, 0.01 mol/L, 2 nm
UNEQUAL = (25.80911991, -12.88576870)
# Hamaker constants across water [zJ]
HAMAKER_ACROSS_WATER = {
    "pentane": 3.4,
    "decane": 4.6,
    "hexadecane": 5.4,
    "polystyrene": 9.0,
    "glass": 13.0,
    "stearic acid": 3.0,
    "bovine serum albumin": 5.0,
    "biological cells": 1.0,
}


def energies() -> Checks:
    """Debye lengths, energies over separation, Hamaker constants."""
    case = Case(
        ENERGY,
        "Debye length",
        "P. Debye, E. Hueckel (1923) with the permittivity of IAPWS R8-97",
        "five or six digits given; 0.035 % where water takes its permittivity from IAPWS SR6-08(2011)",
    )
    for permittivity, nanometres in DEBYE_OF_ONE_MOLAR.items():
        found = 1e9 * salt_water(1.0, permittivity).debye_length
        at = f"permittivity {permittivity:g}"
        yield case.check("1 mol/L, 25 C [nm]", at, nanometres, found, relative=2e-5)
    for celsius, (permittivity, nanometres) in DEBYE.items():
        kelvin, at = celsius + constants.zero_Celsius, f"{celsius:g} C"
        found = 1e9 * salt_water(0.1, permittivity, kelvin).debye_length
        yield case.check("0.1 mol/L [nm]", at, nanometres, found, relative=1e-6)
        found = 1e9 * Medium.water(kelvin, ionic_strength=100.0).debye_length
        yield case.check("0.1 mol/L in water as provided [nm]", at, nanometres, found, relative=3.5e-4)
    case = Case(
        ENERGY,
        "equal spheres, radius 100 nm, 10 zJ, 25 mV, 0.1 mol/L",
        f"{HAMAKER}; {DERJAGUIN}; {VERWEY}; {HOGG}",
        "eight decimals given; constants of nature of 2018 and 2022 differ by 7e-10",
    )
    medium, particles = salt_water(0.1), sphere(100e-9, 1e-20, 0.025)
    places = [1e9 * h for h in SEPARATIONS]
    for quantity, part, models, given in ENERGIES:
        values = pair_energy(particles, medium, **models).parts[part](SEPARATIONS) / medium.thermal_energy
        yield from case.each(quantity, "at {:.1f} nm", places, given, values, relative=2e-9, absolute=5.1e-9)
    case = Case(
        ENERGY,
        "unequal spheres, radii 100 and 250 nm, 30 and 15 mV, 10 zJ, 0.01 mol/L",
        f"{HAMAKER}; {HOGG}",
        "ten digits given, and constants of nature as above",
    )
    small, large, medium = sphere(100e-9, 1e-20, 0.030), sphere(250e-9, 1e-20, 0.015), salt_water(0.01)
    parts = pair_energy(small, medium, large, double_layer=POTENTIAL).parts
    for name, given_one in zip(("double layer", "van der Waals"), UNEQUAL, strict=True):
        found = float(parts[name](2e-9)) / medium.thermal_energy
        yield case.check(f"{name} [kT]", "at 2 nm", given_one, found, relative=2e-9)
    case = Case(
        ENERGY,
        "Hamaker constants across water",
        "P. Walstra, Physical Chemistry of Foods, Marcel Dekker (2003), table 12.2",
        "as printed",
    )
    found_all = [1e21 * hamaker_across_water(name).value for name in HAMAKER_ACROSS_WATER]
    yield from case.each(
        "constant [zJ]", "{}", HAMAKER_ACROSS_WATER, HAMAKER_ACROSS_WATER.values(), found_all, relative=1e-12
    )


# ---- stability ratios

# A/kT: W of rapid coagulation with and without the film of liquid between the spheres
RAPID = {
    0.01: (3.04211881, 0.99785133),
    0.1: (2.47873509, 0.98736426),
    0.5: (2.09298918, 0.96289669),
    1.0: (1.92901132, 0.94411787),
    2.0: (1.76669148, 0.91888773),
    2.4299: (1.72150389, 0.91055625),
    5.0: (1.55632612, 0.87487113),
    10.0: (1.40255694, 0.83385468),
    20.0: (1.25579205, 0.78728112),
    50.0: (1.07602830, 0.71975843),
    100.0: (0.95272868, 0.66633522),
}
# radius [nm], A [1e-20 J], potential [mV], salt [mol/L], double layer, attraction: separation [nm] and height [kT] of
# the highest maximum (None: there is none), W without and with the film (None: not given)
BARRIERS: tuple[tuple[Any, ...], ...] = (
    (50, 1.0, 25, 0.01, SUPERPOSITION, EXACT, 1.16233, 14.435701, 15193.304, 344588.6),
    (50, 1.0, 25, 0.01, SUPERPOSITION, FLAT, 1.19616, 13.058807, 3987.7122, 88007.295),
    (50, 1.0, 25, 0.01, POTENTIAL, EXACT, 1.52187, 10.339645, 375.3178, 6619.8845),
    (50, 1.0, 25, 0.01, CHARGE, EXACT, 0.31777, 46.654973, 2.7407405e17, 2.1488896e19),
    (50, 1.0, 25, 0.05, SUPERPOSITION, EXACT, 0.89785, 6.692799, 6.0607864, 145.81495),
    (50, 1.0, 25, 0.05, POTENTIAL, EXACT, 1.14895, 4.429741, 1.6963654, 18.85296),
    (50, 1.0, 25, 0.1, SUPERPOSITION, EXACT, 0.84156, 2.777773, 1.023541, 4.8704764),
    (50, 1.0, 25, 0.1, POTENTIAL, EXACT, 1.06422, 1.380330, 0.95239144, 2.6240151),
    (50, 1.0, 25, 0.1, CHARGE, EXACT, 0.36615, 12.332168, 474.73709, 31628.278),
    (50, 1.0, 25, 0.2, SUPERPOSITION, EXACT, 0.85868, -1.261800, 0.91416306, 1.8017613),
    (50, 1.0, 25, 0.5, SUPERPOSITION, EXACT, None, None, 0.91070436, 1.7238449),
    (50, 1.0, 25, 0.5, POTENTIAL, EXACT, None, None, 0.91070767, 1.723861),
    (100, 1.0, 25, 0.05, SUPERPOSITION, EXACT, 0.90977, 12.179948, 427.5694, 23596.26),
    (100, 1.0, 25, 0.05, SUPERPOSITION, FLAT, 0.92231, 10.427194, 76.49985, 4128.4065),
    (100, 1.0, 25, 0.05, POTENTIAL, EXACT, 1.16747, 7.750563, 8.2358875, 318.03769),
    (100, 1.0, 25, 0.05, CHARGE, EXACT, 0.34514, 42.671482, 2.1124432e15, 3.0434638e17),
    (100, 1.0, 25, 0.1, SUPERPOSITION, EXACT, 0.85406, 4.324805, 1.0820606, 11.562697),
    (100, 1.0, 25, 0.1, POTENTIAL, EXACT, 1.08345, 1.622324, 0.92790657, 2.4814141),
    (100, 1.3, 30, 0.1, SUPERPOSITION, EXACT, 0.79341, 8.769124, 11.594237, 678.73699),
    (100, 1.3, 30, 0.1, POTENTIAL, EXACT, 0.99593, 4.826417, 1.187802, 16.24523),
)
# A [J], potential [V]: critical concentrations of 1:1, 2:2 and 3:3 salts [mol/L]
CRITICAL = {
    (0.5e-20, 0.025): (0.497192, 0.0996093, 0.0317009),
    (1e-20, 0.025): (0.124298, 0.0249023, 0.00792523),
    (2e-20, 0.025): (0.0310745, 0.00622558, 0.00198131),
    (1e-20, 0.050): (1.59375, 0.189728, 0.0341600),
}


def stability() -> Checks:
    """Rapid coagulation, barriers with their stability ratios, critical concentrations."""
    parfitt = "D. N. L. McGown, G. D. Parfitt, J. Phys. Chem. 71 (1967) 449"
    case = Case(
        STABILITY, "rapid coagulation", f"{FUCHS}; {HAMAKER}; {parfitt}; {HONIG}", "nine digits given"
    )
    for hamaker, (film, free) in RAPID.items():
        at = f"A = {hamaker:g} kT"
        energy = pair_energy(sphere(100e-9, hamaker * KT), salt_water(0.0), double_layer=None)
        yield case.check("stability ratio", at, film, stability_ratio(energy), relative=1e-8)
        found = stability_ratio(energy, hydrodynamics=False)
        yield case.check("stability ratio without the film", at, free, found, relative=1e-8)
    case = Case(
        STABILITY,
        "barriers and the stability ratios behind them",
        f"{FUCHS}; {HONIG}; {HAMAKER}; {DERJAGUIN}; J. Gregory (1975), doi:10.1016/0021-9797(75)90081-8; {HOGG}",
        "digits given; W follows the barrier as exp(V/kT), so that constants of nature of 1e-9 count 50 times",
    )
    for nm, hamaker, mv, molar, layer, form, where, height, free, film in BARRIERS:
        at = f"{nm} nm, {10 * hamaker:g} zJ, {mv} mV, {molar:g} M, {NAMES[layer]}{FORMS[form]}"
        particles = sphere(1e-9 * nm, 1e-20 * hamaker, 1e-3 * mv)
        energy = pair_energy(particles, salt_water(molar), double_layer=layer, van_der_waals=form)
        if height is not None:
            yield case.check("barrier [kT]", at, height, energy.barrier / KT, relative=1e-9, absolute=6e-7)
            found = math.nan if energy.barrier_separation is None else 1e9 * energy.barrier_separation
            yield case.check("separation at the barrier [nm]", at, where, found, absolute=6e-6)
        found = stability_ratio(energy, hydrodynamics=False)
        yield case.check("stability ratio", at, film, stability_ratio(energy), relative=1.5e-7)
        yield case.check("stability ratio without the film", at, free, found, relative=1.5e-7)
    case = Case(STABILITY, "critical coagulation concentration", VERWEY, "six digits given")
    for (hamaker, potential), molar_of in CRITICAL.items():
        particles = sphere(50e-9, hamaker, potential)
        for valence, molar in enumerate(molar_of, start=1):
            at = f"{valence}:{valence} salt, {1e21 * hamaker:g} zJ, {1e3 * potential:g} mV"
            found = critical_coagulation_closed_form(particles, salt_water(1e-4), valence)
            yield case.check("closed form [mol/m3]", at, 1e3 * molar, found, relative=4.1e-6)
            layer = LinearSuperposition(valence=valence)
            found = critical_coagulation_concentration(
                particles, salt_water(1e-4), double_layer=layer, van_der_waals=FLAT
            )
            yield case.check("by the energy curve [mol/m3]", at, 1e3 * molar, found, relative=4.1e-6)
