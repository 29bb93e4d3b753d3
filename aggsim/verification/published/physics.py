"""Published figures of water, collision rates, settling and mixing, and what the library makes of them."""

from __future__ import annotations

import math
from collections.abc import Iterator

from scipy import constants

from aggsim.inputs import Compact, Flow, Fractal, Medium, Particles, water
from aggsim.kernels import (
    SchillerNaumann,
    brownian,
    settling,
    settling_velocity,
    shear,
    slip_correction,
    turbulent_shear,
)
from aggsim.studies import MixingStage, MotorPower, mixing_plan
from aggsim.verification.checks import Case, Check

Checks = Iterator[Check]

WATER, RATES, MIXING = "Water", "Collision rates", "Settling and mixing"
SMOLUCHOWSKI = "M. von Smoluchowski, Z. Phys. Chem. 92 (1917) 129, doi:10.1515/zpch-1918-9209"

COLD = Medium(temperature=283.15, viscosity=1.30590e-3, density=999.7025)  # water at 10 C, IAPWS R12-08
ROOM = Medium(temperature=293.15, viscosity=1.00160e-3, density=998.2072)  # water at 20 C
GRAIN = Particles(diameter=1e-6, density=2650.0)  # quartz
QUARTZ = Compact(GRAIN)
LATEX = Compact(Particles(diameter=400e-9, density=1055.0))


def volume(diameter: float) -> float:
    """Of a sphere [m3]."""
    return math.pi / 6.0 * diameter**3


# ---- water

# T [K], density [kg/m3]: viscosity [uPa s]
VISCOSITY_POINTS = {
    (298.15, 998.0): 889.735100,
    (298.15, 1200.0): 1437.649467,
    (373.15, 1000.0): 307.883622,
    (433.15, 1.0): 14.538324,
    (433.15, 1000.0): 217.685358,
    (873.15, 1.0): 32.619287,
    (873.15, 100.0): 35.802262,
    (873.15, 600.0): 77.430195,
    (1173.15, 1.0): 44.217245,
    (1173.15, 100.0): 47.640433,
    (1173.15, 400.0): 64.154608,
}
# t [C]: density [kg/m3], viscosity [mPa s], relative permittivity, kinematic viscosity [mm2/s], at 0.101325 MPa
LIQUID = {
    5.0: (999.9666, 1.51817, 85.9155, 1.51822),
    10.0: (999.7025, 1.30590, 83.9745, 1.30629),
    15.0: (999.1026, 1.13757, 82.0775, 1.13859),
    20.0: (998.2072, 1.00160, 80.2226, 1.00340),
    25.0: (997.0476, 0.89002, 78.4085, 0.892658),
    30.0: (995.6495, 0.79722, 76.6340, 0.800705),
    40.0: (992.2164, 0.65273, 73.2006, 0.657849),
    50.0: (988.0350, 0.54652, 69.9161, 0.553134),
    60.0: (983.1958, 0.46604, 66.7745, 0.474000),
}
# T [K]: viscosity [uPa s]
HANDBOOK = {280.0: 1433.7, 290.0: 1084.0, 300.0: 853.84, 310.0: 693.54, 320.0: 577.02, 330.0: 489.49}


def malmberg_maryott(celsius: float) -> float:
    """Relative permittivity of water, as measured."""
    return 87.740 - 0.40008 * celsius + 9.398e-4 * celsius**2 - 1.410e-6 * celsius**3


def water_properties() -> Checks:
    """Viscosity, density and permittivity of water."""
    case = Case(WATER, "viscosity formulation", "IAPWS R12-08 (2008), table 4", "the digits printed there")
    for (kelvin, density), printed in VISCOSITY_POINTS.items():
        at = f"{kelvin:g} K, {density:g} kg/m3"
        computed = 1e6 * water.viscosity(kelvin, density)
        yield case.check("viscosity [uPa s]", at, printed, computed, absolute=0.6e-6)
    case = Case(
        WATER,
        "liquid water at atmospheric pressure",
        "IAPWS-95 (W. Wagner, A. Pruss 2002, doi:10.1063/1.1461829), IAPWS R12-08, IAPWS R8-97",
        "printed digits, 0.0013 MPa; permittivity: two published fits that differ by up to 0.15 %",
    )
    media = {celsius: Medium.water(constants.zero_Celsius + celsius) for celsius in LIQUID}
    for celsius, (density, viscosity, permittivity, kinematic) in LIQUID.items():
        medium, at = media[celsius], f"{celsius:g} C"
        yield case.check("density [kg/m3]", at, density, medium.density, absolute=8e-4)
        yield case.check("viscosity [mPa s]", at, viscosity, 1e3 * medium.viscosity, absolute=0.6e-5)
        found = 1e6 * medium.kinematic_viscosity
        yield case.check("kinematic viscosity [mm2/s]", at, kinematic, found, absolute=1e-5)
        yield case.check(
            "relative permittivity", at, permittivity, medium.relative_permittivity, relative=1.5e-3
        )
    case = Case(
        WATER,
        "permittivity as measured",
        "C. G. Malmberg, A. A. Maryott, J. Res. NBS 56 (1956) 1",
        "their accuracy of 0.1 % at 25 C; elsewhere that of their polynomial and of ours",
    )
    for celsius, medium in media.items():
        measured = malmberg_maryott(celsius)
        tolerance = 1e-3 if celsius == 25.0 else 2e-3
        yield case.check(
            "relative permittivity",
            f"{celsius:g} C",
            measured,
            medium.relative_permittivity,
            relative=tolerance,
        )
    case = Case(
        WATER,
        "viscosity of a handbook",
        "Perry's Chemical Engineers' Handbook, 9th ed., table 2-135 (saturated liquid)",
        "older data: 1 %",
    )
    found_all = [1e6 * Medium.water(kelvin).viscosity for kelvin in HANDBOOK]
    yield from case.each("viscosity [uPa s]", "{:g} K", HANDBOOK, HANDBOOK.values(), found_all, relative=0.01)


# ---- collision rates

# t [C]: 8 kT/(3 mu) [m3/s] in water
PERIKINETIC = {
    5.0: 6.74543e-18,
    10.0: 7.98286e-18,
    15.0: 9.32596e-18,
    20.0: 1.07758e-17,
    25.0: 1.23335e-17,
    30.0: 14.0001e-18,
    40.0: 17.6633e-18,
    50.0: 21.7697e-18,
    60.0: 26.3192e-18,
}
# T [K], viscosity [Pa s]: 4 kT/(3 mu) [m3/s], half-life of 1e16 1/m3 [s]
DECAY = {(293.15, 1.00160e-3): (5.38790e-18, 18.5602), (298.15, 0.89002e-3): (6.16674e-18, 16.2160)}
PER_MOLE = 7.4274e9  # 8 RT/(3 mu) in water at 25 C [L/(mol s)]
SLIP = {0.01: 22.15, 0.1: 2.860, 1.0: 1.1637}  # diameter [um]: correction at a mean free path of 65.1 nm
RECTILINEAR = {1.0: 6.666667e-17, 5.0: 1.800000e-15}  # diameter of the partner of 1 um [um]: G/6 (d1 + d2)^3
TURBULENT, TURBULENT_PRINTED = 1.294417275, 1.294  # sqrt(8 pi/15), and as it is printed
# d [m], G [1/s]: mu G d^3/(2 kT) at 20 C
SHEAR_OVER_BROWNIAN = {(1e-6, 10.0): 1.237346, (0.1e-6, 50.0): 6.186730e-3, (10e-6, 50.0): 6.186730e3}
# G [1/s]: (2 kT/(mu G))^(1/3) at 20 C [um]
CROSSOVER = {1.0: 2.006795, 10.0: 0.931472, 50.0: 0.544728, 100.0: 0.432351, 1000.0: 0.200679}
SETTLING_RATE = 9.755129e-15  # of 2 and 10 um quartz in water at 20 C [m3/s]


def equal_pair(medium: Medium) -> float:
    """Brownian rate of two equal spheres [m3/s]."""
    return float(brownian(LATEX, medium)(LATEX.particles.volume, LATEX.particles.volume))


def collision_rates() -> Checks:
    """Brownian motion, shear, turbulence, settling."""
    case = Case(RATES, "Brownian motion, equal spheres", SMOLUCHOWSKI, "viscosities of five or six digits")
    found = [equal_pair(Medium.water(constants.zero_Celsius + celsius)) for celsius in PERIKINETIC]
    yield from case.each(
        "8 kT/(3 mu) in water [m3/s]", "{:g} C", PERIKINETIC, PERIKINETIC.values(), found, relative=1e-5
    )
    for (kelvin, viscosity), (decay, half_life) in DECAY.items():
        medium, at = Medium(temperature=kelvin, viscosity=viscosity, density=998.0), f"{kelvin:g} K"
        rate = 0.5 * equal_pair(medium)
        yield case.check("4 kT/(3 mu), decay [m3/s]", at, decay, rate, relative=1e-5)
        yield case.check("half-life of 1e16 1/m3 [s]", at, half_life, 1.0 / (rate * 1e16), relative=1e-5)
    per_mole = equal_pair(Medium.water(298.15)) * constants.N_A * 1000.0
    yield case.check("8 RT/(3 mu) [L/(mol s)]", "water, 25 C", PER_MOLE, per_mole, relative=1e-4)

    case = Case(
        RATES,
        "slip correction",
        "J. H. Seinfeld, S. N. Pandis, Atmospheric Chemistry and Physics, 3rd ed. (2016), eq. 9.34",
        "digits of the figures",
    )
    air = Medium(temperature=298.0, viscosity=1.8e-5, density=1.18, mean_free_path=65.1e-9)
    factors = [slip_correction(1e-6 * micrometres, air) for micrometres in SLIP]
    yield from case.each("correction", "{:g} um in air", SLIP, SLIP.values(), factors, relative=3e-4)

    case = Case(RATES, "shear", SMOLUCHOWSKI, "six or seven digits given")
    steady = shear(QUARTZ, Flow(shear_rate=50.0))
    rates = [steady(volume(1e-6), volume(1e-6 * other)) for other in RECTILINEAR]
    yield from case.each(
        "rate [m3/s]", "1 and {:g} um, 50 1/s", RECTILINEAR, RECTILINEAR.values(), rates, relative=1e-7
    )
    for (diameter, shear_rate), printed in SHEAR_OVER_BROWNIAN.items():
        v, at = volume(diameter), f"{1e6 * diameter:g} um, {shear_rate:g} 1/s"
        ratio = shear(QUARTZ, Flow(shear_rate=shear_rate))(v, v) / brownian(QUARTZ, ROOM)(v, v)
        yield case.check("shear / Brownian motion, 20 C", at, printed, ratio, relative=1e-6)
    for shear_rate, micrometres in CROSSOVER.items():
        v, at = volume(1e-6 * micrometres), f"{micrometres:g} um, {shear_rate:g} 1/s"
        ratio = shear(QUARTZ, Flow(shear_rate=shear_rate))(v, v) / brownian(QUARTZ, ROOM)(v, v)
        # three times the last of six digits
        yield case.check("ratio at the crossover diameter", at, 1.0, ratio, relative=1e-5)

    case = Case(
        RATES,
        "turbulence",
        "P. G. Saffman, J. S. Turner, J. Fluid Mech. 1 (1956) 16, doi:10.1017/S0022112056000020",
        "four digits of the printed constant, ten of sqrt(8 pi/15)",
    )
    rate = float(turbulent_shear(QUARTZ, Flow(shear_rate=50.0))(volume(1e-6), volume(5e-6)))
    constant = rate / ((3e-6) ** 3 * 50.0)
    yield case.check("constant", "as printed", TURBULENT_PRINTED, constant, absolute=5e-4)
    yield case.check("constant", "sqrt(8 pi/15)", TURBULENT, constant, relative=1e-9)

    case = Case(
        RATES,
        "differential settling",
        "W. Findeisen, Meteorol. Z. 56 (1939) 365, with Stokes' law (1851)",
        "seven digits given",
    )
    found_rate = settling(QUARTZ, ROOM)(volume(2e-6), volume(10e-6))
    yield case.check("rate [m3/s]", "2 and 10 um quartz, 20 C", SETTLING_RATE, found_rate, relative=1e-6)


# ---- settling

# diameter of quartz in water at 20 C [um]: Stokes' speed [m/s], that of Schiller and Naumann [m/s], Reynolds number
QUARTZ_SPEEDS = {
    1.0: (8.984821e-7, 8.984727e-7, 8.9543e-7),
    10.0: (8.984821e-5, 8.973987e-5, 8.9436e-4),
    50.0: (2.246205e-3, 2.175302e-3, 0.10840),
    100.0: (8.984821e-3, 7.965279e-3, 0.79383),
    200.0: (3.593928e-2, 2.479315e-2, 4.9418),
    500.0: (2.246205e-1, 7.848333e-2, 39.109),
    1000.0: (8.984821e-1, 1.552076e-1, 154.68),
    2000.0: (3.593928, 2.836992e-1, 565.48),
}
DRAG = {0.1: 247.401206, 1.0: 27.6, 10.0: 4.151066, 100.0: 1.091731, 800.0: 0.474258}  # over Reynolds number
MEASURED_DRAG = {
    0.1585: 169.8,
    0.4786: 58.88,
    3.02: 10.86,
    7.015: 5.623,
    15.49: 3.388,
    57.54: 1.479,
    144.5: 0.9204,
    264.9: 0.7194,
    512.9: 0.5623,
}
# diameter of flocs of 1 um quartz with D = 2 [um]: excess density [kg/m3], Stokes' speed [m/s]
FLOCS = {10.0: (165.179280, 8.984821e-6), 100.0: (16.517928, 8.984821e-5), 500.0: (3.303586, 4.492410e-4)}


def settling_speeds() -> Checks:
    """Stokes' law, drag beyond it, fractal flocs."""
    law = "G. G. Stokes (1851); L. Schiller, A. Naumann, Z. Ver. Dtsch. Ing. 77 (1933) 318"
    case = Case(MIXING, "quartz in water at 20 C", law, "digits given")
    for micrometres, (stokes, beyond, reynolds) in QUARTZ_SPEEDS.items():
        d, at = 1e-6 * micrometres, f"{micrometres:g} um"
        slow = settling_velocity(QUARTZ, ROOM, volume(d))
        speed = float(settling_velocity(QUARTZ, ROOM, volume(d), drag=SchillerNaumann()))
        yield case.check("speed, Stokes [m/s]", at, stokes, slow, relative=1e-6)
        yield case.check("speed, Schiller-Naumann [m/s]", at, beyond, speed, relative=1e-6)
        yield case.check("Reynolds number", at, reynolds, speed * d / ROOM.kinematic_viscosity, relative=5e-5)
    found = [SchillerNaumann().coefficient(reynolds) for reynolds in DRAG]
    yield from case.each("drag coefficient", "Re = {:g}", DRAG, DRAG.values(), found, relative=1.1e-6)
    case = Case(
        MIXING,
        "measured drag of smooth spheres",
        "points at www.ma.iup.edu/projects/CalcDEMma/drag/drag07.html",
        "read from a graph: 10 %",
    )
    found = [SchillerNaumann().coefficient(reynolds) for reynolds in MEASURED_DRAG]
    yield from case.each(
        "drag coefficient", "Re = {:g}", MEASURED_DRAG, MEASURED_DRAG.values(), found, relative=0.10
    )
    case = Case(
        MIXING, "flocs with fractal dimension 2 of 1 um quartz", "G. G. Stokes (1851)", "seven digits given"
    )
    flocs = Fractal(GRAIN, dimension=2.0)
    for micrometres, (excess, printed) in FLOCS.items():
        solid, at = GRAIN.volume * micrometres**2, f"{micrometres:g} um"
        found_excess = flocs.effective_density(solid, ROOM.density) - ROOM.density
        yield case.check("excess density [kg/m3]", at, excess, found_excess, relative=1e-6)
        yield case.check(
            "speed, Stokes [m/s]", at, printed, settling_velocity(flocs, ROOM, solid), relative=1e-6
        )


# ---- mixing

# flocculation basins of 14 plants: G [1/s], theta [min], P/V [lb(force) ft/(s ft3)], G theta
PLANTS = (
    (61.0, 30.0, 0.104, 111000.0),
    (20.0, 39.0, 0.011, 46800.0),
    (31.0, 20.0, 0.026, 37200.0),
    (33.0, 17.0, 0.030, 33600.0),
    (36.0, 35.0, 0.036, 75600.0),
    (31.0, 40.0, 0.026, 74400.0),
    (29.0, 45.0, 0.023, 78000.0),
    (39.0, 10.0, 0.041, 23400.0),
    (66.0, 20.0, 0.120, 79200.0),
    (40.0, 20.0, 0.045, 48000.0),
    (25.0, 60.0, 0.017, 90000.0),
    (60.0, 20.0, 0.098, 72000.0),
    (51.0, 30.0, 0.071, 92000.0),
    (35.0, 100.0, 0.034, 210000.0),
)
POWER = 1632.4  # mu V G^2 for 50 1/s in 500 m3 at 10 C [W]
GRADIENTS = ((COLD, 39.1345), (ROOM, 44.6856))  # of 1000 W in 500 m3 [1/s]
SCALES = (2.508497e-3, 141.66e-6, 2.5040)  # G = 50 1/s at 20 C: W/kg, m (Kolmogorov length), W/m3
_POUND_PER_SQUARE_FOOT_SECOND = constants.lbf / constants.foot**2  # W/m3


def mixing_power() -> Checks:
    """Power and velocity gradient, scales of turbulence, plants."""
    camp = "T. R. Camp, P. C. Stein, J. Boston Soc. Civil Eng. 30 (1943) 219"
    case = Case(MIXING, "power and velocity gradient", f"{camp}; A. N. Kolmogorov (1941)", "digits given")
    flow = Flow(shear_rate=50.0)
    basin = "50 1/s, 500 m3, 10 C"
    yield case.check("power [W]", basin, POWER, 500.0 * flow.power_per_volume(COLD), relative=1e-4)
    for medium, gradient in GRADIENTS:
        found = Flow.from_power(power=1000.0, volume=500.0, medium=medium).shear_rate
        at = f"1 kW, 500 m3, {medium.temperature - constants.zero_Celsius:g} C"
        yield case.check("velocity gradient [1/s]", at, gradient, found, relative=1e-5)
    dissipation, length, per_volume = SCALES
    at = "50 1/s, 20 C"
    yield case.check("dissipation [W/kg]", at, dissipation, flow.dissipation(ROOM), relative=1e-5)
    yield case.check("Kolmogorov length [m]", at, length, flow.kolmogorov_length(ROOM), relative=1e-4)
    yield case.check("power per volume [W/m3]", at, per_volume, flow.power_per_volume(ROOM), relative=1e-4)
    case = Case(
        MIXING,
        "flocculation basins of 14 plants, water at 10 C",
        "T. R. Camp (1955), Trans. ASCE, as printed by D. Hendricks, Fundamentals of Water Treatment Unit Processes, "
        "p. 295",
        "rounding of the printed figures; in the first row they miss each other by 0.17 % in G beside it",
    )
    for row, (gradient, minutes, per_foot, product) in enumerate(PLANTS, start=1):
        power = per_foot * _POUND_PER_SQUARE_FOOT_SECOND
        motor = MotorPower(power_drawn=power, efficiency=1.0)
        stage = MixingStage("basin", 1.0, motor)
        found = mixing_plan([stage], flow_rate=1.0 / (60.0 * minutes), media={"water": COLD}).shear_rate[0, 0]
        slack = 0.5 * 0.0005 / per_foot * found + 0.5 + (0.002 * found if row == 1 else 0.0)
        yield case.check("velocity gradient [1/s]", f"plant {row}", gradient, found, absolute=slack)
        rounding = 0.5 / gradient + 0.5 / minutes
        # power from the printed gradient, so that the product is that of the plan
        motor = MotorPower(power_drawn=COLD.viscosity * gradient**2, efficiency=1.0)
        plan = mixing_plan(
            [MixingStage("basin", 1.0, motor)], flow_rate=1.0 / (60.0 * minutes), media={"water": COLD}
        )
        yield case.check("G theta", f"plant {row}", product, plan.camp_number[0, 0], relative=rounding)
