"""The run that takes all replicates, side by side, through a stretch of time."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import numpy as np

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.ensembles import _loops
from aggsim.ensembles.bounds import Bounds
from aggsim.ensembles.mechanisms import Interval
from aggsim.errors import SimulationError

LARGEST_SAMPLE = 10_000_000  # particles
_SMALLEST_CLASS = -160  # 1e-24 of the volume of the smallest particle of the start
_VOLUME = 1e-12  # relative; fragments keep the volume of their parent to round-off


class Run:
    """Replicates that begin with the volumes (replicates, particles) [m3] in `suspension` [m3] each."""

    def __init__(
        self,
        volume: FloatArray,
        suspension: float,
        bounds: Bounds,
        fragments: Sequence[Any],
        refill: bool,
        random: np.random.Generator,
    ) -> None:
        replicates, particles = volume.shape
        self.bounds, self.fragments, self.refill, self.random = bounds, fragments, refill, random
        self._few = particles // 2 if refill else 0
        self._many = 2 * particles if refill else LARGEST_SAMPLE
        self.samples = _loops.Samples(
            volume.copy(),
            np.zeros(volume.shape, np.int64),
            np.full(replicates, particles),
            np.zeros(replicates),
            np.full(replicates, suspension),
            np.full((replicates, 2), _loops.NOTHING),
            np.zeros(replicates),
            *np.zeros((2, replicates), np.int64),
        )
        for replicate in range(replicates):
            bounds.cover(*_loops.classify(self.samples, bounds.smallest, replicate))

    def particles(self) -> tuple[FloatArray, ...]:
        """Volumes of the particles of each replicate in ascending order [m3]."""
        out = []
        for volume, used in zip(self.samples.volume, self.samples.used, strict=True):
            there = volume[:used]
            out.append(np.sort(there[there > 0.0]))
            out[-1].setflags(write=False)
        return tuple(out)

    def advance(self, interval: Interval, report: Callable[[float], None]) -> None:
        """Take all replicates to the end of an interval; `report` is called with the time of the slowest."""
        self.bounds.use(interval)
        while self.samples.time.min() < interval.stop:
            limits = self.bounds.limits
            block = _loops.propose(self.random, self.samples, limits, self.refill, interval.stop)
            rate, pieces = self._rate(interval, block)
            self._make_room(int((self.samples.used + np.diff(block.offset) * pieces.shape[1]).max()))
            living, low, high = _loops.perform(
                self.random, self.samples, limits, block, rate, pieces, self._few, self._many
            )
            self._check_growth(low, int(living.max()))
            if low <= high:
                self.bounds.cover(low, high)
            for replicate in np.flatnonzero((living <= self._few) | (living >= self._many)).tolist():
                self._resize(replicate, living[replicate] <= self._few)
            report(float(self.samples.time.min()))

    def _rate(self, interval: Interval, block: _loops.Block) -> tuple[FloatArray, FloatArray]:
        """True rates (m,) of all candidates, and the pieces (m, k) of those that are breakages."""
        replicate = np.repeat(np.arange(self.samples.used.size), np.diff(block.offset))
        volume = self.samples.volume[replicate, block.one]
        partner = self.samples.volume[replicate, np.maximum(block.two, 0)]
        rate = np.zeros(volume.size)
        pairs = np.flatnonzero(block.two >= 0)
        if pairs.size:
            factors = interval.factors(self.bounds.collisions, block.when[pairs])
            for factor, mechanism in zip(factors, self.bounds.collisions, strict=True):
                rate[pairs] += factor * mechanism.rate(volume[pairs], partner[pairs])
        broken = []
        for law, mechanism in enumerate(self.bounds.breakages):
            own = np.flatnonzero(block.two == -1 - law)
            if own.size:
                factor = interval.factors([mechanism], block.when[own])[0]
                rate[own] = factor * mechanism.rate(volume[own])
                own = own[rate[own] > 0.0]
                broken.append((own, _pieces(self.fragments[law], volume[own], self.random)))
        pieces = np.zeros((volume.size, max((p.shape[1] for _, p in broken), default=0)))
        for own, volumes in broken:
            pieces[own, : volumes.shape[1]] = volumes
        for k in np.flatnonzero(rate > block.ceiling):
            self.bounds.exceed(volume[k], partner[k], int(block.two[k]), rate[k])
        return rate, pieces

    def _make_room(self, most: int) -> None:
        """Lengthen the arrays where `most` particles do not fit."""
        if most > self.samples.volume.shape[1]:
            pad = ((0, 0), (0, most + most // 4 - self.samples.volume.shape[1]))
            volume, section = np.pad(self.samples.volume, pad), np.pad(self.samples.section, pad)
            self.samples = self.samples._replace(volume=volume, section=section)

    def _resize(self, replicate: int, double: bool) -> None:
        """Take all particles twice, or leave out one of each two neighbours in size."""
        samples = self.samples
        volume = np.sort(samples.volume[replicate, : samples.used[replicate]])
        volume = volume[volume > 0.0]
        if double:
            new = np.repeat(volume, 2)
            samples.suspension[replicate] *= 2.0
        else:
            # from the top, so that an odd one is the smallest; an odd one stays every other time
            pick = np.arange(0, volume.size, 2)
            pick += self.random.integers(0, 2, pick.size)
            new = volume[::-1][pick[pick < volume.size]]
            # in that volume of suspension which keeps the volume fraction; the change is a very small one
            samples.suspension[replicate] *= new.sum() / volume.sum()
        self._make_room(new.size)
        samples = self.samples
        samples.volume[replicate, : new.size] = new
        samples.used[replicate] = new.size
        _loops.classify(samples, self.bounds.smallest, replicate)

    def _check_growth(self, low: int, living: int) -> None:
        reached = f"at t = {self.samples.time.min():.4g} s"
        if low < _SMALLEST_CLASS:
            raise SimulationError(
                f"breakage makes fragments without end: {reached} one has less than 1e-24 of the volume of the "
                "smallest particle of the start. Try: a breakage rate that falls to zero for small particles."
            )
        if not self.refill and living >= self._many:
            raise SimulationError(
                f"breakage made {living:,} particles of one sample {reached}. "
                "Try: refill=True, or fewer particles at the start."
            )


def _pieces(fragments: Any, parent: FloatArray, random: np.random.Generator) -> FloatArray:
    """Fragments (m, k) [m3] of one breakage of each parent."""
    out = np.asarray(fragments.sample(parent, random), dtype=np.float64)
    fits = out.ndim == 2 and out.shape[0] == parent.size
    if not fits or not ((out >= 0.0).all() and (abs(out.sum(axis=1) - parent) <= _VOLUME * parent).all()):
        _checks.refuse(
            f"fragments.sample of {type(fragments).__name__}",
            f"an array of shape {out.shape} for {parent.size} parents",
            "(parents, pieces) volumes [m3] of at least 0 with rows that add up to the parents",
            "pieces that keep the volume, filled up with zeros",
        )
    return out
