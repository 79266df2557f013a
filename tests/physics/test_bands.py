"""Kane bands: each formula against the derivative or integral that defines it."""

import math
from functools import partial

import numpy as np
import pytest
from scipy import constants
from scipy.integrate import quad

from legwright.physics import bands

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

EV, M_E, HBAR = constants.e, constants.m_e, constants.hbar
ALPHAS = pytest.mark.parametrize("alpha", [0.0, 0.5 / EV, 4.0 / EV])
ENERGY = np.array([1e-4, 0.02, 0.3, 1.5]) * EV


@ALPHAS
def test_energy_solves_the_kane_relation(alpha):
    # ε (1 + αε) = ħ²k²/2m (Kane 1957): solve the quadratic for ε and come back
    k = np.sqrt(bands.wave_number_squared(ENERGY, 0.3 * M_E, alpha))
    half = HBAR**2 * k**2 / (2 * 0.3 * M_E)
    energy = 2 * half / (1 + np.sqrt(1 + 4 * alpha * half))
    assert energy == near(ENERGY, rel=1e-12)


@ALPHAS
def test_slope_and_velocity_are_derivatives(alpha):
    step = 1e-5 * ENERGY  # central differences of step h: h²/6 of the third derivative, below 1e-9 relative
    up, down = ENERGY + step, ENERGY - step
    slope = (bands.kane_gamma(up, alpha) - bands.kane_gamma(down, alpha)) / (2 * step)
    assert bands.kane_slope(ENERGY, alpha) == near(slope, rel=1e-8)
    # v = dε/ħdk; a third of v² along each axis
    wave = [np.sqrt(bands.wave_number_squared(e, 0.3 * M_E, alpha)) for e in (up, down)]
    velocity = 2 * step / (HBAR * (wave[0] - wave[1]))
    assert bands.velocity_squared(ENERGY, 0.3 * M_E, alpha) == near(velocity**2 / 3, rel=1e-8)


@ALPHAS
def test_states_count_the_volume_inside_the_surface_of_constant_energy(alpha):
    # one spherical valley, both spins: N = k³/3π²; and N is the integral of the density of states
    k = np.sqrt(bands.wave_number_squared(ENERGY, 0.3 * M_E, alpha))
    assert bands.states_below(ENERGY, 0.3 * M_E, alpha) == near(k**3 / (3 * math.pi**2), rel=1e-13)

    def per_root(u: float) -> float:  # ε = u² takes the root at the edge away
        return 2 * u * float(bands.density_of_states(u**2 * EV, 0.3 * M_E, alpha)) * EV

    for energy, below in zip(ENERGY, bands.states_below(ENERGY, 0.3 * M_E, alpha), strict=True):
        assert below == near(quad(per_root, 0, math.sqrt(energy / EV))[0], rel=1e-10)


def test_many_valleys_are_one_heavier_valley():
    # m_d = N_v^(2/3) m_b
    four = 4 * bands.density_of_states(ENERGY, 0.3 * M_E, 1 / EV)
    assert bands.density_of_states(ENERGY, 4 ** (2 / 3) * 0.3 * M_E, 1 / EV) == near(four, rel=1e-13)


def test_gap_of_silicon_follows_varshni():
    # Varshni parameters of silicon, 1.170 eV, 4.73e-4 eV/K, 636 K (handbook of Sze; from memory): 1.125 eV at 300 K
    gap = bands.band_edge(np.array([0.0, 300.0]), 1.170, 4.73e-4, 636.0)
    assert gap == near([1.170, 1.1245], abs=1e-3)
