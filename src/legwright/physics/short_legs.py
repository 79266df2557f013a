"""Short legs: flow across a layer between two contacts, ballistic to diffusive, for phonons and for electrons."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.units import H

Array = NDArray[np.float64]


def short_leg_suppression(mean_free_path: ArrayLike, length: ArrayLike) -> Array:
    """Conductivity G L across a layer over that of thick material: 1/(1 + 4Λ/3L), dimensionless.

    mean_free_path Λ ≥ 0 (m) of one energy or mode, length L > 0 (m, may be inf); both broadcast. ValueError
    outside. Diffusive: 1 − 4Λ/3L; ballistic: 3L/4Λ. The exact grey layer between black contacts (Heaslet &
    Warming, Int. J. Heat and Mass Transfer 8, 979 (1965)) lies below by at most 3.5 %, at L near Λ.
    Source: McKelvey, Longini & Brody, Physical Review 123, 51 (1961).

    >>> round(float(short_leg_suppression(300e-9, 400e-9)), 12)
    0.5
    """
    path, span = np.asarray(mean_free_path, dtype=float), np.asarray(length, dtype=float)
    if not (np.all(path >= 0) and np.all(np.isfinite(path)) and np.all(span > 0)):
        raise ValueError("the mean free path must be ≥ 0 and finite, the length > 0")
    return np.asarray(1 / (1 + 4 * path / (3 * span)))


def short_leg_conductance(
    carried: ArrayLike, speed: ArrayLike, mean_free_path: ArrayLike, length: ArrayLike
) -> Array:
    """Conductance per area of a layer between two contacts: G = ¼ C v/(1 + 3L/4Λ).

    carried C: heat capacity of a mode (J/(m³ K), G in W/(m² K)), or e² times the density of states (G in
    S/(m² J), to be integrated with −∂f/∂E); speed v (m/s) in three dimensions, so that the bulk conductivity is
    C v Λ/3; mean_free_path Λ > 0 and length L ≥ 0 (m); all broadcast. ValueError outside.
    G → ¼ C v as L → 0, and G L → C v Λ/3 as L grows; nothing is capped. Contacts that absorb all that comes;
    their own resistance comes on top. Source: McKelvey, Longini & Brody, Physical Review 123, 51 (1961).

    >>> float(short_leg_conductance(1e6, 4000.0, 300e-9, 400e-9))
    500000000.0
    """
    path, span = np.asarray(mean_free_path, dtype=float), np.asarray(length, dtype=float)
    if not (np.all(path > 0) and np.all(span >= 0)):
        raise ValueError("the mean free path must be > 0, the length ≥ 0")
    ballistic = np.asarray(carried, dtype=float) * np.asarray(speed, dtype=float) / 4
    return np.asarray(ballistic / (1 + 3 * span / (4 * path)))


def modes_per_area(states: ArrayLike, speed: ArrayLike) -> Array:
    """How many modes (of both spins) cross a unit area at an energy: M = (h/2) ¼ g v, 1/m².

    states g (1/(J m³), both spins), speed v (m/s); broadcast. Each conducts 2e²/h without scattering.
    A sphere of wave number k has k²/4π. Source: Landauer, IBM Journal 1, 223 (1957); the count is Sharvin's,
    Soviet Physics JETP 21, 655 (1965).

    >>> from scipy import constants as c
    >>> from legwright.physics.bands import density_of_states
    >>> m = modes_per_area(density_of_states(c.e, c.m_e, 0.0), (2 * c.e / c.m_e) ** 0.5)
    >>> k2 = 2 * c.m_e * c.e / c.hbar**2
    >>> round(float(m * 4 * c.pi / k2), 12)
    1.0
    """
    return np.asarray(H / 8 * np.asarray(states, dtype=float) * np.asarray(speed, dtype=float))
