"""The accounts of a run: where the particle volume went, and which mechanism did what."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field

import numpy as np

from aggsim._checks import FloatArray


@dataclass(frozen=True, eq=False)
class Balance:
    """Account of particle volume per volume of suspension, at each output time.

    Attributes
    ----------
    initial : float
        Volume fraction at the start [-].
    present : (n_times,)
        Volume fraction in the sections [-].
    beyond_grid : (n_times,)
        Volume fraction that grew past the top of the grid [-].
    beyond_grid_number : (n_times,) 1/m3
        Number of particles that grew past the top.
    negative_share : (n_times,)
        Share of the volume in sections with a negative number, which high-order births can leave; the smaller
        the better resolved [-].
    inward, outward : dict of (n_times,)
        What each stream brought or took since the start, by name, as a volume fraction of the vessel [-].
    """

    initial: float
    present: FloatArray
    beyond_grid: FloatArray
    beyond_grid_number: FloatArray
    negative_share: FloatArray
    inward: Mapping[str, FloatArray] = field(default_factory=dict)
    outward: Mapping[str, FloatArray] = field(default_factory=dict)

    @property
    def fed(self) -> FloatArray:
        """What streams brought since the start, doses included, (n_times,) [-]."""
        return sum(self.inward.values(), start=np.zeros_like(self.present))

    @property
    def withdrawn(self) -> FloatArray:
        """What left with the outflow and by withdrawals since the start, (n_times,) [-]."""
        gone = [volume for name, volume in self.outward.items() if name != "settled"]
        return sum(gone, start=np.zeros_like(self.present))

    @property
    def settled(self) -> FloatArray:
        """What settled out since the start, (n_times,) [-]."""
        return self.outward.get("settled", np.zeros_like(self.present))

    @property
    def scale(self) -> float:
        """Everything that was there or came in until the last output [-], what shares are of; 1 if that is nothing."""
        return (self.initial + float(self.fed[-1])) or 1.0

    @property
    def closure(self) -> FloatArray:
        """Relative closure error (n_times,): present, beyond the grid and gone, less initial and fed, over `scale`."""
        gone = self.present + self.beyond_grid + self.withdrawn + self.settled
        return (gone - self.initial - self.fed) / self.scale

    def __str__(self) -> str:
        streams = "".join(
            f"{name} {volume[-1]:.6g}, " for name, volume in (*self.inward.items(), *self.outward.items())
        )
        return (
            f"particle volume fraction: initial {self.initial:.6g}, {streams}present {self.present[-1]:.6g}, "
            f"beyond the grid {self.beyond_grid[-1]:.3g}; largest closure error {np.abs(self.closure).max():.1e}, "
            f"largest share in negative sections {self.negative_share.max() + 0.0:.1e}"
        )


@dataclass(frozen=True, eq=False)
class Contribution:
    """What one named part of the kernel did, at each output time.

    Attributes
    ----------
    events : (n_times,) 1/(m3 s)
        Collision events per volume of suspension and time, 1/2 sum_ij K_ij n_i n_j.
    volume_flux : (n_times,) 1/s
        Volume of the colliding particles per volume of suspension and time, 1/2 sum_ij K_ij n_i n_j (x_i + x_j).
    event_share, volume_share : (n_times,)
        This part's share of the events and of the volume flux of all parts [-]; 0 where nothing collides.
    """

    events: FloatArray
    volume_flux: FloatArray
    event_share: FloatArray
    volume_share: FloatArray


class Contributions(Mapping[str, Contribution]):
    """Contributions of the named parts of the kernel, in their order, read by name."""

    def __init__(self, parts: Mapping[str, tuple[FloatArray, FloatArray]]) -> None:
        """Take (events, volume flux) of each part, both (n_times,)."""
        events = sum((e for e, _ in parts.values()), start=np.zeros(1))
        flux = sum((f for _, f in parts.values()), start=np.zeros(1))
        self._parts = {
            name: Contribution(e, f, _share(e, events), _share(f, flux)) for name, (e, f) in parts.items()
        }

    def __getitem__(self, name: str) -> Contribution:
        try:
            return self._parts[name]
        except KeyError:
            raise KeyError(f"{name!r} is no part of the kernel; the parts are {list(self._parts)}") from None

    def __iter__(self) -> Iterator[str]:
        return iter(self._parts)

    def __len__(self) -> int:
        return len(self._parts)

    def __repr__(self) -> str:
        rows = (
            f"{name}: {c.volume_share[0]:.1%} of the volume flux at first, {c.volume_share[-1]:.1%} at last"
            for name, c in self._parts.items()
        )
        return "Contributions(" + "; ".join(rows) + ")"


def _share(part: FloatArray, total: FloatArray) -> FloatArray:
    return np.divide(part, total, out=np.zeros_like(part), where=total > 0.0)
