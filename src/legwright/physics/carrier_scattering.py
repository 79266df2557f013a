"""What slows carriers: rates 1/τ in 1/s, per energy and band. Rates of one band add (Matthiessen)."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.units import E_CHARGE, HBAR, K_B

Array = NDArray[np.float64]


def acoustic_rate(
    valley_states: ArrayLike,
    kane_slope: ArrayLike,
    temperature: ArrayLike,
    deformation_potential: ArrayLike,
    elastic_constant: ArrayLike,
) -> Array:
    """Acoustic deformation-potential scattering, elastic and in equipartition, 1/s.

    1/τ = π k_B T Ξ_d² g_v/(ħ C_l) × [(1+2αε)² + 2]/[3 (1+2αε)²]; the bracket is the Kane matrix element.

    valley_states g_v (1/(J m³), one valley, both spins), kane_slope 1 + 2αε, temperature (K),
    deformation_potential Ξ_d (J), elastic_constant C_l (Pa); broadcast. Valid for phonons softer than k_B T.
    Sources: Bardeen & Shockley, Physical Review 80, 72 (1950); Ravich, Efimova & Smirnov (1970) for the bracket.

    >>> from scipy import constants as c
    >>> f"{float(acoustic_rate(1e46, 1.0, 300.0, 9 * c.e, 1.87e11)):.3e}"
    '1.372e+13'
    """
    slope = np.asarray(kane_slope, dtype=float) ** 2
    overlap = (slope + 2) / (3 * slope)
    potential = np.asarray(deformation_potential, dtype=float) ** 2
    return np.asarray(
        np.pi * K_B * np.asarray(temperature) * potential * np.asarray(valley_states) * overlap
        / (HBAR * np.asarray(elastic_constant))
    )  # fmt: skip


def intervalley_rate(
    states_after_absorption: ArrayLike,
    states_after_emission: ArrayLike,
    temperature: ArrayLike,
    field: ArrayLike,
    phonon_energy: ArrayLike,
    density: ArrayLike,
) -> Array:
    """Non-polar optical or intervalley scattering, 1/s.

    1/τ = (π D² ħ/(2 ρ E_o)) [n g_v(ε + E_o) + (n + 1) g_v(ε − E_o)],  n = 1/(e^(E_o/k_B T) − 1).

    states_after_absorption, states_after_emission: g_v (1/(J m³)) at ε + E_o and ε − E_o of all final valleys that
    D counts (0 below the edge),
    field D (J/m), phonon_energy E_o (J), density ρ (kg/m³), temperature (K); broadcast.
    Source: Conwell, High Field Transport in Semiconductors (Academic Press, 1967).

    >>> from scipy import constants as c
    >>> f"{float(intervalley_rate(1e46, 0.0, 300.0, 5e10 * c.e, 0.06 * c.e, 2330.0)):.3e}"
    '5.167e+11'
    """
    energy = np.asarray(phonon_energy, dtype=float)
    n = 1 / np.expm1(energy / (K_B * np.asarray(temperature, dtype=float)))
    prefactor = np.pi * HBAR * np.asarray(field, dtype=float) ** 2 / (2 * np.asarray(density) * energy)
    return np.asarray(
        prefactor * (n * np.asarray(states_after_absorption) + (n + 1) * np.asarray(states_after_emission))
    )


def alloy_rate(valley_states: ArrayLike, fraction: ArrayLike, volume: ArrayLike, potential: ArrayLike) -> Array:
    """Alloy scattering by the golden rule, 1/s: 1/τ = (π/ħ) x(1−x) Ω U² g_v.

    valley_states g_v (1/(J m³)), fraction x, volume Ω of the site that is random (m³), potential U (J);
    broadcast. A published U meant for the form whose rate is 3π²/8 larger is brought to this one at the door.
    Source: Harrison & Hauser, Physical Review B 13, 5347 (1976).

    >>> from scipy import constants as c
    >>> f"{float(alloy_rate(1e46, 0.2, 2.05e-29, 0.6 * c.e)):.3e}"
    '9.030e+12'
    """
    x = np.asarray(fraction, dtype=float)
    disorder = x * (1 - x) * np.asarray(volume) * np.asarray(potential, dtype=float) ** 2
    return np.asarray(np.pi / HBAR * disorder * np.asarray(valley_states))


def polar_rate(
    valley_states: ArrayLike,
    kane_slope: ArrayLike,
    wave_number_squared: ArrayLike,
    temperature: ArrayLike,
    permittivity: ArrayLike,
    high_frequency_permittivity: ArrayLike,
    screening_squared: ArrayLike = 0.0,
    phonon_energy: ArrayLike = 0.0,
) -> Array:
    """Polar-optical scattering as momentum relaxation, elastic, 1/s.

    1/τ = π e² k_B T (1/ε_∞ − 1/ε_s) g_v/(2 ħ k²) × {1 − δ ln(1 + 1/δ) − ½(1 − 1/s²)[1 − 2δ + 2δ² ln(1 + 1/δ)]},
    δ = q_∞²/4k², s = 1 + 2αε: the braces hold the screening and the Kane matrix element, and are 1 for a
    parabolic band without screening, where τ ∝ ε^(1/2) (Howarth & Sondheimer 1953).

    valley_states g_v (1/(J m³), one valley, both spins), kane_slope s, wave_number_squared k² (1/m²),
    temperature (K), permittivity ε_s and high_frequency_permittivity ε_∞ < ε_s (F/m), screening_squared q_∞²
    (1/m², with ε_∞; 0: none), phonon_energy E_o (J; 0: equipartition); all broadcast.
    Valid where k_B T is above the phonon energy. With E_o given, k_B T is multiplied by (y/sinh y)²,
    y = E_o/2k_B T: how the phonons freeze out for many carriers (Ziman 1960); few carriers below E_o/k_B have no
    relaxation time at all. The screening is exact for ε_s ≫ ε_∞; else the slow part of the lattice is
    screened too, and the rate at strong screening comes out too high.
    Sources: Ravich, Efimova & Smirnov, Semiconducting Lead Chalcogenides (Plenum, 1970); Howarth & Sondheimer,
    Proc. Royal Society A 219, 53 (1953); Ziman, Electrons and Phonons (Oxford, 1960).

    >>> from scipy import constants as c
    >>> e0 = c.epsilon_0
    >>> f"{float(polar_rate(1e46, 1.0, 1e18, 300.0, 414 * e0, 33 * e0)):.3e}"
    '4.988e+13'
    """
    wave2 = np.asarray(wave_number_squared, dtype=float)
    q2 = np.asarray(screening_squared, dtype=float)
    b = np.minimum(4 * wave2 / np.maximum(q2, 1e-30 * wave2), _UNSCREENED)
    # 1 − δ ln(1 + 1/δ) and 1 − 2δ + 2δ² ln(1 + 1/δ) at δ = 1/b: below 1e-2 the difference cancels as above
    y, z = np.minimum(b, 1e-2), np.maximum(b, 1e-2)
    logarithm = np.log1p(z)
    plain = np.where(b < 1e-2, _log_series(y, 2), 1 - logarithm / z)
    tilted = np.where(b < 1e-2, 2 * _log_series(y, 3), 1 - 2 / z + 2 * logarithm / z**2)
    braces = plain - 0.5 * (1 - 1 / np.asarray(kane_slope, dtype=float) ** 2) * tilted
    heat = K_B * np.asarray(temperature, dtype=float)
    half = np.asarray(phonon_energy, dtype=float) / (2 * heat)
    frozen = np.where(half > 0, half / np.sinh(np.clip(half, 1e-300, 300.0)), 1.0) ** 2
    coupling = 1 / np.asarray(high_frequency_permittivity) - 1 / np.asarray(permittivity)
    strength = np.pi * E_CHARGE**2 * heat * frozen * coupling
    return np.asarray(strength * np.asarray(valley_states) / (2 * HBAR * wave2) * braces)


#: from here on screening takes nothing off that a double could show
_UNSCREENED = 1e20


def _log_series(y: Array, first: int) -> Array:
    """y/first − y²/(first + 1) + …: exact to 1e-16 up to y = 1e-2."""
    total = np.zeros_like(y)
    for k in range(first + 7, first - 1, -1):
        total = y * (1 / k - total)
    return total


def screening_wave_number_squared(states_at_fermi_level: ArrayLike, permittivity: ArrayLike) -> Array:
    """q_s² = (e²/ε)(|∂n/∂µ| + |∂p/∂µ|), 1/m².

    states_at_fermi_level: the bracket (1/(J m³)); permittivity ε = ε_s ε_0 (F/m); broadcast.
    Source: Dingle, Philosophical Magazine 46, 831 (1955).

    >>> f"{float(screening_wave_number_squared(1e46, 1e-10)) ** -0.5:.2e}"
    '6.24e-10'
    """
    return np.asarray(E_CHARGE**2 * np.asarray(states_at_fermi_level, dtype=float) / np.asarray(permittivity))


def ionised_impurity_rate(
    valley_states: ArrayLike,
    wave_number_squared: ArrayLike,
    screening_squared: ArrayLike,
    charge_squared_density: ArrayLike,
    permittivity: ArrayLike,
) -> Array:
    """Screened ionised-impurity scattering (Brooks–Herring), 1/s.

    1/τ = π e⁴ ΣZ²N g_v/(8 ħ ε² k⁴) × [ln(1 + b) − b/(1 + b)],  b = 4k²/q_s².

    valley_states g_v (1/(J m³)), wave_number_squared k² (1/m²), screening_squared q_s² (1/m²),
    charge_squared_density ΣZ²N over all ionised centres (1/m³), permittivity ε (F/m); broadcast.
    Born approximation: overestimates mobility at thermoelectric doping, hence the heavy-doping factor.
    Source: Brooks, Advances in Electronics and Electron Physics 7, 85 (1955).

    >>> f"{float(ionised_impurity_rate(1e46, 1e18, 1e18, 1e26, 1e-10)):.3e}"
    '1.986e+14'
    """
    k2 = np.asarray(wave_number_squared, dtype=float)
    q2 = np.asarray(screening_squared, dtype=float)
    b = 4 * k2 / q2
    # [ln(1+b) − b/(1+b)]/b²: below 1e-2 the difference cancels, the series is exact to 1e-14
    y = np.minimum(b, 1e-2)
    series = 1 / 2 - y * (2 / 3 - y * (3 / 4 - y * (4 / 5 - y * (5 / 6 - y * (6 / 7 - y * 7 / 8)))))
    z = np.maximum(b, 1e-2)
    closed = (np.log1p(z) - z / (1 + z)) / z**2
    per_b2 = np.where(b < 1e-2, series, closed)
    strength = np.pi * E_CHARGE**4 * np.asarray(charge_squared_density) * np.asarray(valley_states)
    return np.asarray(2 * strength / (HBAR * np.asarray(permittivity) ** 2) * per_b2 / q2**2)
