"""Rough walls against plain quadrature of the published integrals and closed limits; tables; candidates."""

from __future__ import annotations

import itertools
import math
from dataclasses import replace
from functools import partial

import mpmath
import numpy as np
import pytest
from scipy.integrate import dblquad, quad

from legwright.base.reading import read_as
from legwright.candidate.library import load_candidate
from legwright.candidate.model import Making
from legwright.physics import lattice, rough_walls
from legwright.physics.boundaries import (
    film_suppression,
    film_suppression_rough,
    wire_suppression,
    wire_suppression_rough,
)
from legwright.physics.crystal import crystal
from legwright.physics.properties import evaluate_crystal

near = partial(pytest.approx, abs=0.0)

ROUGH = {"film": (film_suppression_rough, film_suppression), "wire": (wire_suppression_rough, wire_suppression)}
BOTH = pytest.mark.parametrize("shape", ROUGH)


def kept(x: float, p: float) -> float:
    """Share of a mean free path kept between two walls x paths apart, as published."""
    fall = -math.expm1(-x)
    return 1 - (1 - p) * fall / (x * (1 - p * math.exp(-x)))


# ---- the integral


@pytest.mark.parametrize("q_eta", [0.05, 1.0, 6.0])
@pytest.mark.parametrize("knudsen", [0.2, 4.0, 1e3])
def test_film_matches_mpmath(knudsen, q_eta):
    with mpmath.workdps(30):
        k, h = 1 / mpmath.mpf(knudsen), mpmath.mpf(q_eta)

        def inner(mu: mpmath.mpf) -> mpmath.mpf:
            if mu == 0:
                return mpmath.mpf(0)
            p, away = mpmath.exp(-4 * h**2 * mu**2), mpmath.exp(-k / mu)
            return (1 - mu**2) * (1 - (1 - p) * (1 - away) * mu / (k * (1 - p * away)))

        exact = 1.5 * mpmath.quad(inner, [0, 1e-3, 0.01, 0.03, 0.1, 0.2, 0.4, 0.7, 1])
    # 1e-10: measured worst of the trapezoids with this step, see the test of steps below
    assert film_suppression_rough(knudsen, q_eta) == near(float(exact), rel=1e-10)


@pytest.mark.parametrize(("knudsen", "q_eta"), [(0.3, 1.0), (5.0, 0.2), (5.0, 2.0), (200.0, 1.0)])
def test_wire_matches_plain_quadrature(knudsen, q_eta):
    def ring(theta: float) -> float:
        def inner(beta: float) -> float:
            x = math.cos(beta) / (knudsen * math.sin(theta))
            p = math.exp(-4 * (q_eta * math.cos(beta) * math.sin(theta)) ** 2)
            return math.cos(beta) ** 2 * kept(x, p)

        around = quad(inner, 0, math.pi / 2 - 1e-9, epsabs=0, epsrel=1e-9)[0]
        return 12 / math.pi * math.cos(theta) ** 2 * math.sin(theta) * around

    edges = [1e-9, 0.02, 0.1, 0.4, math.pi / 2]
    exact = sum(quad(ring, a, b, epsabs=0, epsrel=1e-8)[0] for a, b in itertools.pairwise(edges))
    # 1e-7: quadrature within quadrature, of a difference that cancels where x is small
    assert wire_suppression_rough(knudsen, q_eta) == near(exact, rel=1e-7)


@BOTH
def test_a_finer_step_changes_nothing(shape, monkeypatch):
    """Trapezoids on an analytic, doubly decaying integrand converge geometrically: a step of 0.25 leaves 1e-9."""
    knudsen, q_eta = 10.0 ** np.arange(-4, 20)[:, None], np.array([1e-8, 1e-3, 0.1, 1.0, 10.0])
    usual = rough_walls.rough_suppression(shape, knudsen, q_eta)
    monkeypatch.setattr(rough_walls, "_STEP", 0.12)
    finer = rough_walls._PATHS[shape].__wrapped__()
    monkeypatch.setitem(rough_walls._PATHS, shape, lambda: finer)
    error = np.abs(usual / rough_walls.rough_suppression(shape, knudsen, q_eta) - 1)
    assert np.max(error[:, :4]) < 1e-9
    assert np.max(error) < 5e-9  # many waves to the roughness: a thin layer of glancing directions is mirrored


@BOTH
@pytest.mark.parametrize("knudsen", [1e-3, 0.1, 1.0, 30.0])
def test_smooth_walls_lose_nothing_and_very_rough_ones_are_diffuse(shape, knudsen):
    rough, diffuse = ROUGH[shape]
    assert rough(knudsen, 0.0) == 1.0
    assert 1 - rough(knudsen, 1e-5) < 1e-9 * knudsen  # 1 − p ≤ 4 q²η² a wall, Kn walls a path
    assert rough(knudsen, np.inf) == near(float(diffuse(knudsen)), rel=1e-9)


@BOTH
def test_a_thick_body_loses_the_share_that_is_not_mirrored(shape):
    """Kn → 0: 1 − F = Kn × what meets the wall and is not mirrored.

    Film: (3/2) ∫ (1 − µ²) µ (1 − p) dµ; wire: (12/π) ∫∫ cos²θ sin²θ cos β (1 − p) dβ dθ; ⅜ and ¾ if all is diffuse.
    """
    h, knudsen = 0.8, 1e-5

    def film(mu: float) -> float:
        return 1.5 * (1 - mu**2) * mu * -math.expm1(-4 * (h * mu) ** 2)

    def wire(beta: float, theta: float) -> float:
        lost = -math.expm1(-4 * (h * math.cos(beta) * math.sin(theta)) ** 2)
        return 12 / math.pi * (math.cos(theta) * math.sin(theta)) ** 2 * math.cos(beta) * lost

    half = math.pi / 2
    exact = quad(film, 0, 1)[0] if shape == "film" else dblquad(wire, 0, half, 0, half)[0]
    found = (1 - ROUGH[shape][0](knudsen, h)) / knudsen
    assert found == near(exact, rel=1e-4)  # the next order in Kn, and 1 − F cancels
    assert exact < 0.9 * (0.375 if shape == "film" else 0.75)


def test_thin_bodies_conduct_by_glancing_waves():
    """Kn → ∞: B → 1/(1 + 4 q²η² Kn c³-like), so F = C (4 q²η² Kn)^(−1/3) in a film, C = (3/2)(2π/3√3) = π/√3."""
    knudsen, h = 1e12, 0.7
    film = math.pi / math.sqrt(3) * (4 * h**2 * knudsen) ** (-1 / 3)
    assert film_suppression_rough(knudsen, h) == near(film, rel=1e-3)  # corrections of order Kn^(−1/3)
    wire = wire_suppression_rough(np.array([1e11, 1e12]), h)
    assert wire[0] / wire[1] == near(10 ** (2 / 3), rel=1e-3)


@BOTH
def test_averaging_the_mirror_share_first_is_off_by_two(shape):
    """At qη = 1 and Kn = 30 the share averaged over what meets the wall gives half of the heat or less."""
    rough, plain = ROUGH[shape]
    averaged = quad(lambda mu: 2 * mu * math.exp(-4 * mu**2), 0, 1)[0]
    assert rough(30.0, 1.0) / plain(30.0, averaged) > 2.0


# ---- tables by wave number


@BOTH
def test_tables_are_the_integral(shape):
    waves = np.concatenate([[0.0], np.geomspace(1e-7, 10, 24)])
    table = rough_walls.rough_walls(shape, tuple(waves.tolist()))
    knudsen = np.exp(np.linspace(-25, 45.99, 200))[:, None] * np.ones(waves.size)
    exact = ROUGH[shape][0](knudsen, waves)
    found = table(knudsen)
    assert found == near(exact, rel=1e-8)  # degree 11 on pieces of 2 in ln Kn: 2e-9 measured
    thick = knudsen[:, 0] < 1e-6
    # below the table 1 − F is proportional to Kn; it is a difference from 1, of sums of 1e4 terms
    assert np.max(np.abs(found - exact)[thick]) < 1e-12


@BOTH
def test_ends_of_the_tables_join(shape):
    table = rough_walls.rough_walls(shape, (0.01, 0.3, 3.0))
    for edge in (-14.0, 46.0):
        below, above = (table(np.exp(np.full((1, 3), edge + step))) for step in (-1e-6, 1e-6))
        assert above == near(below, rel=2e-6)  # F moves by at most a share 1e-6 of itself a step
    assert np.all(table(np.full((1, 3), 1e24)) < table(np.full((1, 3), 1e20)))
    assert np.array_equal(table(np.zeros((1, 3))), np.ones((1, 3)))
    assert np.array_equal(table(np.full((1, 3), np.inf)), np.zeros((1, 3)))


# ---- in a crystal

T = np.array(300.0)


def heat(phonons: lattice.Phonons, size: object, shape: str, count: int = 128) -> np.ndarray:
    mesh = lattice.modes(phonons, count)
    rates = lattice.crystal_rates(phonons, mesh, T, np.array(0.0), None)
    return lattice.acoustic_conductivity(phonons, mesh, rates, T, np.asarray(size, dtype=float), shape)


@BOTH
def test_heat_is_the_sum_over_modes_of_the_integral(shape, make_phonons):
    phonons = make_phonons(normal_weight=0.0, wall_roughness=0.4e-9)
    mesh = lattice.modes(phonons)
    rates = lattice.crystal_rates(phonons, mesh, T, np.array(0.0), None)
    path = mesh.velocity / rates.resistive
    factor = ROUGH[shape][0](path / 50e-9, mesh.q * 0.4e-9)
    exact = np.sum(mesh.weight * lattice.mode_heat(mesh.omega, T) * mesh.velocity * path * factor)
    assert float(heat(phonons, 50e-9, shape)) == near(float(exact), rel=1e-8)


@BOTH
def test_heat_lies_between_mirror_and_diffuse_and_falls_with_roughness(shape, make_phonons):
    size = np.array([5e-9, 5e-8, 1e-6])
    by_roughness = np.array([heat(make_phonons(wall_roughness=eta), size, shape) for eta in (1e-14, 1e-10, 3e-9)])
    bulk, diffuse = float(heat(make_phonons(), np.inf, shape)), heat(make_phonons(), size, shape)
    assert by_roughness[0] == near(np.full(3, bulk), rel=1e-6)
    assert np.all(np.diff(by_roughness, axis=0) < 0)
    assert np.all(by_roughness[-1] > diffuse)
    assert by_roughness[-1] == near(diffuse, rel=0.3)  # 3 nm: long waves and glancing ones still see a mirror


@BOTH
def test_the_modes_are_enough_for_rough_walls(shape):
    phonons = replace(crystal(load_candidate("si-n")).phonons, wall_roughness=5e-10)
    size = np.array([2e-9, 5e-8, 1e-6])
    # 1e-9: each mesh has tables of its own; 2e-10 measured against 512 modes
    assert heat(phonons, size, shape) == near(heat(phonons, size, shape, 192), rel=1e-9)


@BOTH
def test_grains_and_electrons_do_not_feel_the_roughness_of_walls(shape):
    plain = crystal(load_candidate("si-n"))
    rough = replace(plain, phonons=replace(plain.phonons, wall_roughness=5e-10))
    before, after = (evaluate_crystal(one, 300.0, 1e25, 5e-8, shape) for one in (plain, rough))
    assert after.electrical_conductivity == before.electrical_conductivity
    assert after.lattice_thermal_conductivity > 1.05 * before.lattice_thermal_conductivity
    grains = [evaluate_crystal(one, 300.0, 1e25, 5e-8) for one in (plain, rough)]
    assert grains[0].lattice_thermal_conductivity == grains[1].lattice_thermal_conductivity


@BOTH
def test_bits_do_not_depend_on_the_company(shape):
    plain = crystal(load_candidate("sige-n"))
    rough = replace(plain, phonons=replace(plain.phonons, wall_roughness=5e-10))
    t, d = np.linspace(300, 900, 70)[:, None], np.geomspace(2e-9, 1e-5, 90)  # more than one block
    together = evaluate_crystal(rough, t, 1e26, d, shape).lattice_thermal_conductivity
    for i, j in ((0, 0), (69, 89), (31, 7)):
        alone = evaluate_crystal(rough, t[i, 0], 1e26, d[j], shape).lattice_thermal_conductivity
        assert together[i, j] == alone


def test_a_candidate_file_may_state_the_roughness():
    made = {"smallest_grain": number(100, "nm"), "route": "etching", "wall_roughness": number(0.5, "nm")}
    assert read_as(Making, made, "here.toml").wall_roughness.si == near(5e-10, rel=1e-14)
    assert load_candidate("si-n").data.making.wall_roughness is None
    assert crystal(load_candidate("si-n")).phonons.wall_roughness is None


def number(value: float, unit: str) -> dict[str, object]:
    return {"value": value, "unit": unit, "spread": 0.1, "source": "ziman1960", "basis": "from memory"}
