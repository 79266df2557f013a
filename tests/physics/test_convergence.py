"""How fast each quadrature converges, measured: halving the step or doubling the nodes.

The energy mesh stands in test_fermi.py, the modes of the lattice in test_lattice.py, the march along a leg in
tests/leg/test_balance.py; here is the rest.
"""

from __future__ import annotations

import math
from functools import cache

import mpmath
import numpy as np
import pytest
from numpy.polynomial.legendre import leggauss
from scipy import constants

from legwright.physics import boundaries, rough_walls, subbands
from legwright.physics.spectra import PathMesh, through

KNUDSEN = (0.1, 1.0, 30.0)


@cache
def film_exact(knudsen: float) -> float:
    """Fuchs (1938) for a diffuse film, by mpmath to 20 digits."""
    with mpmath.workdps(25):
        kn = mpmath.mpf(knudsen)
        lost = mpmath.quad(lambda u: (1 - u**2) * u * (1 - mpmath.exp(-1 / (kn * u))), [0, 0.01, 0.03, 0.1, 0.3, 1])
        return float(1 - mpmath.mpf(3) / 2 * kn * lost)


def double_exponential_errors(paths, knudsen: float, exact: float, counts: tuple[int, ...]) -> list[float]:
    found = []
    for count in counts:
        angle, weight = boundaries._double_exponential(count)
        x, share = paths(angle, weight)
        kept = boundaries._path_kept(x / knudsen, 0.0)
        found.append(abs(float(np.sum(share * kept)) / exact - 1))
    return found


def film_nodes(angle, weight):
    return 1 / np.sin(angle), 1.5 * np.cos(angle) ** 3 * weight


def wire_nodes(angle, weight):
    theta, beta = angle[:, None], angle[None, :]
    share = (
        (12 / np.pi) * np.cos(theta) ** 2 * np.sin(theta) * np.cos(beta) ** 2 * weight[:, None] * weight[None, :]
    )
    return (np.cos(beta) / np.sin(theta)).ravel(), share.ravel()


@pytest.mark.parametrize("knudsen", KNUDSEN)
def test_film_integral_gains_digits_in_proportion_to_its_nodes(knudsen):
    """Double-exponential rule (Takahasi & Mori 1974): the error falls as exp(−c N/ln N), so twice the nodes nearly
    square it: by the power 1.6 at least, also with the layer of glancing paths at Kn = 30."""
    errors = double_exponential_errors(film_nodes, knudsen, film_exact(knudsen), (21, 41, 81, 321))
    assert errors[0] > 1e-6
    assert errors[1] < errors[0] ** 1.6
    assert errors[2] < max(errors[1] ** 1.6, 1e-13)
    assert errors[3] < 3e-14  # what the program uses: the rounding of 321 terms


@pytest.mark.parametrize("knudsen", KNUDSEN)
def test_wire_integral_gains_digits_in_proportion_to_its_nodes(knudsen):
    exact = float(boundaries._integrate(boundaries._wire_paths, np.array([knudsen]), np.array([0.0]))[0])
    errors = double_exponential_errors(wire_nodes, knudsen, exact, (21, 41, 81))
    assert errors[0] > 1e-6
    assert errors[1] < errors[0] ** 1.6
    assert errors[2] < 1e-11


@pytest.mark.parametrize("shape", ["film", "wire"])
def test_rough_wall_trapezoids_square_their_error_when_the_step_is_halved(shape, monkeypatch):
    """Analytic in a strip and decaying at both ends (Trefethen & Weideman 2014): e(h/2) ≈ e(h)²."""
    knudsen, rough = np.array(KNUDSEN), np.array([0.5, 2.0])

    def with_step(step: float) -> np.ndarray:
        monkeypatch.setattr(rough_walls, "_STEP", step)
        nodes = getattr(rough_walls, f"_{shape}_paths").__wrapped__()
        monkeypatch.setitem(rough_walls._PATHS, shape, lambda: nodes)
        return rough_walls._integrate(shape, knudsen, rough)

    exact = with_step(0.0625)
    coarse, fine = (float(np.max(np.abs(with_step(step) / exact - 1))) for step in (1.0, 0.5))
    assert 1e-7 < coarse < 0.05
    # a strip's width differs between the factors of the integrand: the exponent of the fall is 1.5 at least
    assert fine < coarse**1.5
    assert float(np.max(np.abs(with_step(0.25) / exact - 1))) < 1e-8


def test_gathering_by_path_is_of_the_order_of_its_nodes():
    """Chebyshev interpolation with 12 nodes on a piece: the error falls as the 12th power of its width."""
    rng = np.random.default_rng(1)
    path = np.exp(rng.uniform(np.log(1e-9), np.log(1e-5), 400))
    sizes = np.geomspace(1e-9, 1e-5, 41)

    def error(pieces: int) -> float:
        mesh = PathMesh(1e-10, 1e-4, pieces)
        gathered = mesh.gather(path, np.ones((1, path.size)))
        found = through(gathered, 1 / (1 + mesh.paths / sizes[:, None]))[:, 0]
        exact = np.sum(1 / (1 + path / sizes[:, None]), axis=-1)
        return float(np.max(np.abs(found / exact - 1)))

    coarse, fine = error(3), error(6)
    order = math.log2(coarse / fine)
    # 12 in the limit of narrow pieces; the poles of 1/(1 + Λ/d) at ln Λ = ln d ± iπ make it less on wide ones
    assert 7 < order < 13
    assert error(12) < 3e-10


@pytest.mark.parametrize("level", [0.5, 6.0])
def test_subband_energy_integral_gains_digits_with_its_nodes(level, monkeypatch):
    """Gauss–Legendre in √(E − edge) between edges, where −∂f/∂E is analytic: geometric in the nodes."""
    m = 0.2 * constants.m_e
    band = subbands.WireBand(m, m, 1.0, 9 * constants.e, 1.5e11)

    def with_nodes(count: int) -> float:
        monkeypatch.setattr(subbands, "_NODES", count)
        return float(subbands.subband_integrals(band, 300.0, level, 8e-9).l0)

    exact = with_nodes(40)
    errors = [abs(with_nodes(count) / exact - 1) for count in (2, 4, 8)]
    assert errors[1] < 0.05 * errors[0]
    assert errors[2] < max(errors[1] ** 1.5, 1e-12)
    assert abs(with_nodes(12) / exact - 1) < 1e-10


def test_glass_integral_needs_no_more_nodes_than_it_has(make_phonons, monkeypatch):
    """Cahill's kernel is analytic: 24 Gauss nodes are at rounding from 30 K up, and 6 are not."""
    from legwright.physics import lattice

    t = np.array([30.0, 100.0, 300.0, 1000.0])
    found = lattice.amorphous_minimum(make_phonons(), t)
    errors = {}
    for count in (6, 12, 48):
        monkeypatch.setattr(lattice, "_gauss", lambda _, count=count: leggauss(count))
        errors[count] = float(np.max(np.abs(lattice.amorphous_minimum(make_phonons(), t) / found - 1)))
    assert errors[12] < errors[6] ** 1.3
    assert errors[6] > 1e-6
    assert errors[48] < 1e-9
