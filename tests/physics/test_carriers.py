"""Carriers of model bands against closed forms, mpmath and plain quadrature that share no code with the source."""

import itertools
import math
from collections.abc import Callable
from dataclasses import replace
from functools import partial

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import constants
from scipy.integrate import quad
from scipy.optimize import brentq

from legwright.physics import carriers, moments
from legwright.physics.fermi import softplus_mesh

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

EV, M_E, HBAR, K_B = constants.e, constants.m_e, constants.hbar, constants.k
KELVIN_VOLT = constants.k / constants.e

#: the energy mesh leaves 4e-10 in each integral, up to 2.5 times as much near the edge (test_fermi.py);
#: Seebeck coefficient and Lorenz number are differences of two or three such integrals, which weigh the ends of
#: the window more: 1.2e-8 at worst (measured)
MESH = 2e-8


def conduction_states(mass: float, temperature: float) -> float:
    """N_c = 2 (m k_B T/2πħ²)^(3/2), 1/m³ (any textbook)."""
    return 2 * (mass * K_B * temperature / (2 * math.pi * HBAR**2)) ** 1.5


def coefficients(found: tuple, temperature: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """σ, S and Lorenz number of all bands together."""
    _, sums = found
    l0, l1, l2 = (np.sum(part, axis=-1) for part in (sums.l0, sums.l1, sums.l2))
    sigma = moments.conductivity(l0)
    heat = moments.electronic_heat(l0, l1, l2, temperature)
    return sigma, moments.seebeck(l0, l1, temperature), heat / (sigma * temperature)


# ---- one parabolic band, acoustic scattering: closed forms

LEVELS = [-12.0, -4.0, -1.0, 0.0, 2.0, 9.0, 40.0]


@pytest.mark.parametrize("eta", LEVELS)
def test_acoustic_band_follows_its_closed_forms(eta, make_electrons, solve, exact_fermi):
    # Ravich, Efimova & Smirnov (1970), r = −1/2: S = (k/e)(2F₁/F₀ − η), L = (k/e)²[6F₂/F₀ − (2F₁/F₀)²]
    t = 400.0
    slope, f_half, f0, f1, f2 = (float(exact_fermi(j, eta)) for j in (-0.5, 0.5, 0, 1, 2))
    density = conduction_states(0.8 * M_E, t) * f_half
    electrons = make_electrons()
    filling, sums = solve(electrons, t, density)
    _, seebeck, lorenz = coefficients((filling, sums), t)
    assert filling.eta[0] == near(eta, abs=2e-9 * f_half / slope)  # 1e-9 in the density
    assert seebeck == near(-KELVIN_VOLT * (2 * f1 / f0 - eta), rel=MESH)
    assert lorenz == near(KELVIN_VOLT**2 * (6 * f2 / f0 - (2 * f1 / f0) ** 2), rel=MESH)


def test_acoustic_band_at_its_edge(make_electrons, solve, exact_fermi):
    # closed form by mpmath: η = 0 gives 204.50 µV/K and 1.6130e-8 W Ω/K²
    t = 300.0
    density = conduction_states(0.8 * M_E, t) * float(exact_fermi(0.5, 0))
    _, seebeck, lorenz = coefficients(solve(make_electrons(), t, density), t)
    assert round(float(seebeck) * 1e6, 2) == -204.50
    assert f"{float(lorenz):.4e}" == "1.6130e-08"


def test_lorenz_number_at_both_ends(make_electrons, solve):
    # CODATA: 2 (k/e)² = 1.4852e-8 for few carriers, (π²/3)(k/e)² = 2.4430e-8 for many
    assert f"{2 * KELVIN_VOLT**2:.4e}" == "1.4852e-08"
    assert f"{math.pi**2 / 3 * KELVIN_VOLT**2:.4e}" == "2.4430e-08"
    few = coefficients(solve(make_electrons(), 1000.0, 1e16), 1000.0)[2]
    many = coefficients(solve(make_electrons(), 2.0, 1e29), 2.0)[2]
    assert few == near(2 * KELVIN_VOLT**2, rel=MESH)
    assert many == near(math.pi**2 / 3 * KELVIN_VOLT**2, rel=MESH)


@pytest.mark.parametrize("eta", [-12.0, 0.0, 20.0])
def test_acoustic_mobility_is_that_of_bardeen_and_shockley(eta, make_electrons, solve, exact_fermi):
    # µ = (2 √2π/3) e ħ⁴ C_l/(m_b^(3/2) m_I (k_B T)^(3/2) Ξ²) for few carriers (Bardeen & Shockley 1950, with
    # the inertial mass apart from the density-of-states mass of a valley); × F₀/F_½ for many
    t, electrons = 300.0, make_electrons()
    f_half, f0 = (float(exact_fermi(j, eta)) for j in (0.5, 0))
    density = conduction_states(0.8 * M_E, t) * f_half
    valley_mass = 0.8 * M_E / 4 ** (2 / 3)
    few = 2 * math.sqrt(2 * math.pi) / 3 * EV * HBAR**4 * 1.5e11
    few /= valley_mass**1.5 * 0.25 * M_E * (K_B * t) ** 1.5 * (9 * EV) ** 2
    sigma, _, _ = coefficients(solve(electrons, t, density), t)
    assert sigma / (EV * density) == near(few * f0 / f_half, rel=MESH)


def test_alloy_mobility_alone(make_electrons, solve):
    # τ ∝ ε^(−1/2) too: µ = (4/3√π) e τ(k_B T)/m_I, and it falls as T^(−1/2) (Makowski & Glicksman 1973)
    electrons = make_electrons(
        acoustic_weight=0.0, alloy_fraction=0.3, alloy_volume=2e-29, alloy_potential=0.7 * EV
    )
    valley_mass = 0.8 * M_E / 4 ** (2 / 3)
    for t in (300.0, 1200.0):
        states = math.sqrt(2) * valley_mass**1.5 * math.sqrt(K_B * t) / (math.pi**2 * HBAR**3)
        tau = HBAR / (math.pi * 0.3 * 0.7 * 2e-29 * (0.7 * EV) ** 2 * states)
        sigma, seebeck, _ = coefficients(solve(electrons, t, 1e16), t)
        assert sigma / (EV * 1e16) == near(4 / (3 * math.sqrt(math.pi)) * EV * tau / (0.25 * M_E), rel=MESH)
        eta = math.log(1e16 / conduction_states(0.8 * M_E, t))
        assert seebeck == near(-KELVIN_VOLT * (2 - eta), rel=MESH)  # e^η = 5e-10 is the next term


def test_impurities_in_a_dense_cold_gas_follow_mott(make_electrons, solve):
    # Mott: S = −(π²/3)(k/e) k_B T d ln σ(E)/dE at the Fermi level; b is huge there, so τ ∝ ε^(3/2)/ln b and
    # d ln σ/d ln E = 3 less the slope of the logarithm. Seen through the energy dependence of the rate itself
    electrons = make_electrons(acoustic_weight=0.0, impurity_weight=1.0, permittivity=400 * constants.epsilon_0)
    t, n = 5.0, 1e26
    filling, sums = solve(electrons, t, n)
    eta = float(filling.eta[0])
    _, seebeck, lorenz = coefficients((filling, sums), t)
    valley_mass = 0.8 * M_E / 4 ** (2 / 3)
    screening = EV**2 * float(filling.compressibility[0]) / (400 * constants.epsilon_0)
    b = 8 * valley_mass * eta * K_B * t / HBAR**2 / screening
    slope = 3 - (b / (1 + b)) ** 2 / (math.log1p(b) - b / (1 + b))
    assert eta > 80
    assert slope > 2.3
    assert seebeck == near(-(math.pi**2) / 3 * KELVIN_VOLT * slope / eta, rel=20 / eta**2)
    assert lorenz == near(math.pi**2 / 3 * KELVIN_VOLT**2, rel=20 / eta**2)


def test_strongly_screened_impurities_scatter_like_point_defects(make_electrons, solve, exact_fermi):
    # b → 0: 1/τ → π e⁴ N g_v/(ħ ε² q_s⁴) ∝ ε^(1/2), so S = −(k/e)(2 − η) and µ is closed as above
    t, permittivity, doping = 300.0, 1e-3 * constants.epsilon_0, 1e24
    electrons = make_electrons(acoustic_weight=0.0, impurity_weight=1.0, permittivity=permittivity)
    filling, sums = solve(electrons, t, doping)
    screening = EV**2 * float(filling.compressibility[0]) / permittivity
    valley_mass = 0.8 * M_E / 4 ** (2 / 3)
    states = math.sqrt(2) * valley_mass**1.5 * math.sqrt(K_B * t) / (math.pi**2 * HBAR**3)
    tau = HBAR * permittivity**2 * screening**2 / (math.pi * EV**4 * doping * states)
    sigma, _, _ = coefficients((filling, sums), t)
    eta = float(filling.eta[0])
    b = 8 * valley_mass * K_B * t / HBAR**2 / screening
    few = 4 / (3 * math.sqrt(math.pi)) * EV * tau / (0.25 * M_E)
    crowd = float(exact_fermi(0, eta) / exact_fermi(0.5, eta))
    assert b < 2e-3
    assert sigma / (EV * doping) == near(few * crowd, rel=4 * b)  # next term: (4/3) b ⟨ε⟩/k_B T, ⟨ε⟩ = 2 k_B T


def test_seebeck_has_the_sign_of_the_carrier(make_electrons, solve):
    electrons, holes = make_electrons(), make_electrons(side=-1.0, carrier=-1)
    for n in (1e22, 1e27):
        negative = coefficients(solve(electrons, 500.0, n), 500.0)
        positive = coefficients(solve(holes, 500.0, n), 500.0)
        assert negative[1] < 0
        assert positive[1] == near(-negative[1], rel=1e-12)
        assert positive[0] == near(negative[0], rel=1e-12)


@given(t=st.floats(20, 1500), log_n=st.floats(21, 28), xi=st.floats(1, 40), mass=st.floats(0.05, 3))
@settings(derandomize=True, deadline=None, max_examples=50)
def test_lorenz_number_of_an_acoustic_band_stays_between_its_limits(t, log_n, xi, mass, make_electrons, solve):
    electrons = make_electrons(deformation_potential=xi * EV, dos_mass=mass * M_E)
    lorenz = coefficients(solve(electrons, t, 10**log_n), t)[2]
    assert 1.4852e-8 * 0.999 <= lorenz <= 2.45e-8


# ---- densities and neutrality

TWO_BANDS = {
    "side": np.array([1.0, -1.0]),
    "edge": np.array([0.4 * EV, 0.0]),
    "dos_mass": np.array([0.8, 0.5]) * M_E,
}
NARROW = TWO_BANDS | {"edge": np.array([0.19 * EV, 0.0]), "nonparabolicity": 2.6 / EV}
THREE_BANDS = {"side": np.array([1.0, -1.0, -1.0]), "edge": np.array([0.3, 0.0, -0.1]) * EV, "carrier": -1}


@pytest.mark.parametrize("bands", [{}, TWO_BANDS, NARROW, THREE_BANDS], ids=["one", "two", "narrow", "three"])
def test_charge_is_neutral(bands, make_electrons):
    electrons = make_electrons(**bands)
    t, n = np.meshgrid([20.0, 80.0, 300.0, 700.0, 1500.0], np.geomspace(1e17, 1e28, 12))
    filling = carriers.fill(electrons, t, n)
    net = np.sum(electrons.side * filling.density, axis=-1)
    # 1e-12 of the doping where it rules; where pairs outnumber it (1e8 times here), the rounding of their sum
    room = 1e-12 * n + 1e-14 * np.sum(filling.density, axis=-1)
    assert np.all(np.abs(electrons.carrier * net - n) <= room)
    assert np.max(np.sum(filling.density, axis=-1) / n) > 1e8 or not bands


@pytest.mark.parametrize("eta", [-25.0, -2.0, 0.0, 3.3, 30.0])
def test_density_of_a_parabolic_band(eta, make_electrons, exact_fermi):
    # n = N_c F_½(η), ∂n/∂µ = N_c F_(−½)(η)/k_B T; the mesh is 1e-9 off at worst
    t, electrons = 500.0, make_electrons()
    exact = conduction_states(0.8 * M_E, t) * float(exact_fermi(0.5, eta))
    _, density, states = carriers._occupied(electrons, np.array(t), np.array(eta * K_B * t))
    assert density[0] == near(exact, rel=2e-9)
    slope = conduction_states(0.8 * M_E, t) * float(exact_fermi(-0.5, eta)) / (K_B * t)
    assert states[0] == near(slope, rel=2e-9)


@pytest.mark.parametrize("eta", [-8.0, 0.0, 12.0])
def test_density_of_a_kane_band(eta, make_electrons):
    t, alpha = 600.0, 3 / EV
    kt = K_B * t

    def filled(x: float) -> float:
        gamma, slope = kt * x * (1 + alpha * kt * x), 1 + 2 * alpha * kt * x
        states = math.sqrt(2) * (0.8 * M_E) ** 1.5 * math.sqrt(gamma) * slope / (math.pi**2 * HBAR**3)
        return states * kt / (1 + math.exp(x - eta))

    exact = piecewise(filled, eta)
    _, density, _ = carriers._occupied(make_electrons(nonparabolicity=alpha), np.array(t), np.array(eta * kt))
    assert density[0] == near(exact, rel=2e-9)


def test_intrinsic_density(make_electrons):
    # n_i = √(N_c N_v) e^(−E_g/2k_BT) (any textbook); doping of one millionth of it does not count
    t = 400.0
    pairs = math.sqrt(conduction_states(0.8 * M_E, t) * conduction_states(0.5 * M_E, t))
    pairs *= math.exp(-0.4 * EV / (2 * K_B * t))
    filling = carriers.fill(make_electrons(**TWO_BANDS), np.array(t), np.array(1e-6 * pairs))
    # degeneracy, e^η/2^(3/2) = 1e-3 at η = −5.8
    assert filling.density == near(pairs, rel=2e-3)


def test_masses_grow_with_temperature_and_edges_move(make_electrons, solve):
    electrons = make_electrons(mass_exponent=0.5, mass_scale=1.2)
    dos, inertia = carriers.masses(electrons, np.array(1200.0))
    assert dos == near(0.8 * M_E * 1.2 * 2, rel=1e-14)
    assert inertia == near(0.25 * M_E * 1.2 * 2, rel=1e-14)
    # a lone band that moves takes its chemical potential along
    still, moved = make_electrons(), make_electrons(edge=0.7 * EV, edge_alpha=4e-4 * EV, edge_beta=200.0)
    assert solve(moved, 600.0, 1e25)[0].eta == near(solve(still, 600.0, 1e25)[0].eta, rel=1e-12)
    shift = 0.7 * EV - 4e-4 * EV * 600**2 / 800
    gap = solve(moved, 600.0, 1e25)[0].chemical_potential - solve(still, 600.0, 1e25)[0].chemical_potential
    assert gap == near(shift, rel=1e-12)


# ---- the whole of it against plain quadrature


def piecewise(function: Callable[[float], float], eta: float, kinks: tuple[float, ...] = ()) -> float:
    """∫₀^∞ of a function that lives around η, by QUADPACK between break points."""
    top = max(eta, 0.0) + 60
    breaks = {p for p in (1e-3, 0.1, 1.0, *kinks, *(eta + d for d in (-15, -4, -1, 0, 1, 4, 15))) if 0 < p < top}
    edges = [0.0, *sorted(breaks), top]
    return sum(quad(function, a, b, epsabs=0, epsrel=1e-11, limit=200)[0] for a, b in itertools.pairwise(edges))


def by_quadrature(electrons: carriers.Electrons, temperature: float, doping: float) -> tuple[float, float, float]:
    """σ, S and Lorenz number of a single conduction band, every formula written out again from the publications."""
    kt = K_B * temperature
    mass, inertia, valleys, alpha, xi, field, phonon, alloy = (
        float(getattr(electrons, name)[0])
        for name in (
            "dos_mass",
            "inertial_mass",
            "valleys",
            "nonparabolicity",
            "deformation_potential",
            "intervalley_field",
            "intervalley_phonon",
            "alloy_potential",
        )
    )
    a, eps, onset = alpha * kt, electrons.permittivity, phonon / kt

    def states(x: float) -> float:
        if x <= 0:
            return 0.0
        return math.sqrt(2 * x * (1 + a * x)) * (1 + 2 * a * x) * mass**1.5 * math.sqrt(kt) / (math.pi**2 * HBAR**3)

    def window(x: float, eta: float) -> float:
        return 0.25 / math.cosh(0.5 * (x - eta)) ** 2

    def density(eta: float) -> float:
        return piecewise(lambda x: kt * states(x) / (1 + math.exp(x - eta)), eta)

    eta = brentq(lambda level: math.log(density(level) / doping), -40, 100, xtol=1e-12)
    screening = EV**2 / eps * piecewise(lambda x: states(x) * window(x, eta), eta)

    def rate(x: float) -> float:
        one_valley, s2 = states(x) / valleys, (1 + 2 * a * x) ** 2
        total = math.pi * kt * xi**2 * one_valley / (HBAR * electrons.elastic_constant) * (s2 + 2) / (3 * s2)
        total *= electrons.acoustic_weight
        if field:
            n = 1 / math.expm1(onset)
            final = (n * states(x + onset) + (n + 1) * states(x - onset)) / valleys
            total += math.pi * HBAR * field**2 / (2 * electrons.density * phonon) * final
        fraction = electrons.alloy_fraction
        total += math.pi / HBAR * fraction * (1 - fraction) * electrons.alloy_volume * alloy**2 * one_valley
        if electrons.impurity_weight:
            wave2 = 2 * mass / valleys ** (2 / 3) * kt * x * (1 + a * x) / HBAR**2
            b = 4 * wave2 / screening
            angular = math.log1p(b) - b / (1 + b) if b > 1e-4 else b**2 / 2 - 2 * b**3 / 3
            total += math.pi * EV**4 * doping * one_valley / (8 * HBAR * eps**2 * wave2**2) * angular
        return total

    def spectral(x: float) -> float:
        velocity2 = 2 * kt * x * (1 + a * x) / (3 * inertia * (1 + 2 * a * x) ** 2)
        return states(x) * velocity2 / rate(x) * window(x, eta)

    kinks = (onset, 1.2 * onset) if field else ()
    l0, l1, l2 = (piecewise(lambda x, k=k: spectral(x) * (x - eta) ** k, eta, kinks) for k in range(3))
    return EV**2 * l0, -KELVIN_VOLT * l1 / l0, KELVIN_VOLT**2 * (l2 / l0 - (l1 / l0) ** 2)


KANE = {"nonparabolicity": 2.0 / EV}
ALLOY = {"alloy_fraction": 0.3, "alloy_potential": 0.7 * EV}
HARD = {"intervalley_field": 6e10 * EV, "intervalley_phonon": 0.06 * EV}
SOFT = {"intervalley_field": 2e10 * EV, "intervalley_phonon": 0.015 * EV}
IMPURITIES = {"impurity_weight": 1.0}
POINTS = pytest.mark.parametrize(
    ("temperature", "doping"), [(100.0, 1e22), (300.0, 1e25), (300.0, 1e27), (900.0, 1e25)]
)


#: weakly screened impurities bring a singularity close to the edge (b = −1): 2.6e-7 at worst (measured)
WITH_IMPURITIES = 5e-7
#: above the onset the integrand starts at a finite value, and the mesh starts at e^(−15) beyond it
WITH_INTERVALLEY = 3e-7


@POINTS
@pytest.mark.parametrize(
    ("mixture", "allowed"),
    [
        (KANE, MESH),
        (HARD, WITH_INTERVALLEY),
        (SOFT | KANE, WITH_INTERVALLEY),
        (IMPURITIES, WITH_IMPURITIES),
        (IMPURITIES | KANE | ALLOY | HARD, WITH_IMPURITIES),
    ],
    ids=["kane", "intervalley", "soft intervalley in a Kane band", "impurities", "everything"],
)
def test_transport_matches_plain_quadrature(
    mixture, allowed, temperature, doping, make_electrons, solve, monkeypatch
):
    electrons = make_electrons(**mixture)
    exact = by_quadrature(electrons, temperature, doping)
    found = coefficients(solve(electrons, temperature, doping), temperature)
    assert [float(x) for x in found] == near(exact, rel=allowed)
    # a finer, longer mesh takes the difference away: what was left was the mesh, not the physics
    # (the 24 nodes below the onset of emission stay, and leave 6e-9 at worst)
    monkeypatch.setattr(carriers, "softplus_mesh", partial(softplus_mesh, count=300, step=0.3))
    finer = coefficients(solve(electrons, temperature, doping), temperature)
    assert [float(x) for x in finer] == near(exact, rel=1e-8)


# ---- what each process does

EVERYTHING = IMPURITIES | KANE | ALLOY | HARD | {"acoustic_weight": 1.0}
WEIGHTS = ["acoustic_weight", "intervalley_weight", "alloy_weight", "impurity_weight"]


@pytest.mark.parametrize("weight", WEIGHTS)
def test_doubling_a_rate_costs_conductivity_and_moves_the_seebeck_coefficient(weight, make_electrons, solve):
    electrons = make_electrons(**EVERYTHING)
    before, after, without = (
        coefficients(solve(replace(electrons, **{weight: value}), 300.0, 2e25), 300.0) for value in (1.0, 2.0, 0.0)
    )
    assert after[0] < 0.97 * before[0]
    assert without[0] > 1.03 * before[0]
    # what grows with energy is filtered out by impurities: more of them raises |S|, more of the others lowers it
    sign = 1 if weight == "impurity_weight" else -1
    assert sign * (abs(after[1]) - abs(before[1])) > 2e-3 * abs(before[1])


@pytest.mark.parametrize("kept", WEIGHTS)
def test_a_process_left_alone_is_what_plain_quadrature_says(kept, make_electrons, solve):
    # weights at zero must really switch off: the parameters of the others stay in the object
    electrons = make_electrons(**EVERYTHING)
    alone = replace(electrons, **{weight: float(weight == kept) for weight in WEIGHTS})
    bare = replace(
        alone,
        intervalley_field=electrons.intervalley_field * alone.intervalley_weight,
        alloy_fraction=electrons.alloy_fraction * alone.alloy_weight,
    )
    found = coefficients(solve(alone, 300.0, 2e25), 300.0)
    assert [float(x) for x in found] == near(by_quadrature(bare, 300.0, 2e25), rel=WITH_IMPURITIES)


def test_a_band_that_nothing_slows_is_refused(make_electrons, solve):
    with pytest.raises(ArithmeticError, match="no scattering"):
        solve(make_electrons(acoustic_weight=0.0), 300.0, 1e25)


def test_lattice_scale_acts_on_the_majority_alone(make_electrons, solve):
    electrons = make_electrons(**(TWO_BANDS | HARD))
    _, before = solve(electrons, 700.0, 1e24)
    _, after = solve(replace(electrons, lattice_scale=2.0), 700.0, 1e24)
    assert after.l0 / before.l0 == near([0.5, 1.0], rel=1e-12)


def test_heavy_doping_factor_interpolates_and_stays_level_outside(make_electrons):
    knots = ((math.log(1e24), math.log(1.0)), (math.log(1e26), math.log(4.0)))
    electrons = make_electrons(impurity_knots=knots)
    factor = electrons.heavy_doping_factor(np.array([1e20, 1e24, 1e25, 1e26, 1e28]))
    assert factor == near([1, 1, 2, 4, 4], rel=1e-12)
    assert np.array_equal(make_electrons().heavy_doping_factor(np.array([1e20, 1e28])), [1, 1])


def test_intervalley_scattering_fades_in_without_a_step(make_electrons, solve):
    # a vanishing field changes the mesh (split at the onset), not the result
    plain = coefficients(solve(make_electrons(), 300.0, 2e25), 300.0)
    faint = coefficients(
        solve(make_electrons(intervalley_field=1e3 * EV, intervalley_phonon=0.06 * EV), 300.0, 2e25), 300.0
    )
    assert [float(x) for x in faint] == near([float(x) for x in plain], rel=WITH_INTERVALLEY)


# ---- size


@pytest.mark.parametrize("shape", ["grain", "wire", "film"])
def test_large_bodies_are_bulk_and_small_ones_conduct_less(shape, make_electrons, solve):
    electrons = make_electrons(**EVERYTHING)
    sizes = np.array([np.inf, 1e-2, 1e-5, 1e-7, 1e-8, 1e-9])
    _, sums = solve(electrons, 300.0, 2e25, sizes, shape)
    ratio = sums.l0[:, 0] / sums.l0[0, 0]
    assert ratio[1] == near(1, abs=1e-5)
    assert np.all(np.diff(ratio) < 0)
    assert ratio[-1] < 0.3
    # the sum as a whole: mean free paths of some nanometres feel a hundred nanometres by a few per cent
    assert 0.8 < ratio[3] < 0.999


def test_grains_that_reflect_nothing_are_bulk_and_reflection_costs(make_electrons, solve):
    bulk = solve(make_electrons(reflection=0.0), 300.0, 2e25)[1].l0
    clear = solve(make_electrons(reflection=0.0), 300.0, 2e25, 5e-9)[1].l0
    some, more = (solve(make_electrons(reflection=r), 300.0, 2e25, 5e-9)[1].l0 for r in (0.2, 0.4))
    assert np.array_equal(clear, bulk)
    assert some < 0.98 * bulk
    assert more < 0.95 * some


def test_fine_diffuse_wires_carry_ballistic_current(make_electrons, solve, exact_fermi):
    # Λ → d (Casimir 1938): σ = e² ∫ g (v/3) d (−∂f/∂E) dE = (e² d/3) N_c (2/√π) √(2/(m_I k_B T)) F₀, whatever τ(ε)
    t, d = 300.0, 1e-12
    electrons = make_electrons()
    f_half, f0 = (float(exact_fermi(j, 0)) for j in (0.5, 0))
    n_c = conduction_states(0.8 * M_E, t)
    exact = EV**2 * d / 3 * n_c * 2 / math.sqrt(math.pi) * math.sqrt(2 / (0.25 * M_E * K_B * t)) * f0
    sigma, _, _ = coefficients(solve(electrons, t, n_c * f_half, d, "wire"), t)
    assert sigma == near(exact, rel=2e-3)  # ln Kn/Kn, Kn = 1e4
