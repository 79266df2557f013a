"""Quantum limits of conductance."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.units import E_CHARGE, K_B, H


def thermal_conductance_quantum(temperature: ArrayLike) -> NDArray[np.float64]:
    """Most heat that one phonon mode can conduct, W/K: π² k_B² T/(3h).

    temperature (K, ≥ 0), any shape. ValueError below zero.
    Source: Rego & Kirczenow, Physical Review Letters 81, 232 (1998).

    >>> f"{float(thermal_conductance_quantum(1.0)):.4e}"
    '9.4643e-13'
    """
    t = np.asarray(temperature, dtype=float)
    if np.any(~(t >= 0)):
        raise ValueError("temperature must be ≥ 0 K")
    return np.asarray(np.pi**2 * K_B**2 * t / (3 * H))


def conductance_quantum_per_spin() -> float:
    """e²/h, S: conductance of one open channel of one spin (Landauer, IBM Journal 1, 223 (1957)).

    >>> f"{conductance_quantum_per_spin():.4e}"
    '3.8740e-05'
    """
    return E_CHARGE**2 / H
