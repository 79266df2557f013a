"""Quantum limits of conductance."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.units import E_CHARGE, HBAR, K_B, H


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


def ballistic_wire_conductance(
    diameter: ArrayLike, temperature: ArrayLike, speeds: ArrayLike, zone_edge: float = np.inf
) -> NDArray[np.float64]:
    """Heat that a smooth round wire conducts between two reservoirs with no scattering, W/K.

    G = ∫ M(ω) ħω ∂n/∂T dω/2π with the number of open modes M taken as a sum over branches of
    n_b + (A/4π) g_b q²: the massless modes of a wire (1 dilatational; 1 torsional and 2 flexural) and those of its
    bulk, A = πd²/4, g = (1, 2).
    k_B T ≪ ħ v_t/d: 4 π² k_B² T/3h, four quanta. k_B T ≫ ħ v/d: A Σ ¼ C v, Casimir's radiation. The sum is a smooth
    interpolation with both limits right, not a count: the true number of modes rises in steps, and by a term of the
    perimeter, so that G is an estimate from k_B T near ħ v_t/d up to where ħ v/(d k_B T) is small.

    diameter d (m, > 0), temperature T (K, ≥ 0), speeds (v_l, v_t): longitudinal and transverse sound (m/s); d and T
    broadcast. With zone_edge q_D (1/m, isotropic) the branches are ω = (2 v q_D/π) sin(πq/2q_D), as in `lattice`;
    without, ω = v q. ValueError outside. For wires much shorter than their mean free paths, with smooth walls.
    Sources: Rego & Kirczenow, Physical Review Letters 81, 232 (1998); Casimir, Physica 5, 495 (1938).

    >>> cold = ballistic_wire_conductance(50e-9, 0.02, (8433.0, 5843.0))
    >>> f"{float(cold / thermal_conductance_quantum(0.02)):.2f}"
    '4.00'
    """
    d, t = np.broadcast_arrays(np.asarray(diameter, dtype=float), np.asarray(temperature, dtype=float))
    v = np.asarray(speeds, dtype=float)
    if not (np.all(d > 0) and np.all(t >= 0) and np.all(v > 0) and v.shape == (2,) and zone_edge > 0):
        raise ValueError("diameter, the two speeds and zone_edge must be > 0, temperature ≥ 0")
    kelvin = np.maximum(t, 1e-12)[..., None, None]  # G = 0 at 0 K, by the factor below
    nodes, weights = np.polynomial.legendre.leggauss(96)
    # all heat is in waves below 60 k_B T/ħ, which the sine branch reaches by π/2 of the straight one's q
    top = np.minimum(zone_edge, 30 * np.pi * K_B * kelvin / (HBAR * v[:, None]))
    q, step = 0.5 * top * (nodes + 1), 0.5 * top * weights
    phase = 0.5 * np.pi * q / zone_edge
    omega, velocity = v[:, None] * q * np.sinc(phase / np.pi), v[:, None] * np.cos(phase)
    half = 0.5 * HBAR * omega / (K_B * kelvin)
    heat = K_B * (half / np.sinh(half)) ** 2
    massless, alike = np.array([[1.0], [3.0]]), np.array([[1.0], [2.0]])
    open_modes = massless + alike * (d[..., None, None] * q) ** 2 / 16
    conducted = np.sum(heat * open_modes * velocity * step / (2 * np.pi), axis=(-2, -1))
    return np.asarray(np.where(t > 0, conducted, 0.0))


def conductance_quantum_per_spin() -> float:
    """e²/h, S: conductance of one open channel of one spin; takes nothing and raises nothing.

    Sources: Landauer, IBM Journal of Research and Development 1, 223 (1957); CODATA constants.

    >>> f"{conductance_quantum_per_spin():.4e}"
    '3.8740e-05'
    """
    return E_CHARGE**2 / H
