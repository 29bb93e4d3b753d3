"""Published figures of breakage, of breakage with aggregation, and of a stirred tank, and runs that must give them.

Figures of closed solutions were worked out from the formulas at 30 digits; each is compared to the digits printed.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from aggsim._checks import FloatArray
from aggsim.breakage import Breakage, fragments, rates
from aggsim.kernels import additive, constant, from_function
from aggsim.result import SteadyState
from aggsim.schemes import FixedPivot, Monomer, Scheme, Sectional
from aggsim.sizes import Exponential, Monodisperse, SizeGrid, StartingDistribution
from aggsim.solvers import simulate, steady_state
from aggsim.verification import closed
from aggsim.verification.checks import Case, Check
from aggsim.verification.closed import B1, B2, B3, B4, Breaking, Reversible
from aggsim.verification.published.account import closure
from aggsim.vessels import Batch, StirredTank, Tank, Train

Checks = Iterator[Check]

SIXTH = FixedPivot(moments=6)
BREAKAGE, TANK = "Breakage and equilibrium", "Stirred tank and tanks in series"

# ---- breakage alone

# n(v) at these volumes (or, from one size, what is left of it in the last place), M0, M2
VOLUMES, BELOW_ONE = np.array([0.01, 0.1, 0.5, 1.0, 2.0]), np.array([0.01, 0.1, 0.5, 0.9])
TABLE = {
    (B1, 1.0): "3.92079469323 3.27492301231 1.47151776469 0.541341132946 0.0732625555549 2 1",
    (B1, 3.0): "15.3726310264 10.7251207366 2.16536453179 0.29305022222 0.00536740204644 4 0.5",
    (B1, 10.0): "108.395930371 40.2774011275 0.494499344054 0.00202090579562 3.37525639e-8 11 0.181818181818",
    (B2, 1.0): "2.98965151782 2.86666923295 1.88946621096 0.676676416183 0.0173512652367 "
    "2.09128272153 0.772820680383",
    (B2, 3.0): "6.98765521523 6.673525275 2.8650479686 0.238103305554 1.5799045663e-5 "
    "3.27932150039 0.483239097276",
    (B2, 10.0): "20.96807791 18.8308073208 1.5433991194 6.847697324e-4 3.5072e-17 "
    "5.73004771413 0.274677266421",
    (B3, 1.0): "2.96024900291 2.6240285123 1.51632664928 0.853796285455 0.367879441171 2 0.735758882343",
    (B3, 5.0): "33.0552225014 19.7122464407 1.84691246904 0.138862456728 0.00673794699909 6 0.32053903576",
    (B3, 10.0): "107.675652746 40.4667385289 0.471656289936 0.0037022941226 4.53999297625e-5 "
    "11 0.180000907999",
    (B4, 1.0): "1.99980001 1.9800996675 1.55760156614 0.889716132446 0.367879441171 "
    "1.8615277068 0.746824132812",
    (B4, 5.0): "9.99500124979 9.51229424501 2.8650479686 0.174223746395 0.00673794699909 "
    "3.9638610431 0.395712309611",
    (B4, 10.0): "19.9800099967 18.0967483607 1.64169997248 0.00607078276158 4.53999297625e-5 "
    "5.60499321006 0.280247390507",
}


def grid_through(volume: float, smallest: float, largest: float, per_doubling: float) -> tuple[SizeGrid, int]:
    """Geometric grid with a pivot at `volume`, and the place of that pivot."""
    below = int(np.ceil(np.log2(volume / smallest) * per_doubling))
    above = int(np.ceil(np.log2(largest / volume) * per_doubling - 1e-9))
    steps = np.arange(-below, above + 1.0)
    return SizeGrid.from_pivots(volume * 2.0 ** (steps / per_doubling)), below


def grid_for(problem: Breaking, volume: float) -> tuple[SizeGrid, int]:
    """Some 6 sections per doubling with a pivot at `volume`, up to the single size 1 or to 32 mean sizes."""
    if problem.start is closed.MONO:
        doublings = np.log2(1.0 / volume)
        return grid_through(volume, 2.0**-16, 1.0, float(np.round(6.0 * doublings) / doublings))
    return grid_through(volume, 1e-3 * min(volume, 0.1), 32.0, 6)


# where densities are compared: below one size they end with a jump, and near it a high order, which shares fragments on
# one side of it alone, has weights of an end correction in place of densities
POINTS = {closed.EXPONENTIAL: VOLUMES, closed.MONO: VOLUMES[:2]}


def falls(problem: Breaking, v: float, t: float) -> float:
    """Slope -d ln n / d ln v of the steepest factor of the density."""
    return v * (1 + t) if problem is B1 else v * (2 * t * v + 1)


def breakage_alone() -> Checks:
    """Densities where n falls no faster than v^-3, what is left of one size, M0 and M2."""
    basis = "six moments at 6 sections per doubling: h^6 = 2e-6, times 6 for densities; printed digits"
    for problem in closed.BREAKING:
        case = Case(BREAKAGE, f"breakage into two, uniform, {problem.name}", closed.ZIFF_MCGRADY, basis)
        vessel = Batch(None, breakage=closed.uniform(1.0, problem.exponent))
        printed = {t: [float(x) for x in TABLE[problem, t].split()] for t in problem.times}
        for place, v in enumerate(POINTS[problem.start]):
            grid, k = grid_for(problem, v)
            result = simulate(vessel, problem.start, problem.times, grid=grid, scheme=SIXTH, rtol=1e-8)
            for t, number in zip(problem.times, result.number, strict=True):
                if problem.start is closed.MONO or falls(problem, v, t) <= 3.0:
                    found = number[k] / grid.width[k]
                    at = f"v = {v:g}, t = {t:g}"
                    yield case.check("density n(v)", at, printed[t][place], found, relative=2e-5)
        largest = 32.0 if problem.start is closed.EXPONENTIAL else 1.0
        grid = SizeGrid.geometric(smallest=2.0**-36 * largest, largest=largest, per_doubling=6)
        result = simulate(vessel, problem.start, problem.times, grid=grid, scheme=SIXTH, rtol=1e-9)
        for k, place in ((0, -2), (2, -1)):
            for t, found in zip(problem.times, result.moment(k), strict=True):
                yield case.check(f"M{k}", f"t = {t:g}", printed[t][place], found, relative=2e-6)
        yield closure(f"breakage alone, {problem.name}", result)


# ---- breakage with aggregation

# constant kernel 1, uniform binary breakage s v, exponential start: M0 at these times, and at the end
TIMES = [1.0, 2.0, 5.0, 10.0, 20.0]
NUMBERS = {
    0.02: "0.680709062842 0.523170419067 0.329978892549 0.239668434766 0.204944545375",
    2.0: "1.82734186808 1.97572733792 1.99993946768 1.99999999725 2.00000000000",
}
LAST = {0.02: 0.2, 2.0: 2.0}
# shear kernel of spheres, halves at a rate that grows with the diameter, sections that double in volume: geometric
# standard deviations by number and by volume at the steady state
SPREADS = (2.22, 1.79)
SPICER = (
    "P. T. Spicer, S. E. Pratsinis, M. D. Trennepohl, G. H. M. Meesters, Ind. Eng. Chem. Res. 35 (1996) 3074"
)


def shear_with_breakage(coefficient: float = 1.0) -> Batch:
    """Shear kernel of coalescing spheres, equal halves at a rate that grows with the diameter."""
    kernel = from_function(lambda v, w: (np.cbrt(v) + np.cbrt(w)) ** 3 / 8.0)
    rate = rates.power_law(coefficient=coefficient, exponent=1.0 / 3.0)
    return Batch(kernel, breakage=Breakage(rate=rate, fragments=fragments.equal_binary()))


def equilibrium(scheme: Scheme, per_doubling: int, coefficient: float = 1.0) -> SteadyState:
    """Steady state of shear with breakage."""
    middle = coefficient**-3.0  # collisions per particle are as the volume fraction, so S(v) must be as well
    grid = SizeGrid.geometric(smallest=1e-8 * middle, largest=1e4 * middle, per_doubling=per_doubling)
    start = Exponential(mean_volume=middle, number=1.0 / middle)
    return steady_state(shear_with_breakage(coefficient), start=start, grid=grid, scheme=scheme)


def equilibria() -> Checks:
    """Aggregation against breakage."""
    for s, text in NUMBERS.items():
        problem = Reversible(s)
        basis = "rtol = 1e-9, sizes below the grid included: every scheme keeps the number"
        case = Case(BREAKAGE, f"constant kernel 1 and uniform breakage {s:g} v", closed.REVERSIBLE, basis)
        grid = SizeGrid.geometric(smallest=1e-10, largest=100.0 / problem.last, per_doubling=3)
        result = simulate(problem.vessel, closed.EXPONENTIAL, TIMES, grid=grid, scheme=SIXTH, rtol=1e-9)
        printed = [float(x) for x in text.split()]
        yield from case.each("M0", "t = {:g}", TIMES, printed, result.total_number(), relative=1e-9)
        state = steady_state(problem.vessel, start=closed.EXPONENTIAL, grid=grid, scheme=SIXTH)
        last = state.total_number()
        # below the grid: 1e-10, half a smallest pivot over the mean volume
        yield case.check("M0", "steady state", LAST[s], last, relative=2e-10)
        yield closure(f"constant kernel and breakage {s:g} v", result)
        yield closure(f"constant kernel and breakage {s:g} v", state)
    case = Case(
        BREAKAGE,
        "shear and breakage into halves, sections that double in volume as in the source",
        SPICER,
        "printed digits (0.01)",
    )
    for scheme in (Sectional(), FixedPivot(moments=2)):
        state = equilibrium(scheme, 1)
        for r, name, given in zip((0, 3), ("number", "volume"), SPREADS, strict=True):
            found = state.geometric_standard_deviation(r)
            yield case.check(f"geometric spread by {name}", f"{scheme!r}", given, found, absolute=0.01)
        yield closure(f"shear and breakage, {scheme!r}", state)


# ---- stirred tank

SIZES = np.array([1.0, 2.0, 3.0, 5.0, 10.0])
TANK_VOLUMES = np.array([0.1, 0.5, 1.0, 2.0, 5.0, 10.0])
# residence time in units of 1 / (beta N_feed): number, k-mers of SIZES, density at TANK_VOLUMES
NUMBER = {1.0: 0.732050807569, 10.0: 0.358257569496}
KMERS = {
    1.0: [0.57735026919, 0.0962250448649, 0.032075014955, 0.00623680846347, 2.78543529e-4],
    10.0: [0.218217890236, 0.0519566405324, 0.0247412573964, 0.00981795928427, 0.00260892559561],
}
DENSITY = {
    1.0: [0.531262081573, 0.381973411318, 0.254619869375, 0.115972934523, 0.0137283939584, 7.92696206e-4],
    10.0: [0.20226713616, 0.150191058773, 0.105020513359, 0.0541692253071, 0.0118827756379, 0.00287136450182],
}
TOP = {1.0: 300.0, 10.0: 2000.0}  # above what holds 1e-12 of M2

# orthokinetic decay at a constant volume fraction phi, efficiency 0.1, G = 50 1/s, phi = 5e-5, 1200 s: what is left
# after plug flow, and after four equal tanks. The kernel (4/pi) alpha G (v + w) has the rate (4/3) alpha G d^3 of
# equal spheres, and as volume is kept, it has this decay whatever the sizes.
PLUG_FLOW, FOUR_TANKS = 0.68251426, 0.69432312
PER_FRACTION = 4.0 / np.pi * 0.1 * 50.0  # 1/s, per volume fraction
SINGLES = Monodisperse(diameter=2e-6, volume_fraction=5e-5)
LEVENSPIEL = "O. Levenspiel, Chemical Reaction Engineering, 3rd ed. (1999)"


def tank(tau: float, feed: StartingDistribution) -> StirredTank:
    """Stirred tank with the constant kernel 1."""
    return StirredTank(constant(1.0), residence_time=tau, feed=feed)


def density_in_tank(tau: float, volume: float) -> float:
    """n(v) at the steady state for an exponential feed, at 6 sections per doubling through v."""
    largest = volume * 2.0 ** np.ceil(np.log2(TOP[tau] / volume))
    grid = SizeGrid.geometric(smallest=volume * 2.0**-20, largest=largest, per_doubling=6)
    number = steady_state(tank(tau, closed.EXPONENTIAL), grid=grid, scheme=SIXTH).number
    at = int(np.argmin(np.abs(grid.volume - volume)))
    return float(number[at] / grid.width[at])


def train() -> Train:
    """Four equal tanks, 1200 s in all."""
    tanks = [Tank(additive(PER_FRACTION), volume=3.0) for _ in range(4)]
    return Train(tanks, flow=4 * 3.0 / 1200.0, feed=SINGLES)


def stirred_tanks() -> Checks:
    """Steady states of one tank and of four, plug flow."""
    for tau in NUMBER:
        name = f"stirred tank, constant kernel, beta N residence time = {tau:g}"
        case = Case(
            TANK, f"{name}, monodisperse feed", closed.HOUNSLOW, "every size resolved: printed digits"
        )
        grid = SizeGrid.monomers(1.0, 64 if tau == 1.0 else 600)
        state = steady_state(tank(tau, closed.MONO), grid=grid, scheme=Monomer())
        found: FloatArray = state.number[SIZES.astype(int) - 1]
        yield case.check("number", "steady state", NUMBER[tau], state.total_number(), relative=1e-11)
        yield from case.each("number of k-mers", "k = {:g}", SIZES, KMERS[tau], found, relative=1e-8)
        yield closure(f"stirred tank {tau:g}, monodisperse feed", state)
        basis = "six moments at 6 sections per doubling: 3e-5 for densities"
        case = Case(TANK, f"{name}, exponential feed", closed.HOUNSLOW, basis)
        densities = [density_in_tank(tau, v) for v in TANK_VOLUMES]
        yield from case.each("density n(v)", "v = {:g}", TANK_VOLUMES, DENSITY[tau], densities, relative=3e-5)
    case = Case(
        TANK,
        "decay under shear at a constant volume fraction",
        f"{closed.SMOLUCHOWSKI}; {LEVENSPIEL}",
        "half of the last digit",
    )
    result = simulate(Batch(additive(PER_FRACTION)), SINGLES, [0.0, 1200.0], rtol=1e-9)
    left = result.total_number()[-1] / result.total_number()[0]
    yield case.check("number left", "plug flow", PLUG_FLOW, left, absolute=0.5e-8)
    whole = steady_state(train())
    left = whole.tank(3).total_number() / SINGLES.total_number
    yield case.check("number left", "four tanks in series", FOUR_TANKS, left, absolute=0.5e-8)
    yield closure("decay in plug flow", result)
    yield closure("four tanks in series", whole)
