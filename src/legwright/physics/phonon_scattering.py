"""What slows phonons inside a grain: rates 1/τ in 1/s, per mode. Rates add (Matthiessen)."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from legwright.base.units import HBAR, K_B

Array = NDArray[np.float64]


def anharmonic_strength(
    grueneisen: ArrayLike, mean_mass: ArrayLike, speed: ArrayLike, debye_temperature: ArrayLike
) -> Array:
    """A = ħ γ²/(M̄ v² θ), s/K: the strength of three-phonon scattering of a branch.

    grueneisen γ, mean_mass M̄ per atom (kg), speed v (m/s), debye_temperature θ of the branch (K); broadcast.
    Sources: Slack & Galginaitis, Physical Review 133, A253 (1964);
    Morelli, Heremans & Slack, Physical Review B 66, 195304 (2002).

    >>> f"{float(anharmonic_strength(1.0, 4.66e-26, 8000.0, 500.0)):.3e}"
    '7.072e-20'
    """
    return np.asarray(
        HBAR * np.asarray(grueneisen) ** 2
        / (np.asarray(mean_mass) * np.asarray(speed, dtype=float) ** 2 * np.asarray(debye_temperature))
    )  # fmt: skip


def umklapp_rate(
    omega: ArrayLike,
    temperature: ArrayLike,
    strength: ArrayLike,
    debye_temperature: ArrayLike,
    divisor: ArrayLike,
) -> Array:
    """Umklapp scattering, 1/s: 1/τ = A ω² T exp(−θ/(b T)).

    omega (rad/s), temperature (K), strength A (s/K), debye_temperature θ (K), divisor b; broadcast.
    Sources: Slack & Galginaitis (1964); Morelli, Heremans & Slack (2002), with b = 3.

    >>> f"{float(umklapp_rate(1e13, 300.0, 7e-20, 500.0, 3.0)):.3e}"
    '1.205e+09'
    """
    t = np.asarray(temperature, dtype=float)
    freezing = np.exp(-np.asarray(debye_temperature) / (np.asarray(divisor) * t))
    return np.asarray(np.asarray(strength) * np.asarray(omega, dtype=float) ** 2 * t * freezing)


def normal_rate(omega: ArrayLike, temperature: ArrayLike, strength: ArrayLike, ratio: ArrayLike) -> Array:
    """Normal processes, 1/s: 1/τ = β A ω² T: they share out heat and resist only through the others.

    omega (rad/s), temperature (K), strength A (s/K), ratio β to Umklapp at high temperature; broadcast.
    Source: Steigmeier & Abeles, Physical Review 136, A1149 (1964).

    >>> f"{float(normal_rate(1e13, 300.0, 7e-20, 2.0)):.1e}"
    '4.2e+09'
    """
    return np.asarray(
        np.asarray(ratio) * np.asarray(strength) * np.asarray(omega, dtype=float) ** 2 * np.asarray(temperature)
    )


def point_defect_rate(
    omega: ArrayLike, branch_states: ArrayLike, volume_per_atom: ArrayLike, disorder: ArrayLike
) -> Array:
    """Mass and strain disorder, 1/s: 1/τ = (π/6) V Γ ω² D(ω), D = 3 × the states of the branch itself.

    Becomes V Γ ω⁴/(4π v³) (Klemens 1955) where the branch is straight.
    omega (rad/s), branch_states q²/(2π² v_g) (s/m³), volume_per_atom V (m³), disorder Γ per atom; broadcast.
    Source: Tamura, Physical Review B 27, 858 (1983).

    >>> import math
    >>> v, w = 6000.0, 1e13
    >>> straight = float(point_defect_rate(w, w**2 / (2 * math.pi**2 * v**3), 2e-29, 1e-3))
    >>> round(straight / (2e-29 * 1e-3 * w**4 / (4 * math.pi * v**3)), 12)
    1.0
    """
    states = 3 * np.asarray(branch_states, dtype=float)
    volume = np.asarray(volume_per_atom) * np.asarray(disorder)
    return np.asarray(np.pi / 6 * volume * np.asarray(omega, dtype=float) ** 2 * states)


def vacancy_disorder(share: ArrayLike, missing_mass: ArrayLike, mean_mass: ArrayLike) -> Array:
    """Γ of missing atoms for `point_defect_rate`: Γ = x (M_a/M̄ + 2)².

    A vacancy lacks the mass M_a, and its broken bonds act as twice the mean mass: ΔM/M̄ = −M_a/M̄ − 2. Against mass
    alone, x (M_a/M̄)², it scatters nine times as much in an element. Few and apart: x up to some per cent.

    share x of all atomic sites, missing_mass M_a and mean_mass M̄ (same unit); broadcast.
    Sources: Klemens, Proc. Physical Society A 68, 1113 (1955);
    Ratsifaritana & Klemens, International Journal of Thermophysics 8, 737 (1987).

    >>> float(vacancy_disorder(0.01, 28.0, 28.0))
    0.09
    """
    return np.asarray(np.asarray(share) * (np.asarray(missing_mass) / np.asarray(mean_mass, dtype=float) + 2) ** 2)


def dislocation_core_rate(
    omega: ArrayLike, speed: ArrayLike, density: ArrayLike, volume_per_atom: ArrayLike
) -> Array:
    """Cores of dislocations, 1/s: 1/τ = N_D V^(4/3) ω³/v²: a line of missing atoms.

    omega (rad/s), speed of sound v (m/s), density N_D: lines per area (1/m²), volume_per_atom V (m³); broadcast.
    For waves that meet the lines at random angles; of an order of magnitude, as every figure of its kind.
    Sources: Klemens, Proc. Physical Society A 68, 1113 (1955); Solid State Physics 7, 1 (1958).

    >>> f"{float(dislocation_core_rate(1e13, 6000.0, 1e16, 2e-29)):.3e}"
    '1.508e+09'
    """
    lines = np.asarray(density) * np.asarray(volume_per_atom, dtype=float) ** (4 / 3)
    return np.asarray(lines * np.asarray(omega, dtype=float) ** 3 / np.asarray(speed, dtype=float) ** 2)


def dislocation_strain_rate(
    omega: ArrayLike, density: ArrayLike, burgers_vector: ArrayLike, grueneisen: ArrayLike
) -> Array:
    """Strain fields of dislocations, 1/s: 1/τ = 0.06 N_D γ² b² ω, of screws at random angles.

    omega (rad/s), density N_D: lines per area (1/m²), burgers_vector b (m), grueneisen γ; broadcast. Measured rates
    have come out up to ten times larger (Carruthers, Reviews of Modern Physics 33, 92 (1961)). No long-wave limit
    is set by the distance between lines. Sources: Klemens, Proc. Physical Society A 68, 1113 (1955); Solid State
    Physics 7, 1 (1958).

    >>> f"{float(dislocation_strain_rate(1e13, 1e16, 4e-10, 1.5)):.3e}"
    '2.160e+09'
    """
    field = np.asarray(grueneisen) ** 2 * np.asarray(burgers_vector, dtype=float) ** 2
    return np.asarray(0.06 * np.asarray(density) * field * np.asarray(omega, dtype=float))


def precipitate_rate(
    wave_number: ArrayLike,
    speed: ArrayLike,
    volume_share: ArrayLike,
    radius: ArrayLike,
    contrast: ArrayLike,
    spread: float = 0.0,
) -> Array:
    """Round inclusions, 1/s: 1/τ = v n ⟨σ⟩ with 1/σ = 1/σ_short + 1/σ_long for each radius.

    σ_short = 2πR² (shadow and diffraction), σ_long = (4/9) πR² (ΔD/D)² (qR)⁴ (Rayleigh), n = φ/(4/3 π⟨R³⟩). Radii
    are log-normal about the median R with standard deviation `spread` of ln R; 0: all alike.

    wave_number q (1/m), group speed v (m/s), volume_share φ, radius R (m), contrast ΔD/D: mass density of the
    inclusion over the host's, less 1; the arrays broadcast. Bonds are taken as the host's, and each inclusion by
    itself: φ up to some per cent. Source: Kim & Majumdar, Journal of Applied Physics 99, 084306 (2006).

    >>> rates = precipitate_rate([1e7, 1e11], 5000.0, 0.02, 3e-9, 0.5)
    >>> [f"{float(rate):.3e}" for rate in rates]
    ['2.250e+03', '5.000e+10']
    """
    q, r = np.asarray(wave_number, dtype=float), np.asarray(radius, dtype=float)
    strength = (2 / 9) * np.asarray(contrast, dtype=float) ** 2
    if spread:
        # standard normal of ln R; wide enough for ⟨R⁶⟩, close enough for the step of σ between its two laws
        z = np.arange(-8.0, 8.0 + 6 * spread, 0.1)
        among = 0.1 / np.sqrt(2 * np.pi) * np.exp(-0.5 * z**2)
        ratio = np.exp(spread * z)
    else:
        among, ratio = np.ones(1), np.ones(1)
    long = strength[..., None] * ((q * r)[..., None] * ratio) ** 4  # σ_long/σ_short
    area = 2 * np.sum(among * ratio**2 * long / (1 + long), axis=-1)
    per_volume = np.asarray(volume_share) / (4 / 3 * r * np.exp(4.5 * spread**2))  # n πR²
    return np.asarray(np.asarray(speed, dtype=float) * per_volume * area)


def carrier_rate(
    omega: ArrayLike,
    wave_number: ArrayLike,
    temperature: ArrayLike,
    eta: ArrayLike,
    valley_mass: ArrayLike,
    valleys: ArrayLike,
    deformation_potential: ArrayLike,
    density: ArrayLike,
) -> Array:
    """Phonons absorbed by carriers of a parabolic band, 1/s (golden rule, absorption less emission).

    1/τ = N_v Ξ² m² q k_B T/(2π ρ ω ħ⁴) × ln[(1 + e^(η−ε))/(1 + e^(η−ε−x))],
    ε = (ħ²/2m)(q/2 − mω/ħq)²/k_B T, x = ħω/k_B T. Becomes N_v Ξ² m² q/(2π ρ ħ³) for degenerate carriers.

    omega (rad/s), wave_number q (1/m), temperature (K), eta: chemical potential from the edge over k_B T,
    valley_mass m (kg), valleys N_v, deformation_potential Ξ (J), density ρ (kg/m³); broadcast.
    Source: Ziman, Philosophical Magazine 1, 191 (1956); 2, 292 (1957).

    >>> from scipy import constants as c
    >>> f"{float(carrier_rate(1e12, 1e8, 300.0, 5.0, 0.3 * c.m_e, 6, 3 * c.e, 3000.0)):.3e}"
    '4.651e+08'
    """
    w, q = np.asarray(omega, dtype=float), np.asarray(wave_number, dtype=float)
    m, kt = np.asarray(valley_mass, dtype=float), K_B * np.asarray(temperature, dtype=float)
    edge = HBAR**2 / (2 * m) * (q / 2 - m * w / (HBAR * q)) ** 2 / kt
    level = np.asarray(eta) - edge
    overlap = np.logaddexp(0.0, level) - np.logaddexp(0.0, level - HBAR * w / kt)
    strength = np.asarray(valleys) * np.asarray(deformation_potential, dtype=float) ** 2 * m**2
    return np.asarray(strength * q * kt / (2 * np.pi * np.asarray(density) * w * HBAR**4) * overlap)
