"""Phonon rates against closed limits and against the golden rule integrated by scipy."""

import math
from functools import partial

import numpy as np
import pytest
from scipy import constants
from scipy.integrate import quad

from legwright.physics.phonon_scattering import (
    anharmonic_strength,
    carrier_rate,
    normal_rate,
    point_defect_rate,
    umklapp_rate,
)

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

EV, M_E, HBAR, K_B = constants.e, constants.m_e, constants.hbar, constants.k


def test_anharmonic_strength_scales_as_published():
    # A = ħγ²/(M v² θ): Slack & Galginaitis (1964); silicon, γ = 1, 28.09 u, 8430 m/s, 586 K by hand: 5.43e-20 s/K
    silicon = anharmonic_strength(1.0, 28.0855 * constants.atomic_mass, 8430.0, 586.0)
    assert silicon == near(5.43e-20, rel=2e-3)
    assert anharmonic_strength(2.0, 1e-25, 3000.0, 200.0) == near(
        4 * 2 * 4 * 3 * anharmonic_strength(1.0, 2e-25, 6000.0, 600.0), rel=1e-14
    )


def test_umklapp_dies_out_in_the_cold_and_is_linear_in_the_heat():
    w, theta = 1e13, 400.0
    cold, warm = (float(umklapp_rate(w, t, 1e-19, theta, 3.0)) for t in (10.0, 11.0))
    # d ln(rate)/d(1/T) = −θ/b besides the factor T
    slope = math.log(warm / cold * 10 / 11) / (1 / 11 - 1 / 10)
    assert slope == near(-theta / 3, rel=1e-10)
    assert umklapp_rate(w, 1e6, 1e-19, theta, 3.0) == near(1e-19 * w**2 * 1e6, rel=2e-4)
    assert umklapp_rate(2 * w, 300.0, 1e-19, theta, 3.0) == near(
        4 * umklapp_rate(w, 300.0, 1e-19, theta, 3.0), rel=1e-14
    )


def test_normal_rate_is_its_ratio_to_hot_umklapp():
    assert normal_rate(1e13, 1e7, 1e-19, 2.5) == near(
        2.5 * umklapp_rate(1e13, 1e7, 1e-19, 400.0, 3.0), rel=2e-5
    )  # e^(−θ/bT) at 1e7 K


@pytest.mark.parametrize("share", [1e-3, 0.01, 0.1])
def test_point_defects_become_klemens_for_long_waves(share):
    # Tamura (1983) with the states of a sine branch → V Γ ω⁴/(4π v³) (Klemens 1955), q = share × zone edge;
    # q³/(ω² v_g) of the sine branch is larger by 1 + (π share/2)² (2/6 + 1/2 …) to second order
    v, zone, volume, gamma = 5000.0, 1.2e10, 2e-29, 1e-3
    phase = 0.5 * math.pi * share
    q, omega, group = zone * share, 2 * v * zone / math.pi * math.sin(phase), v * math.cos(phase)
    tamura = point_defect_rate(omega, q**2 / (2 * math.pi**2 * group), volume, gamma)
    klemens = volume * gamma * omega**4 / (4 * math.pi * v**3)
    assert tamura / klemens - 1 == near(phase**2 * (1 / 3 + 1 / 2), rel=3 * phase**2, abs=1e-12)


def golden_rule(
    omega: float, q: float, t: float, eta: float, mass: float, valleys: float, xi: float, rho: float
) -> float:
    """Absorption less emission: (2π/ħ)|M|² 2 Σ_k (f_k − f_(k+q)) δ(E_(k+q) − E_k − ħω), |M|² = ħΞ²q²/(2ρω V).

    The delta function fixes k along q; the plane across is integrated (Ziman 1956).
    """
    along = mass * omega / (HBAR * q) - q / 2
    kt = K_B * t

    def fermi(energy: float) -> float:
        return 1 / (1 + math.exp(min(energy / kt - eta, 700.0)))

    def occupied(k: float) -> float:
        energy = HBAR**2 * (along**2 + k**2) / (2 * mass)
        return k * (fermi(energy) - fermi(energy + HBAR * omega))

    top = math.sqrt(2 * mass * kt * (max(eta, 0) + 60)) / HBAR
    plane = quad(
        occupied, 0, top, epsabs=0, epsrel=1e-10, limit=500, points=[top * f for f in (0.05, 0.2, 0.4, 0.7)]
    )[0]
    transitions = 2 / (2 * math.pi) ** 3 * 2 * math.pi * plane * mass / (HBAR**2 * q)
    return valleys * 2 * math.pi / HBAR * HBAR * xi**2 * q**2 / (2 * rho * omega) * transitions


@pytest.mark.parametrize("eta", [-6.0, 0.0, 5.0, 30.0])
@pytest.mark.parametrize(("omega", "q"), [(1e12, 2e8), (1e13, 2e9), (3e13, 8e9)])
def test_carrier_rate_is_the_golden_rule(omega, q, eta):
    args = (300.0, eta, 0.4 * M_E, 4.0, 5 * EV, 4000.0)
    # the source takes a difference of two logarithms, good to ε η k_BT/ħω ≈ 1e-13 here; the quadrature to 1e-10
    assert carrier_rate(omega, q, *args) == near(golden_rule(omega, q, *args), rel=1e-8)


def test_degenerate_carriers_damp_long_waves_in_proportion_to_wave_number():
    # Ziman (1956), q ≪ 2k_F and v ≪ v_F: 1/τ = N_v Ξ² m² q/(2π ρ ħ³), independent of temperature and density
    m, xi, rho, v, q = 0.5 * M_E, 4 * EV, 3000.0, 4000.0, 1e8
    limit = 6 * xi**2 * m**2 * q / (2 * math.pi * rho * HBAR**3)
    for t, eta in ((300.0, 60.0), (30.0, 200.0)):
        assert carrier_rate(v * q, q, t, eta, m, 6.0, xi, rho) == near(limit, rel=1e-9)


def test_carriers_cannot_absorb_waves_shorter_than_twice_their_own():
    # Kohn's cut: beyond 2k_F the rate of a cold gas falls to nothing
    m, t, eta = 0.5 * M_E, 4.0, 500.0
    fermi_wave = math.sqrt(2 * m * eta * K_B * t) / HBAR
    inside, outside = (
        float(carrier_rate(3000.0 * q, q, t, eta, m, 1.0, EV, 3000.0)) for q in (1.8 * fermi_wave, 2.2 * fermi_wave)
    )
    assert outside < 1e-9 * inside


def test_more_carriers_never_damp_less():
    eta = np.linspace(-20, 40, 200)
    rate = carrier_rate(1e12, 2e8, 300.0, eta, 0.4 * M_E, 4.0, 5 * EV, 4000.0)
    assert np.all(rate > 0)
    assert np.all(np.diff(rate) >= -1e-12 * rate[1:])  # difference of two logarithms of size η
    assert rate[-1] > 5 * rate[60] > 1e6 * rate[0]
