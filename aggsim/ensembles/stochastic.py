"""Event by event: random samples of a suspension as a check that shares nothing with sections and schemes.

The particles of a sample collide and break one event at a time, at exponentially distributed intervals [1].
A candidate event comes from upper bounds of the rates on classes of size and is accepted with the probability
true rate / bound [2]. The true rates may be slow functions of Python, so that candidates are drawn and rated in
blocks of about sqrt(particles). This is exact: candidates of particles that have not changed do not depend on
what happened to others, candidates of those that have are passed over, and these get a clock of their own,
which ends the block where it rings first.

References: [1] D. T. Gillespie, J. Atmos. Sci. 32 (1975) 1977. [2] A. L. Garcia, C. van den Broeck, M. Aertsens,
R. Serneels, Physica A 143 (1987) 535.
"""

from __future__ import annotations

import warnings
from collections.abc import Callable
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim.ensembles.bounds import Bounds
from aggsim.ensembles.draws import draw_volumes
from aggsim.ensembles.estimates import EnsembleResult
from aggsim.ensembles.mechanisms import breakage_mechanisms, collision_mechanisms, intervals, laws_of
from aggsim.ensembles.samples import LARGEST_SAMPLE, Run
from aggsim.errors import AccuracyWarning, InputError, TimesError
from aggsim.sizes import StartingDistribution

_MISSED = 0.05  # share of the volume that samples may miss, or have in excess, without a warning
_EXCEEDED = 1e-3  # share of the events above which rates beyond their bounds matter


def monte_carlo(
    vessel: Any,
    start: StartingDistribution,
    times: Any,
    *,
    particles: int = 10_000,
    replicates: int = 20,
    seed: int,
    confidence: float = 0.95,
    refill: bool = True,
    progress: Callable[[float, float], Any] | None = None,
) -> EnsembleResult:
    """Simulate random samples of a closed batch, collision by collision.

    Each sample begins as particles / (number concentration) of suspension, well mixed: in it every pair
    (i, j) collides with the probability K(v_i, v_j) dt / (sample volume) [1]_, and every particle breaks with
    the probability S(v) dt. The fluctuations are those of such samples.

    Parameters
    ----------
    vessel : Batch
        Aggregation, breakage or both; kernels and breakage may have strengths in time.
    start : StartingDistribution
        The distribution at t = 0. Each sample draws one particle from each of `particles` equal shares of its
        number, so that scatter comes from the events and hardly from the start.
    times : float or (n_times,)
        Output times [s], not negative and strictly increasing.
    particles : int
        Particles in each sample at the start, at least 10.
    replicates : int
        Independent samples, at least 2. Bands narrow as 1 / sqrt(particles * replicates).
    seed : int
        The same seed gives the same result.
    confidence : float
        Confidence of the bands [1].
    refill : bool
        True, to check other methods: the sample stands for an unlimited suspension. It is doubled (all
        particles twice, in twice the volume) whenever half of its particles are left, and of each two
        neighbours in size one is taken out whenever there are twice as many [2]_; rates are multiplied by
        n / (n - 1) for n particles, since each meets the density of all of them. What is left of the error
        of the mean is of order 1 / particles, below the band as long as replicates << particles.
        False, to see what a small closed volume (a droplet, a cell of a counter) does by itself: the sample
        volume stays what it is. Its mean differs from that of an unlimited suspension by order 1 / particles.
    progress : function, optional
        Called with (fraction, time) as the work goes on.

    Returns
    -------
    EnsembleResult
        The particles of each sample at each time, and moments and sizes with bands.

    Raises
    ------
    InputError
        Where an argument cannot be used; for a vessel with streams or losses, and for fragments that cannot
        be drawn (no method `sample(parent, generator)`).
    SimulationError
        Where breakage makes fragments without end.

    Notes
    -----
    Nothing is discretised in size or time. The volume in a sample is kept to round-off. Moments of high order
    under steep kernels hang on a few large particles and need larger samples than the number does. Past a
    gelation time the largest particle goes on collecting the others. Memory: 8 bytes times particles,
    replicates and times.

    References
    ----------
    .. [1] D. T. Gillespie, J. Atmos. Sci. 32 (1975) 1977.
    .. [2] K. Liffman, J. Comput. Phys. 100 (1992) 116; A. Maisels, F. E. Kruis, H. Fissan, Chem. Eng. Sci. 59
       (2004) 2231.
    """
    kernel, laws = laws_of(vessel)
    if not isinstance(start, StartingDistribution):
        raise InputError(
            f"start={start!r} is not a StartingDistribution. Try: start=Monodisperse(volume=..., number=...)."
        )
    raw = _checks.plain(times, "s")
    outputs = _checks.array(
        "times", [raw] if np.ndim(raw) == 0 else raw, "s", least=0.0, increasing=True, error=TimesError
    )
    particles = _checks.count("particles", particles, least=10, most=LARGEST_SAMPLE)
    replicates = _checks.count("replicates", replicates, least=2)
    confidence = _checks.scalar("confidence", confidence, above=0.0, below=1.0, hint="0.95")
    random = np.random.default_rng(_checks.count("seed", seed, least=0))

    volume = np.array([draw_volumes(start, particles, random) for _ in range(replicates)])
    share = float(volume.mean()) * start.total_number / start.total_volume
    if abs(share - 1.0) > _MISSED:
        warnings.warn(
            f"the samples hold {share:.3g} times the particle volume of the start: it is so wide that a few large "
            f"particles, which {particles} seldom include, make up much of it. Try: more particles.",
            AccuracyWarning,
            stacklevel=2,
        )
    bounds = Bounds(collision_mechanisms(kernel), breakage_mechanisms(laws), float(volume.min()))
    fragments = [law.fragments for law in laws]
    run = Run(volume, particles / start.total_number, bounds, fragments, refill, random)
    states, suspension = [], []
    time, last = 0.0, float(outputs[-1])
    for output in outputs.tolist():
        for interval in intervals(time, output, [*bounds.collisions, *bounds.breakages]):
            run.advance(interval, lambda now: progress(now / last, now) if progress else None)
        time = output
        states.append(run.particles())
        suspension.append(run.samples.suspension.copy())
    collisions, breakages = run.samples.collisions, run.samples.breakages
    if bounds.exceeded > _EXCEEDED * (collisions.sum() + breakages.sum()):
        warnings.warn(
            f"{bounds.exceeded} candidate events were faster than the bound of their size class: rates change "
            "too sharply within half a doubling of volume, and the fastest events came too seldom. "
            "Try: a smoother kernel, or simulate.",
            AccuracyWarning,
            stacklevel=2,
        )
    return EnsembleResult(outputs, tuple(states), np.array(suspension), collisions, breakages, confidence)
