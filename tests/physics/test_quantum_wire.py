"""Ballistic heat of a smooth wire: four quanta when cold, Casimir's radiation when warm."""

from __future__ import annotations

import itertools
from functools import partial

import numpy as np
import pytest
from scipy import constants
from scipy.integrate import quad

from legwright.physics import lattice
from legwright.physics.quanta import ballistic_wire_conductance, thermal_conductance_quantum

near = partial(pytest.approx, abs=0.0)

HBAR, K_B = constants.hbar, constants.k
SPEEDS = (8433.0, 5843.0)
D = 50e-9


def onset(diameter: float) -> float:
    """ħ v_t/(k_B d), K: 0.9 K for silicon at 50 nm."""
    return HBAR * SPEEDS[1] / (K_B * diameter)


def casimir(diameter: float, t: float) -> float:
    """A Σ ¼ C v of straight branches: A Σ g π² k_B⁴ T³/(30 ħ³ v²)."""
    area = np.pi * diameter**2 / 4
    return area * sum(g * np.pi**2 * K_B**4 * t**3 / (30 * HBAR**3 * v**2) for g, v in ((1, 8433.0), (2, 5843.0)))


@pytest.mark.parametrize("share", [1e-2, 1e-3, 1e-6])
@pytest.mark.parametrize("zone_edge", [np.inf, 1.1e10])
def test_a_cold_wire_conducts_four_quanta(share, zone_edge):
    """Rego & Kirczenow (1998): four massless modes, each π² k_B² T/3h."""
    t = share * onset(D)
    found = ballistic_wire_conductance(D, t, SPEEDS, zone_edge) / thermal_conductance_quantum(t)
    # the bulk-like modes add (π²/80)(2 + v_t²/v_l²)(T/onset)² = 0.31 share² of the four quanta
    assert found == near(4.0, rel=0.5 * share**2 + 1e-12)


@pytest.mark.parametrize("t", [30.0, 100.0, 300.0])
def test_a_warm_wire_radiates_as_casimir(t):
    found = ballistic_wire_conductance(D, t, SPEEDS)
    # exactly the four quanta above it
    assert found == near(casimir(D, t) + 4 * float(thermal_conductance_quantum(t)), rel=1e-12)
    assert found == near(casimir(D, t), rel=20 * (onset(D) / t) ** 2)


@pytest.mark.parametrize("t", [0.05, 5.0, 77.0, 300.0, 2000.0])
def test_it_is_the_integral_over_open_modes(t):
    zone = 1.1e10

    def carried(q: float, v: float, massless: int, alike: int) -> float:
        omega = 2 * v * zone / np.pi * np.sin(0.5 * np.pi * q / zone)
        half = 0.5 * HBAR * omega / (K_B * t)
        heat = K_B * (half / np.sinh(half)) ** 2 if 0 < half < 300 else K_B * (half == 0)
        return (
            heat * (massless + alike * np.pi * D**2 / 4 * q**2 / (4 * np.pi)) * v * np.cos(0.5 * np.pi * q / zone)
        )

    exact = 0.0
    for v, massless, alike in ((8433.0, 1, 1), (5843.0, 3, 2)):
        top = min(zone, 30 * np.pi * K_B * t / (HBAR * v))
        edges = np.linspace(0, top, 9)
        exact += sum(
            quad(carried, a, b, args=(v, massless, alike), epsabs=0, epsrel=1e-11)[0]
            for a, b in itertools.pairwise(edges)
        )
    # 96 nodes on sixty thermal wave numbers and quad's 1e-11
    assert ballistic_wire_conductance(D, t, SPEEDS, zone) == near(exact / (2 * np.pi), rel=1e-10)


@pytest.mark.parametrize("t", [40.0, 300.0, 1000.0])
def test_in_the_warm_it_joins_the_lattice(t, make_phonons):
    """The same heat times speed as the modes of `lattice` carry through a section of the wire."""
    phonons = make_phonons()
    mesh = lattice.modes(phonons)
    quarter = float(np.sum(0.75 * mesh.weight * lattice.mode_heat(mesh.omega, np.array(t)) * mesh.velocity))
    found = ballistic_wire_conductance(1e-6, t, tuple(phonons.speed), phonons.zone_edge)
    # 1 µm: the four quanta are (λ/d)² of it
    assert found / (np.pi * 1e-12 / 4) == near(quarter, rel=40 * (HBAR * 4000 / (K_B * 1e-6 * t)) ** 2 + 1e-6)


def test_it_grows_with_temperature_and_diameter_and_broadcasts():
    t, d = np.geomspace(1e-3, 1e3, 61), np.array([5e-9, 5e-8, 5e-7])[:, None]
    found = ballistic_wire_conductance(d, t, SPEEDS, 1.1e10)
    assert found.shape == (3, 61)
    assert np.all(np.diff(found, axis=0) > 0)
    assert np.all(np.diff(found, axis=1) > 0)
    # never below the four quanta while the branches are straight, nor below what the section radiates
    assert np.all(ballistic_wire_conductance(d, t, SPEEDS) >= 4 * thermal_conductance_quantum(t) * (1 - 1e-12))
    assert ballistic_wire_conductance(D, 0.0, SPEEDS) == 0.0


@pytest.mark.parametrize(
    ("d", "t", "speeds", "zone"),
    [(0.0, 1.0, SPEEDS, np.inf), (D, -1.0, SPEEDS, np.inf), (D, 1.0, (8e3,), np.inf), (D, 1.0, SPEEDS, 0.0)],
)
def test_what_cannot_be_is_refused(d, t, speeds, zone):
    with pytest.raises(ValueError, match="must be > 0"):
        ballistic_wire_conductance(d, t, speeds, zone)
