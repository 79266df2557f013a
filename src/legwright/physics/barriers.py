"""Electrostatic barriers at grain boundaries: charge trapped in the boundary bends the majority bands up by E_b."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.units import E_CHARGE, HBAR, K_B
from legwright.physics.fermi import fermi_dirac_integral

Array = NDArray[np.float64]

#: a barrier higher than so many k_B T counts as so many: the integrals behind it are squared and must not underflow
_HIGHEST = 300.0


def barrier_conductance(
    barrier: ArrayLike,
    temperature: ArrayLike,
    eta: ArrayLike,
    dos_mass: ArrayLike,
    inertial_mass: ArrayLike,
    nonparabolicity: ArrayLike = 0.0,
) -> Array:
    """Conductance per area over a barrier, S/m², of one band: thermionic emission with Fermi statistics.

    G = e² ∫ ¼ g v|_(ε − E_b) (−∂f/∂ε) dε = e² m_d^(3/2) m_I^(−1/2) k_B T/(2π² ħ³) [F₀(η_b) + 2α k_B T F₁(η_b)],
    η_b = η − E_b/k_B T: a carrier crosses when its motion towards the boundary lifts it over; none tunnels.

    barrier E_b ≥ 0 (J; 0 gives the ballistic contact), temperature (K), eta: Fermi level over the band edge inside
    the grain (k_B T), dos_mass m_d of all valleys and inertial_mass m_I (kg), nonparabolicity α (1/J); all
    broadcast. ValueError for E_b < 0. A barrier above 300 k_B T is taken as 300 k_B T, so that figures stay finite.
    Source: Seto, Journal of Applied Physics 46, 5247 (1975), there for few carriers: e² n v/4 e^(−E_b/k_BT)/k_BT.

    >>> from scipy import constants as c
    >>> g = barrier_conductance([0.0, 0.1 * c.e], 300.0, -5.0, c.m_e, c.m_e)
    >>> round(float(np.log(g[0] / g[1]) * c.k * 300 / c.e), 3)
    0.1
    """
    height = np.asarray(barrier, dtype=float)
    if not np.all(height >= 0):
        raise ValueError("a barrier must be ≥ 0")
    kt = K_B * np.asarray(temperature, dtype=float)
    over = np.asarray(eta, dtype=float) - np.minimum(height / kt, _HIGHEST)
    modes = np.asarray(dos_mass, dtype=float) ** 1.5 / np.sqrt(inertial_mass) * kt / (2 * np.pi**2 * HBAR**3)
    curved = 2 * np.asarray(nonparabolicity, dtype=float) * kt
    shape = fermi_dirac_integral(0, over) + curved * fermi_dirac_integral(1, over)
    return np.asarray(E_CHARGE**2 * modes * shape)


def barrier_suppression(
    conductivity: ArrayLike, size: ArrayLike, over_barrier: ArrayLike, without: ArrayLike
) -> Array:
    """Conductivity of grains with a barrier at each boundary over that of the grains without it.

    In series per length: d/σ' = d/σ + 1/G(E_b) − 1/G(0). What a boundary without a barrier costs is in σ already
    (reflection, and the ballistic resistance of the grain), so it is taken off: E_b → 0 gives exactly 1.

    conductivity σ of the grains (S/m) and size d (m, > 0, may be inf), over_barrier G(E_b) ≤ without G(0)
    (S/m²); all broadcast. All energies give way alike: the lattice carries heat across the thin boundary, so it
    has no temperature step of its own, and Seebeck coefficient and Lorenz number stay those of the grain. Energy
    filtering, which would raise the first, is left out. For grains wider than the bent region.
    Source: Seto, Journal of Applied Physics 46, 5247 (1975).

    >>> float(barrier_suppression(1e5, 1e-7, 1e12, 1e13).round(12))
    0.526315789474
    """
    high = np.asarray(over_barrier, dtype=float)
    added = np.asarray(conductivity, dtype=float) / np.asarray(size, dtype=float) * (1 - high / np.asarray(without))
    return np.asarray(high / (high + added))
