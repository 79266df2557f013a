"""The Hall effect in a weak magnetic field: from integrals over each band to what a Hall bar shows."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.units import E_CHARGE

Array = NDArray[np.float64]


def hall_anisotropy(mass_ratio: ArrayLike) -> Array:
    """What long valleys take off the Hall effect of a cubic crystal: 3K(K + 2)/(2K + 1)², dimensionless.

    mass_ratio K = m_l/m_t of ellipsoidal valleys (> 0; with a relaxation time that differs along and across,
    K = (m_l/m_t)(τ_t/τ_l)), any shape; 1 for a sphere, ¾ for a needle, 0 for a disc. ValueError for K ≤ 0 or not
    finite.
    Source: Herring, Bell System Technical Journal 34, 237 (1955).

    >>> round(float(hall_anisotropy(4.7)), 3)
    0.873
    """
    k = np.asarray(mass_ratio, dtype=float)
    if not np.all((k > 0) & np.isfinite(k)):
        raise ValueError("the ratio of masses must be above 0 and finite")
    return np.asarray(3 * k * (k + 2) / (2 * k + 1) ** 2)


def hall_coefficient(l0_up: ArrayLike, hall_up: ArrayLike, l0_down: ArrayLike, hall_down: ArrayLike) -> Array:
    """R_H = (K_v − K_c)/(e (L_0c + L_0v)²), m³/C: negative for electrons, zero where both kinds deflect alike.

    l0_up, l0_down: L_0 = ∫ g v_x² τ (−∂f/∂E) dE of the conduction and of the valence bands (1/(J m s));
    hall_up, hall_down: K = ∫ g v_x² τ²/(m_I (1 + 2αε)) (−∂f/∂E) dE, with each band's anisotropy (1/(J kg m));
    broadcast. For fields with µB ≪ 1. Nothing is divided but by the conductivity, so a crossing of signs is
    an ordinary zero. Source: Putley, The Hall Effect and Related Phenomena (Butterworths, 1960).

    >>> bool(np.isclose(hall_coefficient(2.0, 4.0, 0.0, 0.0) * E_CHARGE, -1.0))  # n = L_0²/K, all at one τ
    True
    """
    turning = np.asarray(hall_down, dtype=float) - np.asarray(hall_up, dtype=float)
    flowing = np.asarray(l0_up, dtype=float) + np.asarray(l0_down, dtype=float)
    return np.asarray(turning / flowing / flowing / E_CHARGE)


def hall_factor(l0: ArrayLike, hall: ArrayLike, density: ArrayLike) -> Array:
    """r_H = n K/L_0² = e n |R_H| of one kind of carrier: Hall mobility over drift mobility, dimensionless.

    l0, hall as in `hall_coefficient`, density n of the same carriers (1/m³); broadcast. Few carriers scattered
    by phonons: 3π/8; by ionised impurities: 315π/512; many carriers: 1.
    Source: Ravich, Efimova & Smirnov, Semiconducting Lead Chalcogenides (Plenum, 1970).

    >>> float(hall_factor(2.0, 4.0, 1.0))
    1.0
    """
    flowing = np.asarray(l0, dtype=float)
    return np.asarray(np.asarray(density) / flowing * (np.asarray(hall) / flowing))
