"""Wires, films and grains against mpmath and scipy forms of the published integrals that share no code."""

import math
from dataclasses import replace
from functools import cache, partial

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import dblquad, quad

from legwright.physics.boundaries import (
    diffuse_walls,
    film_suppression,
    film_suppression_rough,
    grain_mean_free_path,
    grain_suppression,
    wire_suppression,
    wire_suppression_rough,
)
from legwright.physics.carriers import held_back
from legwright.physics.lattice import PATHS, HeatSpectrum, conductivity_at, modes, wall_suppression

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

BOTH = pytest.mark.parametrize("suppression", [film_suppression, wire_suppression])


def relative_miss(found: object, exact: mpmath.mpf) -> float:
    return abs(float(mpmath.mpf(float(found)) / exact - 1))


@cache
def fuchs(knudsen: float, specularity: float) -> mpmath.mpf:
    """Fuchs (1938), Sondheimer (1952) equation for partly specular films; exponential integrals if diffuse."""
    with mpmath.workdps(40):
        k, p = 1 / mpmath.mpf(knudsen), mpmath.mpf(specularity)
        if specularity == 0:
            return 1 - 3 / (8 * k) + 3 / (2 * k) * (mpmath.expint(3, k) - mpmath.expint(5, k))
        breaks = sorted({mpmath.mpf(0), mpmath.mpf(1)} | {k * s for s in (0.03, 0.1, 0.3, 1, 3) if k * s < 1})
        lost = mpmath.quad(
            lambda mu: (mu - mu**3) * (1 - mpmath.exp(-k / mu)) / (1 - p * mpmath.exp(-k / mu)), breaks
        )
        return 1 - 3 / (2 * k) * (1 - p) * lost


def struve_gap(x: mpmath.mpf) -> mpmath.mpf:
    """I₁(x) − L₁(x) = (2x/π) ∫₀¹ (1 − u²)^½ e^(−xu) du (DLMF 11.5.4); its asymptotic series (11.6.1) from 40 on."""
    if x < 40:
        with mpmath.workdps(60):
            return mpmath.besseli(1, x) - mpmath.struvel(1, x)
    terms = (
        (-1) ** k * mpmath.gamma(k + mpmath.mpf(1) / 2) * (x / 2) ** (-2 * k) * mpmath.rgamma(mpmath.mpf(3) / 2 - k)
        for k in range(20)
    )
    return sum(terms) / mpmath.pi


@cache
def dingle(knudsen: float) -> mpmath.mpf:
    """Dingle (1950) for a diffuse round wire, its inner integral done as a Struve function."""
    with mpmath.workdps(30):
        k = 1 / mpmath.mpf(knudsen)
        breaks = sorted({mpmath.mpf(0), mpmath.pi / 2} | {s * min(k, mpmath.mpf(1)) for s in (0.03, 0.1, 0.3, 1)})
        lost = mpmath.quad(
            lambda a: (mpmath.cos(a) * mpmath.sin(a)) ** 2 * struve_gap(k / mpmath.sin(a)) if a > 0 else 0, breaks
        )
        return 1 - 6 / k * lost


KNUDSEN = [1e-4, 0.03, 0.5, 1.0, 4.0, 10.0, 60.0]


def test_film_and_wire_at_one_mean_free_path():
    # mpmath to fifteen digits, and the printed six: Fuchs–Sondheimer 0.683857, Dingle 0.492863
    assert relative_miss(film_suppression(1.0), fuchs(1.0, 0.0)) < 1e-13
    assert relative_miss(wire_suppression(1.0), dingle(1.0)) < 1e-13
    assert round(float(film_suppression(1.0)), 6) == 0.683857
    assert round(float(wire_suppression(1.0)), 6) == 0.492863


@pytest.mark.parametrize("specularity", [0.0, 0.3, 0.6, 0.9, 0.99])
@pytest.mark.parametrize("knudsen", [*KNUDSEN, 1e4])
def test_film_matches_mpmath(knudsen, specularity):
    # both routes: the table (one specularity) and the integral (an array); double precision, some rounding
    exact = fuchs(knudsen, specularity)
    assert relative_miss(film_suppression(knudsen, specularity), exact) < 1e-13
    assert relative_miss(film_suppression(knudsen, [specularity])[0], exact) < 1e-13


@pytest.mark.parametrize("knudsen", [*KNUDSEN, 1e3, 1e5, 1e7])
def test_diffuse_wire_matches_mpmath(knudsen):
    exact = dingle(knudsen)
    # 8e-14 at worst (measured), in thin wires
    assert relative_miss(wire_suppression(knudsen), exact) < 2e-13
    assert relative_miss(wire_suppression(knudsen, [0.0])[0], exact) < 2e-13


@pytest.mark.parametrize("specularity", [0.3, 0.6, 0.9])
@pytest.mark.parametrize("knudsen", [0.1, 1.0, 10.0])
def test_partly_specular_wire_matches_scipy(knudsen, specularity):
    # Dingle (1950): the share lost is Σ n (1−p)² p^(n−1) e^(−n x), here summed in closed form; the wall-to-wall
    # path is x = sin a/(Kn sin b). dblquad is asked for 1e-11
    def lost(b: float, a: float) -> float:
        e = math.exp(-math.sin(a) / (knudsen * math.sin(b)))
        passed = (1 - specularity) ** 2 * e / (1 - specularity * e) ** 2
        return 12 / math.pi * (math.cos(a) * math.cos(b)) ** 2 * math.sin(b) * passed

    exact = 1 - dblquad(lost, 0, math.pi / 2, 0, math.pi / 2, epsabs=1e-11, epsrel=1e-11)[0]
    assert float(wire_suppression(knudsen, specularity)) == near(exact, abs=1e-10)
    assert float(wire_suppression(knudsen, [specularity])[0]) == near(exact, abs=1e-10)


@BOTH
def test_mirrors_and_empty_space_do_not_scatter(suppression):
    knudsen = np.array([0.0, 1e-9, 1.0, 1e9])
    assert np.array_equal(suppression(knudsen, 1.0), np.ones(4))
    assert np.array_equal(suppression(knudsen, np.ones(4)), np.ones(4))
    # the rule's weights add up to 1 but for rounding
    assert float(suppression(0.0, 0.2)) == near(1, abs=1e-14)


@pytest.mark.parametrize(("suppression", "slope"), [(film_suppression, 3 / 8), (wire_suppression, 3 / 4)])
def test_thick_limit(suppression, slope):
    # 1 − ⅜ Kn (Sondheimer 1952) and 1 − ¾ Kn (Dingle 1950); times (1 − p) for partly specular walls.
    # The next term of the wire is of order Kn³ (Dingle), of the film exponentially small
    for p in (0.0, 0.5):
        assert (1 - float(suppression(1e-4, p))) / 1e-4 == near(slope * (1 - p), rel=1e-7)


def test_thin_film_limit():
    # Sondheimer (1952): ¾ (ln Kn + 1 − γ)/Kn, 1 − γ = 0.4228; the next term is of order ln Kn/Kn² of it
    kn = np.array([1e4, 1e6])
    limit = 0.75 * (np.log(kn) + 1 - np.euler_gamma) / kn
    assert film_suppression(kn) == near(limit, rel=2e-4)
    assert film_suppression(1e6) == near(limit[1], rel=2e-6)


@pytest.mark.parametrize("specularity", [0.0, 0.3, 0.8])
def test_thin_wire_limit(specularity):
    # Casimir (1938), Ziman (1960): (1+p)/(1−p)/Kn; corrections fall as ln Kn/Kn
    limit = (1 + specularity) / (1 - specularity)
    misses = [float(wire_suppression(kn, specularity)) * kn / limit - 1 for kn in (1e4, 1e6)]
    assert abs(misses[0]) < 0.01
    assert abs(misses[1]) < abs(misses[0]) / 50


ENDS = np.exp([-14.0, 46.0])


@BOTH
@pytest.mark.parametrize("specularity", [0.0, 0.45, 0.97])
def test_table_agrees_with_the_integral_also_past_its_ends(suppression, specularity):
    # a scalar specularity is looked up, an array is integrated; ln Kn −14 … 46 is tabled, beyond it is not.
    # Pieces of degree 9, half a unit of ln Kn wide, are 9e-14 off at worst (measured)
    kn = np.concatenate([np.geomspace(1e-9, 1e19, 501), ENDS * (1 - 1e-12), ENDS * (1 + 1e-12)])
    tabled, integrated = suppression(kn, specularity), suppression(kn, np.full(kn.size, specularity))
    assert np.max(np.abs(tabled / integrated - 1)) < 2e-13


@BOTH
@pytest.mark.parametrize("specularity", [0.0, 0.6])
def test_no_step_where_pieces_of_the_table_meet(suppression, specularity):
    # neighbours 2e-12 apart in Kn differ by that much at most, and by the error of either piece
    seams = np.exp(np.arange(-14.0, 46.1, 0.5))[:, None] * (1 + 1e-12 * np.array([-1, 1]))
    left, right = suppression(seams, specularity).T
    assert np.max(np.abs(right / left - 1)) < 2e-12 + 2e-13


@BOTH
def test_short_paths_meet_the_series_without_a_step(suppression):
    # inside, 1 − (1 − e⁻ˣ)/x is expanded below x = 1e-2: sweep Kn so that most paths cross it
    kn = np.linspace(90.0, 110.0, 401)
    for p in (0.0, 0.6):
        curve = np.log(suppression(kn, np.full(kn.size, p)))
        third = np.diff(curve, 3)  # smooth: about 2 (0.05/100)³ = 2.5e-10; a step would stand in one place
        assert np.max(np.abs(third)) < 4e-10


@BOTH
@given(
    log_kn=st.lists(st.floats(-16, 44), min_size=2, max_size=8),
    p=st.lists(st.floats(0, 1), min_size=2, max_size=4),
)
@settings(derandomize=True, deadline=None, max_examples=40)
def test_more_path_hurts_and_more_mirror_helps(suppression, log_kn, p):
    kn, mirrors = np.exp(np.sort(log_kn)), np.sort(p)
    grid = suppression(kn, mirrors[:, None])
    rounding = 1e-13
    assert np.all((grid > 0) & (grid <= 1))
    assert np.all(np.diff(grid, axis=1) <= rounding)
    assert np.all(np.diff(grid, axis=0) >= -rounding)
    assert np.all(np.diff(suppression(kn, 0.25)) <= rounding)


@BOTH
@pytest.mark.parametrize(
    ("knudsen", "specularity"),
    [(-1e-9, 0.0), (float("nan"), 0.0), (1.0, -0.1), (1.0, 1.1), (1.0, float("nan")), ([1.0, -1.0], [0.0, 0.5])],
)
def test_outside_the_range_is_refused(suppression, knudsen, specularity):
    with pytest.raises(ValueError, match="specularity within 0"):
        suppression(knudsen, specularity)


def mayadas_shatzkes(a: float) -> mpmath.mpf:
    """3 [1/3 − a/2 + a² − a³ ln(1 + 1/a)] (Mayadas & Shatzkes 1970) with digits to spare for a ≤ 1e12."""
    with mpmath.workdps(90):
        x = mpmath.mpf(a)
        return 3 * (mpmath.mpf(1) / 3 - x / 2 + x**2 - x**3 * mpmath.log(1 + 1 / x))


@pytest.mark.parametrize("a", [1e-9, 1e-3, 0.1, 1.0, 3.0, 7.99, 8 - 1e-12, 8.0, 8 + 1e-12, 8.5, 30.0, 1e4, 1e12])
def test_grains_match_mpmath_on_both_sides_of_the_switch(a):
    # R = ½ makes a = Λ/d; below 8 the closed form cancels to a² ε/F = 1e-13 × 8
    assert relative_miss(grain_suppression(a, 1.0, 0.5), mayadas_shatzkes(a)) < 1e-12


def test_grains_from_reflection():
    # a = (Λ/d) R/(1 − R): 3 × 0.2/0.8 = 0.75
    assert relative_miss(grain_suppression(30e-9, 10e-9, 0.2), mayadas_shatzkes(0.75)) < 1e-12


@pytest.mark.parametrize("reflection", [1.0, 1.5, -0.1, float("nan"), [0.5, 1.0]])
def test_grains_refuse_what_reflects_all_or_less_than_nothing(reflection):
    with pytest.raises(ValueError, match="reflection must lie within"):
        grain_suppression(1e-8, 1e-8, reflection)


def test_walls_are_of_a_wire_or_a_film(make_phonons):
    assert diffuse_walls("wire") is wire_suppression
    assert diffuse_walls("film") is film_suppression
    path, rough = np.array([1e-8]), replace(make_phonons(), wall_roughness=1e-9)
    mesh, size = modes(make_phonons()), np.array(1e-8)
    spectrum = HeatSpectrum(np.ones((3, PATHS.paths.size)), np.ones(()))
    for refused in (
        lambda: diffuse_walls("wier"),
        lambda: held_back(path, path, "wier", 0.3),
        lambda: wall_suppression(make_phonons(), mesh, "wier"),
        lambda: wall_suppression(rough, mesh, "wier"),
        lambda: wall_suppression(make_phonons(), mesh, "grain"),
        lambda: conductivity_at(spectrum, size, "wier"),
    ):
        with pytest.raises(ValueError, match="the shape must be"):
            refused()


def test_grains_without_reflection_or_without_end_do_nothing():
    assert grain_suppression(1e-6, 1e-9, 0.0) == 1
    assert grain_suppression(1e-6, np.inf, 0.6) == 1
    assert grain_suppression(0.0, 1e-9, 0.6) == 1
    # first order in R: 1 − (3/2) a
    assert (1 - grain_suppression(1.0, 1.0, 1e-6)) / 1e-6 == near(1.5, rel=1e-5)


def test_small_grains_keep_three_quarters_over_a():
    # expansion of the same formula: F = 3/(4a) − 3/(5a²) + …
    assert grain_suppression(1e6, 1.0, 0.5) * 1e6 == near(0.75, rel=1e-6)


@given(
    log_a=st.lists(st.floats(-20, 25), min_size=2, max_size=10),
    reflection=st.floats(0.01, 0.99),
)
@settings(derandomize=True, deadline=None, max_examples=60)
def test_grain_suppression_falls_with_mean_free_path(log_a, reflection):
    factor = grain_suppression(np.exp(np.sort(log_a)), 1.0, reflection)
    assert np.all((factor > 0) & (factor <= 1))
    assert np.all(np.diff(factor) <= 1e-12)


@pytest.mark.parametrize(("exponent", "growth"), [(0.0, 1.0), (0.5, 2.0), (1.0, 4.0)])
def test_grain_boundary_path_grows_with_wavelength(exponent, growth):
    # Λ_gb = c d (ω_max/ω)^s (Wang et al. 2011): a quarter of the frequency is a factor 4^s; grey at s = 0
    long, short = grain_mean_free_path(80e-9, [0.1, 0.4], exponent, 0.7)
    assert long / short == near(growth, rel=1e-14)
    assert grain_mean_free_path(80e-9, 1.0, exponent, 0.7) == near(56e-9, rel=1e-14)
    assert grain_mean_free_path(np.inf, 0.1, exponent) == np.inf


# ---- rough walls: p(θ) = exp(−4 q²η² cos²θ) inside the integral (Ziman 1960; Soffer 1967)

ROUGH = {"film": (film_suppression_rough, film_suppression), "wire": (wire_suppression_rough, wire_suppression)}


@pytest.mark.parametrize("which", ROUGH)
@pytest.mark.parametrize("knudsen", [0.01, 1.0, 100.0])
def test_rough_walls_between_mirror_and_diffuse(which, knudsen):
    rough, plain = ROUGH[which]
    factors = rough(knudsen, [0.0, 1e-4, 0.03, 0.3, 1.0, 3.0, 1e4])
    assert factors[0] == near(1, rel=1e-12)
    assert np.all(np.diff(factors) < 0)
    assert factors[-1] > plain(knudsen)
    # grazing waves, cos²θ < 1e-8, are still mirrored at qη = 1e4: a share of about cos θ
    assert factors[-1] == near(plain(knudsen), rel=2e-2)


@pytest.mark.parametrize("q_eta", [0.2, 1.0])
def test_rough_film_matches_plain_quadrature(q_eta):
    knudsen = 3.0

    def inner(mu: float) -> float:
        p, fall = math.exp(-4 * q_eta**2 * mu**2), math.exp(-1 / (knudsen * mu))
        return 1.5 * (1 - mu**2) * (1 - knudsen * mu * (1 - p) * (1 - fall) / (1 - p * fall))

    exact = quad(inner, 0, 1, epsabs=0, epsrel=1e-12, limit=400)[0]
    assert film_suppression_rough(knudsen, q_eta) == near(exact, rel=1e-10)  # quad's own 1e-12, with room


@pytest.mark.parametrize("which", ROUGH)
def test_averaging_the_mirror_share_first_is_far_off(which):
    """At qη = 1 in a thin wire or film the averaged p gives about half (trap of the Ziman form)."""
    rough, plain = ROUGH[which]
    mu = np.linspace(0, 1, 20001)
    averaged = float(np.trapezoid(2 * mu * np.exp(-4 * mu**2), mu))  # weighed by what meets the wall
    assert rough(100.0, 1.0) > 1.5 * plain(100.0, averaged)


@pytest.mark.parametrize("bad", [(-1.0, 1.0), (1.0, -1.0), (math.nan, 1.0)])
@pytest.mark.parametrize("which", ROUGH)
def test_rough_walls_refuse_what_cannot_be(which, bad):
    with pytest.raises(ValueError, match="must be ≥ 0"):
        ROUGH[which][0](*bad)
