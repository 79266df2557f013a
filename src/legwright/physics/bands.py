"""Kane bands: how many states, how fast, how far from the edge."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.units import HBAR

Array = NDArray[np.float64]


def kane_gamma(energy: ArrayLike, nonparabolicity: ArrayLike) -> Array:
    """γ(ε) = ε (1 + α ε), J: the energy a parabolic band would have at the same wave number.

    energy ε ≥ 0 from the band edge (J), nonparabolicity α (1/J); broadcast.
    Source: Kane, Journal of Physics and Chemistry of Solids 1, 249 (1957).

    >>> float(kane_gamma(2.0, 0.5))
    4.0
    """
    e = np.asarray(energy, dtype=float)
    return np.asarray(e * (1 + np.asarray(nonparabolicity) * e))


def kane_slope(energy: ArrayLike, nonparabolicity: ArrayLike) -> Array:
    """dγ/dε = 1 + 2 α ε, dimensionless (1 for parabolic bands); arguments and source as `kane_gamma`.

    >>> float(kane_slope(2.0, 0.5))
    3.0
    """
    return np.asarray(1 + 2 * np.asarray(nonparabolicity) * np.asarray(energy, dtype=float))


def density_of_states(energy: ArrayLike, dos_mass: ArrayLike, nonparabolicity: ArrayLike) -> Array:
    """States per energy and volume, both spins, 1/(J m³): g = √2 m_d^(3/2) γ^(1/2) (1 + 2αε)/(π² ħ³).

    energy (J) from the edge, dos_mass m_d (kg) of all valleys or of one, nonparabolicity (1/J); broadcast.
    Source: Ravich, Efimova & Smirnov, Semiconducting Lead Chalcogenides (Plenum, 1970).

    >>> from scipy import constants
    >>> f"{float(density_of_states(constants.e, constants.m_e, 0.0)) * constants.e:.4e}"  # free electrons
    '6.8122e+27'
    """
    mass = np.asarray(dos_mass, dtype=float)
    root = np.sqrt(kane_gamma(energy, nonparabolicity))
    return np.asarray(np.sqrt(2.0) * mass**1.5 / (np.pi**2 * HBAR**3) * root * kane_slope(energy, nonparabolicity))


def states_below(energy: ArrayLike, dos_mass: ArrayLike, nonparabolicity: ArrayLike) -> Array:
    """States per volume between the edge and ε, 1/m³: (2 m_d γ)^(3/2)/(3 π² ħ³), the integral of g.

    Arguments and source as `density_of_states`.

    >>> from scipy import constants
    >>> f"{float(states_below(constants.e, constants.m_e, 0.0)):.4e}"
    '4.5415e+27'
    """
    mass = np.asarray(dos_mass, dtype=float)
    return np.asarray((2 * mass * kane_gamma(energy, nonparabolicity)) ** 1.5 / (3 * np.pi**2 * HBAR**3))


def velocity_squared(energy: ArrayLike, inertial_mass: ArrayLike, nonparabolicity: ArrayLike) -> Array:
    """Mean square velocity along one axis, m²/s²: v_x² = 2γ/(3 m_I (1 + 2αε)²).

    energy (J), inertial_mass m_I (kg), nonparabolicity (1/J); broadcast. Source: Ravich et al. (1970).

    >>> float(velocity_squared(3.0, 2.0, 0.0))
    1.0
    """
    gamma = kane_gamma(energy, nonparabolicity)
    return np.asarray(2 * gamma / (3 * np.asarray(inertial_mass) * kane_slope(energy, nonparabolicity) ** 2))


def band_edge(temperature: ArrayLike, edge: ArrayLike, alpha: ArrayLike, beta: ArrayLike) -> Array:
    """Energy of a band edge, J: E(T) = E(0) − α T²/(T + β).

    temperature (K), edge E(0) (J), alpha (J/K), beta (K); broadcast.
    Source: Varshni, Physica 34, 149 (1967).

    >>> float(band_edge(300.0, 1.0, 1e-3, 0.0))
    0.7
    """
    t = np.asarray(temperature, dtype=float)
    return np.asarray(np.asarray(edge) - np.asarray(alpha) * t**2 / (t + np.asarray(beta)))


def wave_number_squared(energy: ArrayLike, valley_mass: ArrayLike, nonparabolicity: ArrayLike) -> Array:
    """k² = 2 m_b γ/ħ² of one valley with its density-of-states mass m_b, 1/m².

    energy ε ≥ 0 (J), valley_mass (kg), nonparabolicity α (1/J); broadcast. Source as `kane_gamma`.

    >>> from scipy import constants
    >>> f"{float(wave_number_squared(constants.e, constants.m_e, 0.0)) ** 0.5:.3e}"
    '5.123e+09'
    """
    return np.asarray(2 * np.asarray(valley_mass) * kane_gamma(energy, nonparabolicity) / HBAR**2)
