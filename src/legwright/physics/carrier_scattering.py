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

    states_after_* g_v (1/(J m³)) at ε ± E_o of all final valleys that D counts (0 below the edge),
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
