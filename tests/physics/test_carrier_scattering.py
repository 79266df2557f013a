"""Carrier rates against angular integrals, spinor overlaps, detailed balance and textbook limits."""

import math
from functools import partial

import numpy as np
import pytest
from scipy import constants
from scipy.integrate import quad

from legwright.physics.bands import density_of_states, wave_number_squared
from legwright.physics.carrier_scattering import (
    acoustic_rate,
    alloy_rate,
    intervalley_rate,
    ionised_impurity_rate,
    screening_wave_number_squared,
)

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

EV, M_E, HBAR, K_B = constants.e, constants.m_e, constants.hbar, constants.k


def test_acoustic_rate_of_a_parabolic_band_has_no_kane_factor():
    # golden rule with ⟨|M|²⟩ = Ξ² k_B T/(2 C_l V) for absorption and again for emission
    # (Bardeen & Shockley 1950), final states of one spin
    states = density_of_states(0.04 * EV, 0.3 * M_E, 0.0)
    golden = 2 * math.pi / HBAR * 2 * (7 * EV) ** 2 * K_B * 400 / (2 * 1.2e11) * states / 2
    assert acoustic_rate(states, 1.0, 400.0, 7 * EV, 1.2e11) == near(golden, rel=1e-14)


@pytest.mark.parametrize("share", [0.02, 0.3, 2.0, 40.0])
def test_kane_bracket_is_the_overlap_of_two_band_spinors(share):
    # H = (E_g/2) β + P k·σ has the Kane dispersion with α = 1/E_g (Kane 1957); |⟨k'|k⟩|² summed over final
    # spins and weighed by 1 − cos θ must give [(1+2αε)² + 2]/[3 (1+2αε)²]. Here E_g = 1 and αε = share
    sigma = np.array([[[0, 1], [1, 0]], [[0, -1j], [1j, 0]], [[1, 0], [0, -1]]])
    wave = math.sqrt(share * (1 + share))

    def conduction_projector(angle: float) -> np.ndarray:
        direction = np.array([math.sin(angle), 0.0, math.cos(angle)])
        across = wave * np.tensordot(direction, sigma, 1)
        energies, vectors = np.linalg.eigh(np.block([[0.5 * np.eye(2), across], [across, -0.5 * np.eye(2)]]))
        assert energies[2:] - 0.5 == near(share, rel=1e-9)
        return vectors[:, 2:] @ vectors[:, 2:].conj().T

    start = conduction_projector(0.0)
    cosines, weights = np.polynomial.legendre.leggauss(4)  # exact: the integrand is a polynomial of degree 2
    overlaps = [np.trace(start @ conduction_projector(math.acos(c))).real / 2 for c in cosines]
    direct = 0.5 * np.sum(weights * (1 - cosines) * overlaps)
    bracket = acoustic_rate(1e46, 1 + 2 * share, 300.0, EV, 1e11) / acoustic_rate(1e46, 1.0, 300.0, EV, 1e11)
    assert bracket == near(direct, rel=1e-12)


def test_alloy_rate_is_the_golden_rule_for_independent_sites():
    # |M|² = x(1−x) Ω U²/V (Harrison & Hauser 1976), final states of one spin
    golden = 2 * math.pi / HBAR * 0.3 * 0.7 * 2e-29 * (0.6 * EV) ** 2 * 1e46 / 2
    assert alloy_rate(1e46, 0.3, 2e-29, 0.6 * EV) == near(golden, rel=1e-14)
    assert alloy_rate(1e46, 0.3, 2e-29, 0.6 * EV) == alloy_rate(1e46, 0.7, 2e-29, 0.6 * EV)
    assert np.all(alloy_rate(1e46, np.array([0.0, 1.0]), 2e-29, 0.6 * EV) == 0)


@pytest.mark.parametrize("nonparabolicity", [0.0, 0.6 / EV])
def test_intervalley_scattering_is_in_detailed_balance(nonparabolicity):
    # as many carriers go up from ε as come down from ε + E_o in equilibrium (Boltzmann tail)
    t, phonon = 500.0, 0.05 * EV
    low = np.array([0.002, 0.03, 0.2]) * EV
    states = [density_of_states(e, 0.4 * M_E, nonparabolicity) for e in (low, low + phonon)]
    up = states[0] * np.exp(-low / (K_B * t)) * intervalley_rate(states[1], 0.0, t, 1e-8, phonon, 3000.0)
    down = (
        states[1] * np.exp(-(low + phonon) / (K_B * t)) * intervalley_rate(0.0, states[0], t, 1e-8, phonon, 3000.0)
    )
    assert up == near(down, rel=1e-13)


def test_intervalley_scattering_by_soft_phonons_is_like_acoustic():
    # D in place of Ξ q and E_o/ħ in place of v q: Ξ²/C_l = Ξ²/(ρ v²) → D² ħ²/(ρ E_o²) (Conwell 1967)
    phonon, density, field = 1e-4 * EV, 3000.0, 5e10 * EV
    soft = intervalley_rate(1e46, 1e46, 300.0, field, phonon, density)
    acoustic = acoustic_rate(1e46, 1.0, 300.0, field * HBAR / phonon, density)
    # 2n + 1 = (2 k_B T/E_o) (1 + x²/12), x = 0.004
    assert soft == near(acoustic, rel=2e-6)


def brooks_herring(
    wave_number: float, screening: float, centres: float, permittivity: float, states: float
) -> float:
    """(2π/ħ) N ∫ V_q² (1 − cos θ) over the sphere of final states, V_q = e²/(ε(q² + q_s²)): Brooks (1955)."""

    def integrand(u: float) -> float:  # u = q/2k, 1 − cos θ = 2u², d cos θ = 4u du
        potential = constants.e**2 / (permittivity * ((2 * wave_number * u) ** 2 + screening))
        return potential**2 * 2 * u**2 * 4 * u / 2

    knee = math.sqrt(screening) / (2 * wave_number)
    value, _ = quad(
        integrand, 0, 1, points=[p for p in (0.3 * knee, knee, 5 * knee) if p < 1], epsabs=0, epsrel=1e-12
    )
    return 2 * math.pi / HBAR * centres * states / 2 * value


@pytest.mark.parametrize("b", [1e-6, 1e-3, 9.99e-3, 1.001e-2, 0.1, 1.0, 30.0, 1e4])
def test_impurity_rate_is_the_angular_integral(b):
    k, permittivity = 4e8, 12 * constants.epsilon_0
    screening = 4 * k**2 / b
    direct = brooks_herring(k, screening, 1e26, permittivity, 1e46)
    # the closed form cancels to ε/b² = 2e-12 at b = 1e-2, where the series takes over
    found = ionised_impurity_rate(1e46, k**2, screening, 1e26, permittivity)
    assert found == near(direct, rel=1e-11)


def test_impurity_rate_has_no_step_where_the_series_takes_over():
    screening = 1e18
    wave2 = screening / 4 * 1e-2 * (1 + 1e-12 * np.array([-1.0, 1.0]))
    below, above = ionised_impurity_rate(1e46, wave2, screening, 1e26, 1e-10)
    # b differs by 2e-12 and the rate by (4/3) b of that; the closed form cancels to 2e-12
    assert above / below == near(1, abs=1e-11)


def test_impurity_rate_falls_with_energy_and_screening_and_counts_charge():
    energy = np.geomspace(1e-4, 1, 50) * EV
    states, wave2 = density_of_states(energy, 0.3 * M_E, 0.0), wave_number_squared(energy, 0.3 * M_E, 0.0)
    per_state = ionised_impurity_rate(states, wave2, 1e16, 1e24, 1e-10) / states
    assert np.all(np.diff(per_state) < 0)
    assert np.all(ionised_impurity_rate(states, wave2, 1e17, 1e24, 1e-10) / states < per_state)
    twice = ionised_impurity_rate(states, wave2, 1e16, 4e24, 1e-10) / states
    assert twice == near(4 * per_state, rel=1e-14)


def test_screening_by_thin_and_dense_carriers(make_electrons, solve):
    # Debye: q_s² = e² n/(ε k_B T); Thomas–Fermi: q_s² = (3/2) e² n/(ε E_F) (Ashcroft & Mermin 1976)
    electrons, permittivity = make_electrons(), 12 * constants.epsilon_0
    filling, _ = solve(electrons, np.array([300.0, 20.0]), np.array([1e20, 1e27]))
    found = screening_wave_number_squared(filling.compressibility[:, 0], permittivity)
    debye = constants.e**2 * 1e20 / (permittivity * K_B * 300)
    fermi = filling.eta[1, 0] * K_B * 20
    thomas = 1.5 * constants.e**2 * 1e27 / (permittivity * fermi)
    assert found[0] == near(debye, rel=1e-5)  # degeneracy, e^η/2^(3/2) = 2e-6, and the mesh, 4e-7
    assert filling.eta[1, 0] > 200
    assert found[1] == near(thomas, rel=5e-5)  # Sommerfeld's next term is about 1/η²
