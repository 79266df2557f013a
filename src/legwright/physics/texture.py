"""What a real body's pores and spread of grain sizes do to the figures of a dense, even one."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]


def porous_share(porosity: ArrayLike) -> Array:
    """Conductivity, of heat as of charge, of a body with closed round pores over that of the dense one, 0 … 1.

    (1 − φ)/(1 + φ/2), porosity φ in [0, 1), any shape: the share of volume that is pores. Lowers σ and κ alike, so
    zT stays. Good for separate pores, φ up to about 0.3. ValueError outside [0, 1).
    Sources: Maxwell, A Treatise on Electricity and Magnetism (1873); Eucken, Forschungsheft 353 (1932).

    >>> round(float(porous_share(0.1)), 4)
    0.8571
    """
    phi = np.asarray(porosity, dtype=float)
    if np.any(~((phi >= 0) & (phi < 1))):
        raise ValueError("porosity must lie within 0 … 1, 1 left out")
    return np.asarray((1 - phi) / (1 + phi / 2))


def effective_size_ratio(log_spread: ArrayLike) -> Array:
    """The one size that acts as log-normal grains do, ⟨d³⟩/⟨d²⟩, over their median: exp(5 s²/2), dimensionless.

    log_spread s ≥ 0, any shape: standard deviation of ln d. Volume over surface of the grains, hence of their
    boundaries. ValueError below 0. Source: Aitchison & Brown, The Lognormal Distribution (Cambridge, 1957), for the
    moments.

    >>> round(float(effective_size_ratio(0.5)), 4)
    1.8682
    """
    s = np.asarray(log_spread, dtype=float)
    if np.any(~(s >= 0)):
        raise ValueError("the spread of ln d must be ≥ 0")
    return np.asarray(np.exp(2.5 * s**2))
