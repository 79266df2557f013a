"""Subbands of a round wire: one subband in closed form, a few by quadrature, very many as the bulk."""

import itertools
import math
from functools import partial

import numpy as np
import pytest
from scipy import constants
from scipy.integrate import quad
from scipy.special import jn_zeros, jv

from legwright.physics import subbands
from legwright.physics.subbands import (
    WireBand,
    confinement_energy,
    subband_density,
    subband_edges,
    subband_integrals,
    subband_level,
    thin_wire_diameter,
)

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

EV, M_E, K_B, HBAR = constants.e, constants.m_e, constants.k, constants.hbar
KELVIN_VOLT = K_B / EV

BAND = WireBand(0.3 * M_E, 0.3 * M_E, 2.0, 9 * EV, 1.5e11)
LONG = WireBand(0.9 * M_E, 0.1 * M_E, 1.0, 9 * EV, 1.5e11)


def diameter_of(ratio: float, band: WireBand, temperature: float) -> float:
    """Where E_R is `ratio` k_B T."""
    return float(np.sqrt(2 * HBAR**2 / (band.across_mass * ratio * K_B * temperature)))


def zeros(highest: float) -> list[tuple[int, float, int]]:
    """(order, zero, degeneracy), straight from scipy's table."""
    return [(m, x, 2 if m else 1) for m in range(40) for x in jn_zeros(m, 20) if x < highest]


def per_length(band: WireBand, temperature: float) -> float:
    """States of one line within k_B T, both spins: √(2 m k_BT)/(πħ), 1/m."""
    return math.sqrt(2 * band.along_mass * K_B * temperature) / (math.pi * HBAR)


def test_edges_are_the_zeros_of_bessel_functions():
    # Abramowitz & Stegun (1964), table 9.5
    orders, zero = subband_edges(7.1)
    assert orders.tolist() == [0, 1, 2, 0, 3, 1]
    assert zero == near([2.4048256, 3.8317060, 5.1356223, 5.5200781, 6.3801619, 7.0155867], rel=2e-8)
    assert subband_edges(2.0)[1].size == 0


def test_edges_are_as_many_as_weyl_counts():
    # disc of radius 1: N(k) = k²/4 − k/2 + O(k^(2/3)) (Weyl; surface term after Ivrii 1980)
    for highest in (15.0, 30.0, 60.0):
        orders, _ = subband_edges(highest)
        count = np.sum(np.where(orders > 0, 2, 1))
        assert abs(count - (highest**2 / 4 - highest / 2)) < highest ** (2 / 3)


# ---- density


@pytest.mark.parametrize("ratio", [0.003, 0.009, 0.012, 0.1])
def test_few_carriers_fill_as_the_heat_kernel_of_the_disc(ratio):
    # Σ e^(−εχ²) = 1/4ε − √π/(4√ε) + 1/6 + √(πε)/128 + O(ε) (Kac 1966; Stewartson & Waechter 1971), on both sides of
    # the change from single subbands to the expansion
    t, eta = 300.0, -30.0
    kernel = 1 / (4 * ratio) - math.sqrt(math.pi / ratio) / 4 + 1 / 6 + math.sqrt(math.pi * ratio) / 128
    d = diameter_of(ratio, BAND, t)
    exact = 2 * per_length(BAND, t) * math.sqrt(math.pi) * math.exp(eta) * kernel / (math.pi * d**2 / 4)
    # the next term, O(ε), is 5e-6 of the whole at 0.012 and 1e-3 of a small whole at 0.1
    assert subband_density(BAND, t, eta, d) == near(exact, rel=1e-5 if ratio < 0.05 else 2e-3)


@pytest.mark.parametrize("eta", [-3.0, 5.0, 30.0, 60.0])
@pytest.mark.parametrize("ratio", [0.3, 2.0, 40.0])
def test_density_is_the_sum_of_lines(eta, ratio):
    t = 77.0
    d = diameter_of(ratio, LONG, t)
    total = 0.0
    for _, zero, twice in zeros(math.sqrt((max(eta, 0) + 45) / ratio) + 3):
        level = eta - zero**2 * ratio
        top = math.sqrt(max(level, 0.0) + 45)
        points = sorted({0.0, math.sqrt(max(level, 0.0)), math.sqrt(max(level - 6, 0.0)), top})
        total += twice * sum(
            quad(lambda u, level=level: 2 / (1 + math.exp(u * u - level)), a, b, epsabs=0, epsrel=1e-11)[0]
            for a, b in itertools.pairwise(points)
        )
    exact = per_length(LONG, t) * total / (math.pi * d**2 / 4)
    assert subband_density(LONG, t, eta, d) == near(exact, rel=1e-9)  # QUADPACK's pieces


@pytest.mark.parametrize("eta", [-5.0, 0.0, 10.0, 40.0])
def test_nothing_jumps_where_subbands_give_way_to_the_expansion(eta):
    ratio = (max(eta, 0) + 40) / 62**2
    d = diameter_of(ratio, BAND, 300.0)
    span = np.linspace(0.99, 1.01, 5) * d  # the change lies within: the last edge is a little below 62²
    density = subband_density(BAND, 300.0, eta, span)
    assert np.all(np.abs(np.diff(density, 2)) < 2e-4 * density[0])
    l0 = subband_integrals(BAND, 300.0, eta, span).l0
    assert np.all(np.abs(np.diff(l0, 2)) < 2e-4 * l0[0])


def test_thick_wires_hold_what_the_bulk_holds(exact_fermi):
    t, d = 300.0, 1e-3
    bulk = 2 * 2 * (0.3 * M_E * K_B * t / (2 * math.pi * HBAR**2)) ** 1.5
    for eta in (-6.0, 0.0, 15.0):
        assert subband_density(BAND, t, eta, d) == near(bulk * float(exact_fermi(0.5, eta)), rel=2e-5)  # 1/(kd)


@pytest.mark.parametrize("diameter", [1e-9, 6e-9, 3e-8, 3e-7, 1e-4])
def test_level_gives_the_density_back(diameter):
    density = np.geomspace(1e20, 1e28, 9)
    eta = subband_level(BAND, 300.0, density, diameter)
    assert subband_density(BAND, 300.0, eta, diameter) == near(density, rel=1e-9)
    assert np.all(np.diff(eta) > 0)
    with pytest.raises(ValueError, match="above 0"):
        subband_level(BAND, 300.0, [1e24, 0.0], diameter)


# ---- transport


def overlap(one: tuple[int, float, int], other: tuple[int, float, int]) -> float:
    """R² ∫ |φ_i|² |φ_j|² dA by QUADPACK."""

    def presence(state, r):
        return jv(state[0], state[1] * r) ** 2 / (math.pi * jv(state[0] + 1, state[1]) ** 2)

    return quad(lambda r: presence(one, r) * presence(other, r) * 2 * math.pi * r, 0, 1, epsrel=1e-11, limit=200)[0]


@pytest.mark.parametrize("eta", [10.0, 28.0, 45.0])
def test_one_subband_is_a_closed_form(eta, exact_fermi):
    # one line under acoustic phonons: W = (s − χ²)/f, so L_k are those of an acoustic band in three dimensions,
    # S = (k/e)(2F₁/F₀ − η*), with η* over the first edge; the second lies 28 k_BT over µ at least
    t, ratio = 20.0, 5.0
    d = diameter_of(ratio, LONG, t)
    first = zeros(3.0)[0]
    level = eta - first[1] ** 2 * ratio
    sums = subband_integrals(LONG, t, eta, d)
    f0, f1, f2 = (float(exact_fermi(j, level)) for j in range(3))
    seebeck = -sums.l1 / (EV * t * sums.l0)
    lorenz = (sums.l2 / sums.l0 - (sums.l1 / sums.l0) ** 2) / (EV * t) ** 2
    assert seebeck == near(-KELVIN_VOLT * (2 * f1 / f0 - level), rel=1e-8)
    assert lorenz == near(KELVIN_VOLT**2 * (6 * f2 / f0 - (2 * f1 / f0) ** 2), rel=1e-8)
    # σ = e² n τ/m along the wire: v² = 2ε/m, τ = 1/(C g f/R²) with g of the one line per length
    rate = math.pi * K_B * t * LONG.deformation_potential**2 / (HBAR * LONG.elastic_constant)
    rate *= overlap(first, first) / (d / 2) ** 2
    flow = 2 * K_B * t / LONG.along_mass / rate * f0 / (math.pi * d**2 / 4)
    assert sums.l0 == near(flow, rel=1e-8)


@pytest.mark.parametrize("level", [6.0, 15.0, 28.0, 45.0])
def test_several_subbands_are_what_plain_quadrature_says(level):
    # golden rule written out: each subband into each open one by its overlap; E_R = 0.8 k_BT
    t, ratio = 150.0, 0.8
    d = diameter_of(ratio, LONG, t)
    states = zeros(math.sqrt((level + 26) / ratio))
    overlaps = [[overlap(a, b) for b in states] for a in states]
    kt, area = K_B * t, math.pi * d**2 / 4
    unit = ratio * kt
    rate = math.pi * kt * LONG.deformation_potential**2 / (HBAR * LONG.elastic_constant) / (d / 2) ** 2

    def spectral(energy):
        open_ = [(i, energy - x * x * unit, g) for i, (_, x, g) in enumerate(states) if energy > x * x * unit]
        lines = {i: g * math.sqrt(2 * LONG.along_mass / e) / (math.pi * HBAR) for i, e, g in open_}
        total = 0.0
        for i, e, _ in open_:
            slowed = rate * sum(overlaps[i][j] * lines[j] for j in lines)
            total += lines[i] * 2 * e / LONG.along_mass / slowed
        return total / area

    edges = [x * x * ratio for _, x, _ in sorted(states, key=lambda state: state[1])]
    marks = sorted({*edges, *(level + q for q in (-8, 0, 8) if level + q > edges[0]), level + 25})
    sums = [0.0, 0.0, 0.0]
    for a, b in itertools.pairwise(marks):
        for k in range(3):
            sums[k] += quad(  # E = a + u² takes the singular states at an edge away
                lambda u, a=a, k=k: (
                    spectral((a + u * u) * kt)
                    * ((a + u * u - level) * kt) ** k
                    * 2
                    * u
                    / (4 * math.cosh((a + u * u - level) / 2) ** 2)
                ),
                0,
                math.sqrt(b - a),
                epsabs=0,
                epsrel=1e-8,
                limit=200,
            )[0]
    found = subband_integrals(LONG, t, level, d)
    # W as a series of degree 11 between edges, some of which lie close together: SERIES
    assert found.l0 == near(sums[0], rel=SERIES)
    assert found.l1 == near(sums[1], rel=SERIES, abs=SERIES * sums[0] * kt)
    assert found.l2 == near(sums[2], rel=SERIES)


SERIES = 1e-5


def test_transport_stops_for_a_moment_where_a_subband_opens():
    # at an edge the new subband takes all that is scattered: W falls to nothing just above it
    wire = subbands._wire()
    piece = np.arange(3, 40)
    just_above = wire.carried(wire.edges[piece] * (1 + 1e-12), piece)
    below = wire.carried(wire.edges[piece], piece - 1)
    # nothing but the error of a series whose edge lies close over another: 2 % of W in a vanishing interval
    assert np.all(just_above < 0.02 * below)


@pytest.mark.parametrize("window", [(1500.0, 2500.0), (2500.0, 3800.0)])
def test_the_last_subbands_already_follow_the_law_beyond_them(window):
    wire = subbands._wire()
    s = np.linspace(*window, 40_001)
    piece = np.searchsorted(wire.edges, s) - 1
    # the mean over many edges, against (π/3)(s − a √s)
    assert np.mean(wire.carried(s, piece)) / np.mean(wire.beyond(s)) == near(1, abs=3e-3)
    # Weyl's count asks a → 3π/4 for √(s − χ²) over all subbands, were the rate exactly that of the bulk
    assert wire.tail == near(3 * math.pi / 4, rel=0.15)


@pytest.mark.parametrize("eta", [-4.0, 0.0, 10.0])
def test_the_bulk_comes_back(eta, exact_fermi):
    # at the same density, acoustic band: σ and S within 1 % from kd = 140 on (k of k_BT, or of the Fermi level),
    # and closer as 1/d
    t = 300.0
    kt = K_B * t
    f_half, f0, f1, f2 = (float(exact_fermi(j, eta)) for j in (0.5, 0, 1, 2))
    density = 2 * 2 * (0.3 * M_E * kt / (2 * math.pi * HBAR**2)) ** 1.5 * f_half
    wave = math.sqrt(2 * 0.3 * M_E * kt * max(eta, 1.0)) / HBAR
    d = np.array([140.0, 1400.0, 14000.0]) / wave
    level = subband_level(BAND, t, density, d)
    sums = subband_integrals(BAND, t, level, d)
    capacity = math.pi * kt * BAND.deformation_potential**2 / (HBAR * BAND.elastic_constant)
    bulk = 2 * 2 * kt / (3 * 0.3 * M_E * capacity) * f0  # g v_x² τ = 2E/(3 m C) and its window
    seebeck = -KELVIN_VOLT * (2 * f1 / f0 - eta)
    lorenz = KELVIN_VOLT**2 * (6 * f2 / f0 - (2 * f1 / f0) ** 2)
    misses = np.abs(
        [
            sums.l0 / bulk - 1,
            -sums.l1 / (EV * t * sums.l0) / seebeck - 1,
            (sums.l2 / sums.l0 - (sums.l1 / sums.l0) ** 2) / (EV * t) ** 2 / lorenz - 1,
        ]
    )
    assert np.all(misses < np.array([0.01, 0.001, 0.0001]))


def test_thin_wires_have_a_larger_seebeck_coefficient_at_one_density():
    # the gain that Hicks & Dresselhaus (1993) proposed
    d = np.array([1e-6, 2e-8, 8e-9, 5e-9])
    sums = subband_integrals(BAND, 300.0, subband_level(BAND, 300.0, 2e25, d), d)
    size = np.abs(sums.l1 / sums.l0)
    assert size[-1] > 1.2 * size[0]


def test_points_broadcast_and_do_not_know_one_another():
    t, eta, d = (
        np.array([100.0, 400.0])[:, None, None],
        np.array([-2.0, 8.0])[:, None],
        np.array([4e-9, 5e-8, 1e-5]),
    )
    whole = subband_integrals(BAND, t, eta, d)
    assert whole.l0.shape == (2, 2, 3)
    level = subband_level(BAND, t, 1e25, d)
    for i, j, k in ((0, 0, 0), (1, 1, 1), (0, 1, 2)):
        alone = subband_integrals(BAND, t[i, 0, 0], eta[j, 0], d[k])
        assert alone.l0 == whole.l0[i, j, k]
        assert alone.l2 == whole.l2[i, j, k]
        assert subband_level(BAND, t[i, 0, 0], 1e25, d[k]) == level[i, 0, k]


def test_criterion_is_the_first_gap():
    d = thin_wire_diameter(300.0, 0.3 * M_E)
    gap = (jn_zeros(1, 1)[0] ** 2 - jn_zeros(0, 1)[0] ** 2) * confinement_energy(d, 0.3 * M_E)
    assert gap == near(K_B * 300, rel=1e-12)
    assert thin_wire_diameter(75.0, 0.3 * M_E) == near(2 * float(d), rel=1e-14)


@pytest.mark.parametrize("diameter", [0.0, -5e-9, float("nan"), [5e-9, -5e-9]])
def test_a_wire_without_a_diameter_is_refused(diameter):
    for refused in (
        lambda: confinement_energy(diameter, M_E),
        lambda: subband_density(BAND, 300.0, 0.0, diameter),
        lambda: subband_integrals(BAND, 300.0, 0.0, diameter),
        lambda: subband_level(BAND, 300.0, 1e25, diameter),
    ):
        with pytest.raises(ValueError, match="the diameter must be above 0"):
            refused()


@pytest.mark.parametrize("eta", [float("inf"), float("-inf"), float("nan"), [0.0, float("inf")]])
def test_a_level_that_is_not_finite_is_refused(eta):
    for sums in (subband_density, subband_integrals):
        with pytest.raises(ValueError, match="η must be finite"):
            sums(BAND, 300.0, eta, 8e-9)
