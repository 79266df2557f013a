"""One worked example of each kind, step by step: every intermediate value against figures not made here.

Textbook steps are worked with plain floats and CODATA constants, or with mpmath; a figure that a book prints is
quoted beside its step.
"""

from __future__ import annotations

import math

import mpmath
import numpy as np
import pytest
from scipy import constants as c

from legwright.candidate.composition import atomic_mass, disorder, isotope_variance
from legwright.candidate.model import Site
from legwright.leg.balance import LegMaterial, cool, generate, largest_difference
from legwright.physics import (
    barriers,
    boundaries,
    carrier_scattering,
    fermi,
    hall,
    moments,
    phonon_scattering,
    quanta,
    short_legs,
    texture,
)
from legwright.physics.solubility import active_density, solubility

#: steps repeat the same arithmetic in other words: what is left is rounding
ROUNDING = 1e-12


def near(value: float, rel: float = ROUNDING):
    return pytest.approx(value, rel=rel, abs=0)


def test_acoustic_band_at_zero_reduced_level(make_electrons, solve):
    """Single parabolic band, acoustic phonons, η = 0: S = 204.50 µV/K, L = 1.6130e-8 W Ω/K² (Goldsmid 2010)."""
    f0, f1, f2 = (float(mpmath.re(-mpmath.polylog(j + 1, -1))) for j in (0, 1, 2))
    assert fermi.fermi_dirac_integral(0, 0.0) == near(f0)
    assert f0 == near(math.log(2))
    assert fermi.fermi_dirac_integral(1, 0.0) == near(f1)
    assert f1 == near(math.pi**2 / 12)
    assert fermi.fermi_dirac_integral(2, 0.0) == near(f2)
    half = float(mpmath.re(-mpmath.polylog(1.5, -1)))
    assert fermi.fermi_dirac_integral(0.5, 0.0) == near(half)
    # n = 2 (2π m_d kT/h²)^(3/2) F_½(0): 2.509e19 cm⁻³ × (m_d/m_e)^(3/2) × F_½ at 300 K
    electrons = make_electrons()
    m, kt = 0.8 * c.m_e, c.k * 300
    effective = 2 * (2 * math.pi * m * kt / c.h**2) ** 1.5
    assert effective == near(2.509e25 * 0.8**1.5, rel=2e-4)  # printed to four digits
    n = effective * half
    filling, sums = solve(electrons, 300.0, n)
    assert float(filling.eta[0]) == pytest.approx(0.0, abs=2e-9)  # the energy mesh is good to 1e-9
    reduced = 2 * f1 / f0
    seebeck = float(moments.seebeck(sums.l0, sums.l1, 300.0).item())
    assert -seebeck == near(c.k / c.e * reduced, rel=5e-9)  # the same mesh
    assert -seebeck * 1e6 == near(204.50, rel=3e-5)  # printed to five digits
    lorenz = (c.k / c.e) ** 2 * (6 * f2 / f0 - reduced**2)
    heat = float(moments.electronic_heat(sums.l0, sums.l1, sums.l2, 300.0).item())
    sigma = float(moments.conductivity(sums.l0).item())
    assert heat / (sigma * 300) == near(lorenz, rel=1e-8)
    assert lorenz * 1e8 == near(1.6130, rel=5e-5)
    # µ = e τ₀ kT-free form: (2/3) e τ(kT)/m_I × F_0/F_½ × 1/Γ(3/2), with τ(kT) by the rate's own law
    g_v = math.sqrt(2) * m**1.5 * math.sqrt(kt) / (math.pi**2 * c.hbar**3) / 4
    rate = math.pi * kt * (9 * c.e) ** 2 * g_v / (c.hbar * 1.5e11)
    assert carrier_scattering.acoustic_rate(g_v, 1.0, 300.0, 9 * c.e, 1.5e11) == near(rate)
    mobility = 2 / 3 * c.e / (0.25 * c.m_e * rate) * f0 / (half * math.gamma(1.5))
    assert float(moments.mobility(sums.l0, n).item()) == near(mobility, rel=5e-9)


def test_brooks_herring_in_silicon_by_hand():
    """n-Si, 1e17 cm⁻³, 300 K, E = kT: screening by Boltzmann statistics is Debye's length (Sze, from memory)."""
    n, kt, eps, m = 1e23, c.k * 300, 11.7 * c.epsilon_0, 0.33 * c.m_e
    q2 = c.e**2 * n / (eps * kt)
    assert carrier_scattering.screening_wave_number_squared(n / kt, eps) == near(q2)
    assert q2**-0.5 * 1e9 == near(12.9, rel=0.01)
    k2 = 2 * m * kt / c.hbar**2
    b = 4 * k2 / q2
    assert b == near(4 * 0.33 * 2 * c.m_e * kt / c.hbar**2 * (12.93e-9) ** 2, rel=0.01)
    bracket = math.log(1 + b) - b / (1 + b)
    g = math.sqrt(2) * m**1.5 * math.sqrt(kt) / (math.pi**2 * c.hbar**3)
    # Brooks (1955) in its usual words: n e⁴/(16 √2 π ε² √m E^1.5) × [ln(1 + b) − b/(1 + b)]
    textbook = n * c.e**4 / (16 * math.sqrt(2) * math.pi * eps**2 * math.sqrt(m) * kt**1.5) * bracket
    assert carrier_scattering.ionised_impurity_rate(g, k2, q2, n, eps) == near(textbook)


def test_disorder_of_silicon_germanium_from_masses_to_the_rate():
    """Isotopes as tabulated (Si 92.23, 4.67, 3.10 per cent), Γ = 2.00e-4 (Tamura 1983); alloy by Klemens (1955)."""
    shares, masses = (0.92223, 0.04685, 0.03092), (27.976927, 28.976495, 29.973770)
    mean = sum(f * m for f, m in zip(shares, masses, strict=True))
    assert atomic_mass("Si") / c.atomic_mass == near(mean, rel=1e-4)  # abundances of other years
    isotopes = sum(f * (1 - m / mean) ** 2 for f, m in zip(shares, masses, strict=True))
    assert isotope_variance("Si") == near(isotopes, rel=0.005)
    assert isotope_variance("Si") == near(2.00e-4, rel=0.01)
    assert isotope_variance("Ge") == near(5.87e-4, rel=0.01)
    si, ge = 28.0855, 72.63
    average = 0.8 * si + 0.2 * ge
    assert average == near(36.99, rel=1e-3)
    alloy = 0.8 * 0.2 * (ge - si) ** 2 / average**2
    within = (0.8 * si**2 * isotopes + 0.2 * ge**2 * 5.87e-4) / average**2
    found = disorder((Site(count=1, occupants={"Si": 0.8, "Ge": 0.2}),))
    assert found.mean_mass / c.atomic_mass == near(average, rel=1e-4)
    assert found.mass_variance == near(alloy + within, rel=1e-3)
    assert alloy == near(0.2320, rel=1e-3)
    v, omega, volume = 6000.0, 2e13, 20.48e-30
    klemens = volume * (alloy + within) * omega**4 / (4 * math.pi * v**3)
    states = omega**2 / (2 * math.pi**2 * v**3)
    assert phonon_scattering.point_defect_rate(omega, states, volume, alloy + within) == near(klemens)


def test_umklapp_of_a_debye_branch_and_slacks_conductivity():
    """Silicon after Morelli, Heremans & Slack (2002): A, the rate, and κ of a branch by plain quadrature."""
    gamma, mass, v, volume = 1.06, 28.0855 * c.atomic_mass, 8430.0, 2.002e-29
    q_d = (6 * math.pi**2 / (2 * volume)) ** (1 / 3)
    assert q_d == near(1.139e10, rel=1e-3)
    theta = c.hbar * v * q_d / c.k
    assert theta == near(733, rel=2e-3)
    strength = c.hbar * gamma**2 / (mass * v**2 * theta)
    assert phonon_scattering.anharmonic_strength(gamma, mass, v, theta) == near(strength)
    omega = 0.5 * c.k * theta / c.hbar
    rate = strength * omega**2 * 300 * math.exp(-theta / 900)
    assert phonon_scattering.umklapp_rate(omega, 300.0, strength, theta, 3.0) == near(rate)
    assert phonon_scattering.normal_rate(omega, 300.0, strength, 2.0) == near(2 * strength * omega**2 * 300)
    # high temperature: κ = (1/3) ∫ C v² τ with C = k_B per mode is k_B q_D/(2π² · 3 A' T), A' = A e^(−θ/3T)
    closed = c.k * q_d / (6 * math.pi**2 * strength * 300 * math.exp(-theta / 900))
    nodes, weights = np.polynomial.legendre.leggauss(64)
    q = 0.5 * q_d * (nodes + 1)
    lifetimes = 1 / phonon_scattering.umklapp_rate(v * q, 300.0, strength, theta, 3.0)
    assert np.sum(0.5 * q_d * weights * c.k * v**2 * lifetimes * q**2) / (6 * math.pi**2) == near(closed, rel=1e-9)


def test_walls_and_grain_boundaries_at_one_free_path():
    """Film 0.683857, wire 0.492863 (Fuchs 1938, Dingle 1950); Mayadas & Shatzkes (1970) at R = 0.3."""
    lost = mpmath.mpf(3) / 8 - mpmath.mpf(3) / 2 * mpmath.quad(lambda u: (u - u**3) * mpmath.exp(-1 / u), [0, 1])
    assert boundaries.film_suppression(1.0) == near(float(1 - lost), rel=1e-11)  # the table's own accuracy
    assert float(1 - lost) == near(0.683857, rel=1e-6)
    assert boundaries.wire_suppression(1.0) == near(0.492863, rel=1e-6)
    a = 0.3 / 0.7  # (λ/d) R/(1 − R) at λ = d
    assert a == near(0.428571, rel=2e-6)
    closed = 3 * (1 / 3 - a / 2 + a**2 - a**3 * math.log(1 + 1 / a))
    assert boundaries.grain_suppression(1e-8, 1e-8, 0.3) == near(closed)
    assert closed == near(0.6239, rel=2e-4)  # worked by hand
    # Λ_gb = ¾ d (1 − R)/R comes within 2 per cent
    assert near(closed, rel=0.025) == 1 / (1 + 1 / (0.75 * 0.7 / 0.3))


def constant(z: float, low: float, high: float) -> LegMaterial:
    t = np.linspace(low, high, 7)
    one = np.ones_like(t)
    return LegMaterial.from_nodes(t, 2e-4 * one, 1e-5 * one, (2e-4) ** 2 / (1e-5 * z) * one)


def test_ioffes_generator_and_cooler():
    """Ioffe (1957): 600/300 K with mean ZT of 1 gives 0.10819; Z = 3e-3 and T_c = 220 K give 72.6 K."""
    z = 1 / 450
    carnot, root = 1 - 300 / 600, math.sqrt(1 + z * 450)
    assert (carnot, root) == (0.5, near(math.sqrt(2)))
    reduced = (root - 1) / (root + 300 / 600)
    assert reduced == near(0.21638, rel=1e-4)
    # the best |w| at the hot end: I κ-free, w_h = S T_h/(M − 1) × … found on a fine grid instead
    made = generate(constant(z, 300, 600), 600.0, 300.0, np.geomspace(0.05, 2, 20001))
    assert float(np.max(made.efficiency)) == near(carnot * reduced, rel=1e-7)  # the grid's step squared
    assert carnot * reduced == near(0.10819, rel=5e-5)  # printed to five digits
    z = 3e-3
    assert 0.5 * z * 220**2 == near(72.6)
    assert float(largest_difference(constant(z, 150, 292.6), 292.6)) == near(72.6, rel=1e-6)
    mean = 0.5 * (300 + 280)
    root = math.sqrt(1 + z * mean)
    best = 280 / 20 * (root - 300 / 280) / (root + 1)
    assert best == near(1.7507, rel=1e-4)  # 14 × (1.36748 − 1.07143)/2.36748
    lifted = cool(constant(z, 280, 300), 300.0, 280.0, np.linspace(1e-3, 0.05, 20001))
    assert float(np.max(lifted.cop)) == near(best, rel=1e-6)


def test_setos_barrier_for_few_carriers():
    """Seto (1975): G = e² n v̄/4 e^(−E_b/kT)/kT with v̄ = √(8kT/πm)."""
    kt, m, eta, barrier = c.k * 300, 0.3 * c.m_e, -6.0, 0.05 * c.e
    n = 2 * (2 * math.pi * m * kt / c.h**2) ** 1.5 * math.exp(eta)
    speed = math.sqrt(8 * kt / (math.pi * m))
    assert speed == near(1.0761e5 * math.sqrt(1 / 0.3), rel=1e-3)
    boltzmann = math.exp(-barrier / kt)
    assert boltzmann == near(0.1445, rel=2e-3)
    exact = c.e**2 * n * speed / 4 * boltzmann / kt
    found = float(barriers.barrier_conductance(barrier, 300.0, eta, m, m))
    assert found == near(exact, rel=3e-4)  # Fermi against Boltzmann: e^(η − E_b/kT)/2
    # in series: 1/σ' = 1/σ + 1/(G d)
    assert barriers.barrier_suppression(1e4, 1e-7, found, 1e30) == near(1 / (1 + 1e4 / (found * 1e-7)))


def test_two_kinds_of_carriers_in_a_hall_bar():
    """R_H = (p µ_h² − n µ_e²)/(e (p µ_h + n µ_e)²) (Putley 1960), 1e22 and 2e22 m⁻³, 0.1 and 0.3 m²/(V s)."""
    p, up, n, un = 1e22, 0.1, 2e22, 0.3
    textbook = (p * up**2 - n * un**2) / (c.e * (p * up + n * un) ** 2)
    assert textbook == near(-2.1654e-4, rel=1e-4)  # by hand: (1 − 18) 1e20/(e × 49e42)
    l0 = [density * moved / c.e for density, moved in ((n, un), (p, up))]
    turned = [density * moved**2 / c.e**2 * 1.0 for density, moved in ((n, un), (p, up))]
    assert hall.hall_coefficient(l0[0], turned[0], l0[1], turned[1]) == near(textbook)


def test_quanta_a_short_layer_pores_and_solubility():
    """Conductance quanta (CODATA), Chen's form of a ballistic layer, Maxwell's pores, Trumbore's solubility."""
    assert quanta.thermal_conductance_quantum(1.0) == near(9.4643e-13, rel=5e-6)  # printed to five digits
    assert quanta.thermal_conductance_quantum(0.5) == near(math.pi**2 * c.k**2 * 0.5 / (3 * c.h))
    assert quanta.conductance_quantum_per_spin() == near(3.8740e-5, rel=1.3e-5)  # printed to five digits
    capacity, v, path, length = 1.66e6, 6400.0, 40e-9, 100e-9
    bulk = capacity * v * path / 3
    ballistic = capacity * v / 4
    assert short_legs.short_leg_conductance(capacity, v, path, length) == near(1 / (1 / ballistic + length / bulk))
    assert texture.porous_share(0.1) == near(0.9 / 1.05)
    hot, cold = solubility(1e27, 0.4 * c.e, 1300.0, [1300.0, 900.0])
    assert hot == near(1e27)
    assert cold / hot == near(math.exp(-0.4 * c.e / c.k * (1 / 900 - 1 / 1300)))
    assert active_density(1.0, 2.002e-29) == near(4.995e26, rel=1e-4)
