"""How much easier a small particle moves through a gas than Stokes' law says."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from aggsim._checks import FloatArray
from aggsim.inputs import Medium


def slip_correction(diameter: ArrayLike, medium: Medium) -> FloatArray:
    """Cunningham factor [1] by which slip divides the drag on a sphere; 1 in a liquid.

    C = 1 + Kn (1.257 + 0.4 exp(-1.1/Kn)) with Kn = 2 lambda/d [1]_.

    Parameters
    ----------
    diameter : array_like
        [m], any shape, above 0.
    medium : Medium
        Its `mean_free_path` is lambda; None stands for a liquid.

    References
    ----------
    .. [1] J. H. Seinfeld, S. N. Pandis (2016), Atmospheric Chemistry and Physics, 3rd ed., eq. 9.34, after
       M. D. Allen, O. G. Raabe (1982), J. Aerosol Sci. 13, 537, DOI 10.1016/0021-8502(82)90019-2.
    """
    d = np.asarray(diameter, dtype=np.float64)
    if medium.mean_free_path is None:
        return np.ones_like(d)[()]
    knudsen = 2.0 * medium.mean_free_path / d
    return (1.0 + knudsen * (1.257 + 0.4 * np.exp(-1.1 / knudsen)))[()]
