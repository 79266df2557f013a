"""From the transport integrals to what is measured."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.units import E_CHARGE

Array = NDArray[np.float64]


def conductivity(l0: ArrayLike) -> Array:
    """σ = e² L_0, S/m.

    l0: L_0 = ∫ Ξ (−∂f/∂E) dE with Ξ = Σ g v_x² τ (1/(J m s)), any shape.
    Source: Ravich, Efimova & Smirnov, Semiconducting Lead Chalcogenides (Plenum, 1970).

    >>> round(float(conductivity(1 / E_CHARGE**2)), 12)
    1.0
    """
    return np.asarray(E_CHARGE**2 * np.asarray(l0, dtype=float))


def mobility(l0: ArrayLike, density: ArrayLike) -> Array:
    """Conductivity mobility σ/(e n) = e L_0/n, m²/(V s).

    l0 (1/(J m s)) and density n > 0 (1/m³) of the same carriers; broadcast. Source as `conductivity`.

    >>> round(float(mobility(1 / E_CHARGE, 1.0)), 12)
    1.0
    """
    return np.asarray(E_CHARGE * np.asarray(l0, dtype=float) / np.asarray(density))


def seebeck(l0: ArrayLike, l1: ArrayLike, temperature: ArrayLike) -> Array:
    """S = −L_1/(e T L_0), V/K: negative for electrons by itself.

    l0 (1/(J m s)) and l1 = ∫ Ξ (E − µ)(−∂f/∂E) dE (1/(m s)) over all bands, temperature (K); broadcast.
    Source: Ravich, Efimova & Smirnov, Semiconducting Lead Chalcogenides (Plenum, 1970).

    >>> float(seebeck(1.0, E_CHARGE * 300.0, 300.0))
    -1.0
    """
    return np.asarray(-np.asarray(l1, dtype=float) / (E_CHARGE * np.asarray(temperature) * np.asarray(l0)))


def electronic_heat(l0: ArrayLike, l1: ArrayLike, l2: ArrayLike, temperature: ArrayLike) -> Array:
    """κ_e = (L_2 − L_1²/L_0)/T at zero current, W/(m K); the bipolar part is inside.

    l0 (1/(J m s)), l1 (1/(m s)) and l2 (J/(m s)): L_k = ∫ Ξ (E − µ)^k (−∂f/∂E) dE over the bands that count,
    temperature (K); broadcast. 0 where nothing flows.
    Source: Ravich, Efimova & Smirnov, Semiconducting Lead Chalcogenides (Plenum, 1970).

    >>> from scipy import constants as c
    >>> spread = (np.pi * c.k * 300.0) ** 2 / 3  # L_2/L_0 of a metal
    >>> f"{float(electronic_heat(1.0, 0.0, spread, 300.0) / conductivity(1.0) / 300):.4e}"  # its Lorenz number
    '2.4430e-08'
    """
    zero, first = np.asarray(l0, dtype=float), np.asarray(l1, dtype=float)
    through = np.divide(first**2, zero, out=np.zeros(np.broadcast(first, zero).shape), where=zero > 0)
    return np.asarray((np.asarray(l2) - through) / np.asarray(temperature))


def bipolar_heat(
    l0_one: ArrayLike, l1_one: ArrayLike, l0_other: ArrayLike, l1_other: ArrayLike, temperature: ArrayLike
) -> Array:
    """Heat carried by pairs that form at the hot end and recombine at the cold one, W/(m K).

    κ_bp = κ_e(all) − κ_e(one side) − κ_e(other side) = L_0 L_0'/(L_0 + L_0') (L_1/L_0 − L_1'/L_0')²/T:
    never negative, zero with one kind of carrier. l0_one, l0_other (1/(J m s)) and l1_one, l1_other (1/(m s)) of
    the conduction and of the valence bands, temperature (K); broadcast.
    Source: Goldsmid, Introduction to Thermoelectricity (Springer, 2010).

    >>> float(bipolar_heat(1.0, 1.0, 1.0, -1.0, 2.0))
    1.0
    """
    one, other = np.asarray(l0_one, dtype=float), np.asarray(l0_other, dtype=float)
    both = (one > 0) & (other > 0)
    safe_one, safe_other = np.where(both, one, 1.0), np.where(both, other, 1.0)
    gap = np.asarray(l1_one) / safe_one - np.asarray(l1_other) / safe_other
    fewer, more = np.minimum(safe_one, safe_other), np.maximum(safe_one, safe_other)
    pairs = fewer / (1 + fewer / more)
    return np.asarray(np.where(both, pairs * gap**2 / np.asarray(temperature), 0.0))
