"""Legs between two contacts: ballistic and diffusive limits, Landauer's modes, and the exact grey layer."""

import math
from functools import partial

import numpy as np
import pytest
from scipy import constants
from scipy.special import expn

from legwright.physics import carriers, moments
from legwright.physics.bands import density_of_states, velocity_squared
from legwright.physics.quanta import conductance_quantum_per_spin
from legwright.physics.short_legs import modes_per_area, short_leg_conductance, short_leg_suppression

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

EV, M_E, K_B, HBAR = constants.e, constants.m_e, constants.k, constants.hbar


def test_a_mode_without_scattering_conducts_landauers_quantum():
    # CODATA: 2e²/h = 7.748e-5 S for each mode, which is a patch of k²/4π per area
    mass, energy = 0.3 * M_E, 0.2 * EV
    states, speed = density_of_states(energy, mass, 0.0), math.sqrt(2 * energy / mass)
    each = short_leg_conductance(EV**2 * states, speed, 1.0, 0.0) / modes_per_area(states, speed)
    assert each == near(constants.physical_constants["conductance quantum"][0], rel=1e-9)
    assert each == near(2 * conductance_quantum_per_spin(), rel=1e-14)
    assert modes_per_area(states, speed) == near(2 * mass * energy / HBAR**2 / (4 * math.pi), rel=1e-14)


def test_modes_of_a_kane_band_are_counted_by_wave_number():
    # nonparabolicity changes states and speed, not the patch that a wave number covers
    mass, energy, alpha = 0.2 * M_E, 0.15 * EV, 2.5 / EV
    states = density_of_states(energy, mass, alpha)
    speed = np.sqrt(3 * velocity_squared(energy, mass, alpha))
    k2 = 2 * mass * energy * (1 + alpha * energy) / HBAR**2
    assert modes_per_area(states, speed) == near(k2 / (4 * math.pi), rel=1e-13)


def test_limits_of_a_layer():
    carried, speed, path = 1.7e6, 6000.0, 90e-9
    assert short_leg_conductance(carried, speed, path, 0.0) == near(carried * speed / 4, rel=1e-15)
    long = 1e3
    bulk = carried * speed * path / 3
    assert short_leg_conductance(carried, speed, path, long) * long == near(bulk, rel=4 * path / (3 * long))
    assert short_leg_suppression(path, np.inf) == 1
    assert short_leg_suppression(0.0, 1e-9) == 1
    assert short_leg_suppression(path, 1e-13) == near(3e-13 / (4 * path), rel=1e-6)


def test_conductance_and_suppression_are_one_law():
    path, length = np.geomspace(1e-10, 1e-4, 13)[:, None], np.geomspace(1e-9, 1e-2, 9)
    whole = short_leg_conductance(3.0, 2.0, path, length) * length
    assert whole == near(3.0 * 2.0 * path / 3 * short_leg_suppression(path, length), rel=1e-14)


def exact_grey_layer(thickness: float, cells: int = 600) -> float:
    """Flux through a grey layer between black walls over the ballistic one, by the integral equation
    2φ(t) = E₂(t) + ∫₀^τ φ(t') E₁(|t − t'|) dt' (Heaslet & Warming 1965), φ constant on each cell."""
    ends = np.linspace(0, thickness, cells + 1)
    middle = 0.5 * (ends[1:] + ends[:-1])

    def below(t):  # ∫₀^t E₁(|x|) dx, odd in t
        return np.sign(t) * (1 - expn(2, np.abs(t)))

    kernel = below(ends[1:] - middle[:, None]) - below(ends[:-1] - middle[:, None])
    phi = np.linalg.solve(2 * np.eye(cells) - kernel, expn(2, middle))
    return float(1 - 2 * np.sum(phi * (expn(3, ends[:-1]) - expn(3, ends[1:]))))


@pytest.mark.parametrize(("thickness", "published"), [(0.1, 0.9157), (3.0, 0.3016)])
def test_exact_grey_layer_is_the_published_one(thickness, published):
    # Heaslet & Warming (1965), from memory, four figures
    assert exact_grey_layer(thickness) == near(published, abs=1e-4)


@pytest.mark.parametrize("thickness", [0.01, 0.1, 0.5, 1.0, 2.0, 5.0, 20.0])
def test_law_stays_within_a_few_per_cent_of_the_exact_grey_layer(thickness):
    law = short_leg_conductance(4.0, 1.0, 1.0, thickness)
    assert 0 < law / exact_grey_layer(thickness) - 1 < 0.035


def test_legs_of_carriers_run_from_sharvin_to_ohm(make_electrons, solve, exact_fermi):
    t, electrons = 300.0, make_electrons(valleys=1.0, dos_mass=0.3 * M_E, inertial_mass=0.3 * M_E)
    n_c = 2 * (0.3 * M_E * K_B * t / (2 * math.pi * HBAR**2)) ** 1.5
    filling, bulk = solve(electrons, t, n_c * float(exact_fermi(0.5, 1.0)))
    flow = carriers.bulk_flow(electrons, np.array(t), np.array(n_c * float(exact_fermi(0.5, 1.0))), filling)
    lengths = np.array([1e-14, 1e-8, 1e-7, 1e-3])
    sums = carriers.short_leg_integrals(flow, lengths)
    per_area = moments.conductivity(sums.l0[:, 0]) / lengths
    # Sharvin's contact by temperature: G = e² m k_BT/(2π²ħ³) F₀(η), F₀ = ln(1 + e^η)
    sharvin = EV**2 * 0.3 * M_E * K_B * t / (2 * math.pi**2 * HBAR**3) * math.log1p(math.e)
    assert per_area[0] == near(sharvin, rel=2e-7)  # ¾ L/Λ, Λ = 90 nm
    assert per_area[3] * 1e-3 == near(moments.conductivity(bulk.l0[0]), rel=1.3e-4)  # 4Λ/3L
    assert np.all(np.diff(per_area) < 0)
    # with acoustic scattering Λ is the same at all energies: the Seebeck coefficient stays
    seebeck = moments.seebeck(sums.l0[:, 0], sums.l1[:, 0], t)
    assert seebeck == near(float(moments.seebeck(bulk.l0[0], bulk.l1[0], t)), rel=1e-12)
    assert np.all(sums.l2 > 0)


@pytest.mark.parametrize(("path", "length"), [(-1e-9, 1e-9), (1e-9, 0.0), (math.inf, 1e-9), (math.nan, 1e-9)])
def test_what_is_no_layer_is_refused(path, length):
    with pytest.raises(ValueError, match="mean free path"):
        short_leg_suppression(path, length)
    with pytest.raises(ValueError, match="mean free path"):
        short_leg_conductance(1.0, 1.0, -abs(path), length)
