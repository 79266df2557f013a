"""Barriers at grain boundaries: thermionic emission by quadrature, Seto's law, activation, and limits."""

import itertools
import math
from dataclasses import replace
from functools import partial

import numpy as np
import pytest
from scipy import constants
from scipy.integrate import quad

from legwright.base.errors import InputError
from legwright.candidate.library import load_candidate
from legwright.physics import carriers, moments, properties
from legwright.physics.barriers import barrier_conductance, barrier_suppression
from legwright.physics.boundaries import grain_suppression
from legwright.physics.crystal import crystal
from legwright.physics.properties import evaluate

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

EV, M_E, K_B, HBAR = constants.e, constants.m_e, constants.k, constants.hbar


# ---- one barrier


@pytest.mark.parametrize("height", [0.0, 0.02, 0.15])
@pytest.mark.parametrize("eta", [-9.0, 0.0, 12.0])
@pytest.mark.parametrize("alpha", [0.0, 2.0])
def test_emission_is_that_of_quadrature(height, eta, alpha):
    # ¼ g v of the states above the barrier, every formula written out, against −∂f/∂ε
    t, dos, inertia = 350.0, 0.8 * M_E, 0.25 * M_E
    kt, a = K_B * t, alpha * K_B * t / EV

    def crossing(x):
        gamma, slope = kt * x * (1 + a * x), 1 + 2 * a * x
        states = math.sqrt(2 * gamma) * dos**1.5 * slope / (math.pi**2 * HBAR**3)
        speed = math.sqrt(2 * gamma / inertia) / slope
        lift = x + height * EV / kt - eta
        return states * speed / 4 / (4 * math.cosh(lift / 2) ** 2)

    top = max(eta - height * EV / kt, 0.0)
    edges = sorted({0.0, *(max(top + d, 0.0) for d in (-20, -5, 0, 5, 20)), top + 60})
    exact = EV**2 * sum(quad(crossing, a, b, epsabs=0, epsrel=1e-12)[0] for a, b in itertools.pairwise(edges))
    found = barrier_conductance(height * EV, t, eta, dos, inertia, alpha / EV)
    assert found == near(exact, rel=1e-9)  # quad over pieces


def test_few_carriers_follow_seto():
    # Seto (1975), eq. for σ = e² L n (2π m k_BT)^(−1/2) e^(−E_b/k_BT), from memory; degeneracy e^η is 1e-9
    t, mass, height = 280.0, 0.4 * M_E, 0.12 * EV
    eta = -20.0
    density = 2 * (mass * K_B * t / (2 * math.pi * HBAR**2)) ** 1.5 * math.exp(eta)
    exact = EV**2 * density / math.sqrt(2 * math.pi * mass * K_B * t) * math.exp(-height / (K_B * t))
    assert barrier_conductance(height, t, eta, mass, mass) == near(exact, rel=3e-9)


def test_very_high_barriers_stay_finite_and_negative_ones_are_refused():
    least = barrier_conductance(1.0 * EV, 2.0, -20.0, M_E, M_E)
    assert 0 < least < 1e-100 * barrier_conductance(0.0, 2.0, -20.0, M_E, M_E)
    assert barrier_suppression(1e5, 1e-8, least, barrier_conductance(0.0, 2.0, -20.0, M_E, M_E)) > 0
    with pytest.raises(ValueError, match="barrier"):
        barrier_conductance(-1e-21, 300.0, 0.0, M_E, M_E)


def test_resistances_in_series():
    sigma, d, high, without = 3e4, 2e-8, 1e11, 4e13
    added = d / sigma + 1 / high - 1 / without
    assert barrier_suppression(sigma, d, high, without) == near(d / added / sigma, rel=1e-12)
    assert barrier_suppression(sigma, d, without, without) == 1
    assert barrier_suppression(sigma, np.inf, high, without) == 1


# ---- a body of grains


def grains(electrons, temperature, doping, size):
    """σ with and without its barriers, and the filling."""
    t, n, d = np.broadcast_arrays(*(np.asarray(a, dtype=float) for a in (temperature, doping, size)))
    filling = carriers.fill(electrons, t, n)
    flow = carriers.bulk_flow(electrons, t, n, filling)
    sums = carriers.transport_integrals(flow, d, "grain", electrons.reflection)
    l0 = np.sum(sums.l0[..., electrons.majority], axis=-1)
    share = carriers.past_barriers(electrons, t, filling, l0, d)
    return moments.conductivity(l0 * share), moments.conductivity(l0), filling


def test_no_barrier_leaves_the_grain_of_mayadas_and_shatzkes(make_electrons):
    with_none, plain, _ = grains(make_electrons(barrier=0.0), 300.0, 2e25, 1e-8)
    assert with_none == plain
    faint, plain, _ = grains(make_electrons(barrier=1e-6 * EV), 300.0, 2e25, 1e-8)
    assert 0 < 1 - faint / plain < 1e-4
    # and that grain is the published closed form: one mean free path at all energies under acoustic scattering
    electrons = make_electrons()
    t, n = np.array(300.0), np.array(2e25)
    path = carriers.bulk_flow(electrons, t, n, carriers.fill(electrons, t, n)).mean_free_path[0, 0]
    _, coarse, _ = grains(electrons, 300.0, 2e25, np.inf)
    assert plain / coarse == near(float(grain_suppression(path, 1e-8, 0.3)), rel=1e-10)


def test_low_temperatures_show_the_barrier(make_electrons):
    # few carriers, barrier ≫ grain: σ ∝ T^(−1/2) e^(−E_b/k_BT), so the slope of ln(σ√T) against 1/k_BT is −E_b
    height = 0.1 * EV
    t = np.array([60.0, 62.0])
    sigma, plain, _ = grains(make_electrons(barrier=height), t, 1e20, 2e-8)
    slope = np.diff(np.log(sigma * np.sqrt(t))) / np.diff(1 / (K_B * t))
    assert np.all(sigma < 1e-6 * plain)
    assert slope == near(-height, rel=1e-5)  # what the grain itself and degeneracy, 1e-5, still do


def test_many_carriers_are_activated_by_what_the_barrier_stands_over_the_fermi_level(make_electrons):
    # Fermi statistics: E_b − µ, with a prefactor T from the tail of the Fermi function
    height, t = 0.25 * EV, np.array([30.0, 31.0])
    electrons = make_electrons(barrier=height)
    sigma, _, filling = grains(electrons, t, 5e25, 2e-8)
    level = float(np.mean(filling.eta[:, 0] * K_B * t))
    assert 0.03 * EV < level < 0.2 * EV
    slope = np.diff(np.log(sigma / t)) / np.diff(1 / (K_B * t))
    assert slope == near(-(height - level), rel=2e-3)  # µ itself moves by (π²/12)(k_BT)²/µ


def test_barriers_fade_with_size_doping_and_heat(make_electrons):
    electrons = make_electrons(barrier=0.08 * EV)

    def left(*point):
        sigma, plain, _ = grains(electrons, *point)
        return sigma / plain

    assert np.all(np.diff(left(300.0, 1e24, np.array([1e-9, 1e-8, 1e-7, 1e-5]))) > 0)
    assert np.all(np.diff(left(300.0, np.array([1e23, 1e24, 1e25, 1e26]), 2e-8)) > 0)
    assert np.all(np.diff(left(np.array([150.0, 300.0, 600.0]), 1e24, 2e-8)) > 0)
    assert left(300.0, 1e24, np.inf) == 1
    assert np.all(np.diff([grains(replace(electrons, barrier=e * EV), 300.0, 1e24, 2e-8)[0] for e in HEIGHTS]) < 0)


HEIGHTS = (0.0, 0.02, 0.05, 0.1, 0.2)


# ---- a candidate

LINE = 'barrier = {{ value = {}, unit = "meV", spread = 0.3, source = "this-library", basis = "from memory" }}\n'


@pytest.fixture(scope="module")
def with_barrier(tmp_path_factory):
    def made(name, height):
        text = load_candidate(name).path.read_text(encoding="utf-8")
        path = tmp_path_factory.mktemp("barrier") / f"{name}.toml"
        path.write_text(text.replace("[scattering]\n", f"[scattering]\n{LINE.format(height)}"), encoding="utf-8")
        return load_candidate(str(path))

    return made


POINT = (np.array([300.0, 600.0])[:, None, None], np.array([1e25, 1e26])[:, None], np.array([2e-8, 3e-7, np.inf]))


@pytest.mark.parametrize("name", ["mg2sisn-n", "pbte-p"])
def test_candidates_grains_lose_conductivity_and_keep_their_seebeck_coefficient(name, with_barrier):
    plain, barred = (evaluate(one, *POINT) for one in (load_candidate(name), with_barrier(name, 60)))
    sigma = barred.electrical_conductivity / plain.electrical_conductivity
    assert np.all(sigma[..., :2] < 1)
    assert sigma[0, 0, 0] < 0.8
    assert np.all(np.diff(sigma, axis=-1) > 0)
    assert np.array_equal(barred.electrical_conductivity[..., 2], plain.electrical_conductivity[..., 2])
    # at 300 K one kind carries nearly all: S, Lorenz number and Hall density stay, the rest falls in proportion
    assert barred.seebeck[0] == near(plain.seebeck[0], rel=1e-2)
    assert barred.lorenz_number[0] == near(plain.lorenz_number[0], rel=1e-2)
    assert barred.hall_coefficient[0] == near(plain.hall_coefficient[0], rel=1e-2)
    assert barred.hall_factor == near(plain.hall_factor, rel=1e-12)
    assert barred.mobility / plain.mobility == near(sigma, rel=0.2)
    assert np.array_equal(barred.lattice_thermal_conductivity, plain.lattice_thermal_conductivity)


def test_wires_and_films_have_no_boundaries_to_cross(with_barrier):
    for shape in ("wire", "film"):
        plain, barred = (evaluate(one, *POINT, shape) for one in (load_candidate("si-p"), with_barrier("si-p", 60)))
        assert np.array_equal(barred.electrical_conductivity, plain.electrical_conductivity)


def test_barred_maps_split_into_blocks_give_the_same_bits(with_barrier, monkeypatch):
    candidate = with_barrier("mg2sisn-n", 60)
    whole = evaluate(candidate, *POINT)
    point = evaluate(candidate, 600.0, 1e25, 3e-7)
    assert point.electrical_conductivity == whole.electrical_conductivity[1, 0, 1]
    monkeypatch.setattr(properties, "_STATES", 1)
    monkeypatch.setattr(properties, "_POINTS", 2)
    split = evaluate(candidate, *POINT)
    for name in ("electrical_conductivity", "seebeck", "electronic_thermal_conductivity", "hall_coefficient"):
        assert np.array_equal(getattr(whole, name), getattr(split, name))


@pytest.mark.parametrize(
    ("name", "temperature", "doping"), [("si-n", 2.0, 1e22), ("mg2sisn-n", 2.0, 1e16), ("bisbte-p", 5.0, 1e28)]
)
def test_cold_bodies_settle_where_rounding_is_coarser_than_the_thermal_energy_asks(name, temperature, doping):
    # µ near 1 eV is known to 1e-16 of it: to 1e-12 of k_BT at 2 K, and the density to no better
    electrons = crystal(load_candidate(name)).electrons
    filling = carriers.fill(electrons, np.array(temperature), np.array(doping))
    many, few = (np.sum(filling.density[kind]) for kind in (electrons.majority, ~electrons.majority))
    assert many - few == near(doping, rel=1e-10)


def test_cold_corner_of_what_is_allowed_is_finite(with_barrier):
    made = evaluate(with_barrier("si-n", 200), 2.0, 1e22, 1e-9)
    assert np.isfinite(made.zt)
    assert 0 < made.electrical_conductivity < 1e-50
    assert np.isfinite(made.lorenz_number)


def test_negative_barriers_are_refused(with_barrier):
    with pytest.raises(InputError, match="barrier"):
        with_barrier("si-n", -5)
