"""What an ensemble of random samples says, with confidence bands."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.special import stdtrit

from aggsim import _checks
from aggsim._checks import FloatArray
from aggsim.sizes import means


@dataclass(frozen=True, eq=False)
class Estimate:
    """A quantity over time, from independent replicates.

    Attributes
    ----------
    values : (n_times, replicates)
        The quantity of each sample.
    confidence : float
        Probability that the band holds the expectation, at each time [1].
    """

    values: FloatArray
    confidence: float

    @property
    def mean(self) -> FloatArray:
        """Mean over the replicates (n_times,)."""
        return np.asarray(self.values.mean(axis=1))

    @property
    def standard_deviation(self) -> FloatArray:
        """Scatter from one sample to the next (n_times,)."""
        return np.asarray(self.values.std(axis=1, ddof=1))

    @property
    def standard_error(self) -> FloatArray:
        """Standard error of the mean (n_times,)."""
        return np.asarray(self.standard_deviation / np.sqrt(self.values.shape[1]))

    @property
    def lower(self) -> FloatArray:
        """Lower end of the band of the mean (n_times,): mean - t s / sqrt(replicates), Student's t."""
        return np.asarray(self.mean - self._half_width)

    @property
    def upper(self) -> FloatArray:
        """Upper end of the band of the mean (n_times,)."""
        return np.asarray(self.mean + self._half_width)

    @property
    def _half_width(self) -> FloatArray:
        student = float(stdtrit(self.values.shape[1] - 1, 0.5 * (1.0 + self.confidence)))
        return np.asarray(student * self.standard_error)


@dataclass(frozen=True, eq=False)
class EnsembleResult:
    """Random samples of one suspension over time.

    Attributes
    ----------
    times : (n_times,) s
        Output times.
    particles : tuple of tuple of (n,) m3
        `particles[k][r]` are the volumes, in ascending order, of the particles of replicate r at times[k].
    sample_volume : (n_times, replicates) m3
        Volume of suspension that these particles stand for.
    collisions, breakages : (replicates,)
        Events that were simulated.
    confidence : float
        Confidence of the bands [1].
    """

    times: FloatArray
    particles: tuple[tuple[FloatArray, ...], ...]
    sample_volume: FloatArray
    collisions: FloatArray
    breakages: FloatArray
    confidence: float

    def total_number(self) -> Estimate:
        """Number of particles [1/m3]."""
        return self.moment(0)

    def moment(self, k: float) -> Estimate:
        """Volume moment sum v**k / sample volume [m3**k / m3], k real; moment(1) is the volume fraction."""
        k = _checks.scalar("k", k)
        sums = self._each(lambda volume: float((volume**k).sum()))
        return Estimate(sums / self.sample_volume, self.confidence)

    def mean_diameter(self, p: float, q: float) -> Estimate:
        """Mean diameter D[p, q] [m] of each sample, for example 4, 3 (by volume) or 3, 2 (Sauter)."""

        def mean(volume: FloatArray) -> float:
            sizes, count = np.unique(volume, return_counts=True)
            return float(means.mean_diameter(sizes, count, p, q))

        return Estimate(self._each(mean), self.confidence)

    def quantile_diameter(self, p: float, r: float = 3) -> Estimate:
        """Diameter [m] below which the share `p` of the quantity lies, in each sample.

        Parameters
        ----------
        p : float
            Share between 0 and 1.
        r : float
            Type of quantity of ISO 9276-1: 0 number, 2 surface, 3 volume.

        Notes
        -----
        Particles of one size stand for the cell that reaches half way to the neighbouring sizes, evenly filled:
        k monomers for k - 1/2 to k + 1/2.
        """
        p = _checks.scalar("p", p, above=0.0, below=1.0, hint="p=0.5 for the median")
        r = _checks.scalar("r", r, least=0.0, hint="r=0 for number, 2 for surface, 3 for volume")

        def quantile(volume: FloatArray) -> float:
            sizes, count = np.unique(volume, return_counts=True)
            weight = count * (sizes / sizes[-1]) ** (r / 3.0)
            if sizes.size == 1:
                return float(means.diameter_of(sizes[0]))
            inner = 0.5 * (sizes[1:] + sizes[:-1])
            bottom = 2.0 * sizes[0] - inner[0]
            if bottom <= 0.0:
                bottom = sizes[0] ** 2 / inner[0]
            edges = np.concatenate([[bottom], inner, [2.0 * sizes[-1] - inner[-1]]])
            below = np.concatenate([[0.0], np.cumsum(weight)])
            return float(means.diameter_of(np.interp(p * below[-1], below, edges)))

        return Estimate(self._each(quantile), self.confidence)

    def _each(self, function: Callable[[FloatArray], float]) -> FloatArray:
        return np.array([[function(volume) for volume in row] for row in self.particles])

    def __repr__(self) -> str:
        total, d43 = self.total_number(), self.mean_diameter(4, 3)
        band = [f"{e.mean[-1]:.4g} ({e.lower[-1]:.4g} to {e.upper[-1]:.4g})" for e in (total, d43)]
        counts = [len(volume) for volume in self.particles[-1]]
        return "\n".join(
            [
                f"EnsembleResult: {len(counts)} replicates, bands of {self.confidence:.4g} confidence",
                f"  times     {self.times.size} from {self.times[0]:.4g} to {self.times[-1]:.4g} s",
                f"  number    {total.mean[0]:.4g} to {band[0]} 1/m3",
                f"  D[4,3]    {d43.mean[0]:.4g} to {band[1]} m",
                f"  samples   {min(counts)} to {max(counts)} particles at the end",
                f"  events    {self.collisions.sum():.0f} collisions, {self.breakages.sum():.0f} breakages",
            ]
        )
