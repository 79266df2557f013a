"""Hall coefficient and Hall factor: closed forms, quadrature, two kinds of carrier; the dopant behind a density."""

import itertools
import math
from functools import partial

import numpy as np
import pytest
from scipy import constants
from scipy.integrate import quad
from scipy.special import gamma

from legwright.base.errors import InputError
from legwright.candidate.library import load_candidate
from legwright.physics import carriers, properties
from legwright.physics.crystal import crystal
from legwright.physics.fermi import softplus_mesh
from legwright.physics.hall import hall_anisotropy, hall_coefficient, hall_factor
from legwright.physics.properties import SHAPES, evaluate
from legwright.physics.solubility import active_density, active_limit, atomic_percent, solubility

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

EV, M_E, K_B, HBAR = constants.e, constants.m_e, constants.k, constants.hbar

#: the energy mesh leaves 1e-9 in an integral near the edge, and the factor holds three of them (test_carriers.py)
MESH = 1e-8


@pytest.fixture(scope="module")
def hall_of(solve):
    """(density, L_0, K) per band."""

    def found(electrons, temperature, doping, size=np.inf, shape="grain"):
        t, n = np.broadcast_arrays(np.asarray(temperature, dtype=float), np.asarray(doping, dtype=float))
        filling, sums = solve(electrons, t, n, size, shape)
        flow = carriers.bulk_flow(electrons, t, n, filling)
        hall = carriers.hall_integrals(electrons, t, flow, np.asarray(size, dtype=float), shape)
        return filling.density, sums.l0, hall

    return found


def conduction_states(mass: float, temperature: float) -> float:
    return 2 * (mass * K_B * temperature / (2 * math.pi * HBAR**2)) ** 1.5


# ---- one band


@pytest.mark.parametrize("eta", [-10.0, -2.0, 0.0, 3.0, 20.0])
def test_acoustic_factor_follows_its_closed_form(eta, make_electrons, hall_of, exact_fermi):
    # Ravich, Efimova & Smirnov (1970), r = −1/2: r_H = (3π/8) F_(1/2) F_(−1/2)/F_0², by mpmath, for the Hall
    # effect of carriers whose masses for states and motion are one
    t, mass = 300.0, 0.4 * M_E
    f_half, f0, f_minus = (float(exact_fermi(j, eta)) for j in (0.5, 0, -0.5))
    electrons = make_electrons(valleys=1.0, dos_mass=mass, inertial_mass=mass)
    density, l0, hall = hall_of(electrons, t, conduction_states(mass, t) * f_half)
    exact = 3 * math.pi / 8 * f_half * f_minus / f0**2
    assert hall_factor(l0, hall, density)[0] == near(exact, rel=MESH)


def test_acoustic_factor_at_both_ends(make_electrons, hall_of):
    # any textbook: 3π/8 for few carriers, 1 for many
    mass = 0.4 * M_E
    electrons = make_electrons(valleys=1.0, dos_mass=mass, inertial_mass=mass)
    few, many = ((density, l0, hall) for density, l0, hall in (hall_of(electrons, t, n) for t, n in ENDS))
    assert hall_factor(few[1], few[2], few[0])[0] == near(3 * math.pi / 8, rel=MESH)
    assert hall_factor(many[1], many[2], many[0])[0] == near(1, rel=1e-7)  # (π²/12)(k_BT/µ)² = 5e-8


#: n/N_c is 1e-9 at 900 K; η is 5e3 at 4 K
ENDS = ((900.0, 1e17), (4.0, 3e27))


@pytest.mark.parametrize(
    ("power", "exact"),
    [
        (-0.5, 3 * math.pi / 8),  # acoustic
        (1.5, 315 * math.pi / 512),  # ionised impurities under a constant logarithm
        (0.0, 1.0),  # neutral scatterers that do not care
        (0.5, gamma(3.5) * gamma(2.5) / gamma(3.0) ** 2),
    ],
)
def test_factor_of_a_power_law(power, exact, make_electrons):
    # r_H = Γ(2r + 5/2) Γ(5/2)/Γ(r + 5/2)² for τ ∝ ε^r and few carriers (Putley 1960)
    t, mass, eta = np.array(300.0), 0.3 * M_E, np.array([-25.0])
    kt = K_B * 300.0
    electrons = make_electrons(valleys=1.0, dos_mass=mass, inertial_mass=mass)
    z, weight = softplus_mesh(eta)
    tau = 1e-14 * z**power
    speed2 = 2 * z * kt / (3 * mass)
    states = math.sqrt(2 * kt) * mass**1.5 * np.sqrt(z) / (math.pi**2 * HBAR**3)
    window = weight * carriers.thermal_window(z - eta[:, None])
    flow = carriers.Flow(
        spectral=states * speed2 * tau * window,
        mean_free_path=np.sqrt(3 * speed2) * tau,
        excess=(z - eta[:, None]) * kt,
        energy=z * kt,
    )
    hall = carriers.hall_integrals(electrons, t, flow, np.array(np.inf), "grain")
    l0 = np.sum(flow.spectral, axis=-1)
    assert hall_factor(l0, hall, conduction_states(mass, 300.0) * np.exp(eta))[0] == near(exact, rel=MESH)


def test_impurities_approach_the_power_law_where_nothing_screens(make_electrons, hall_of):
    # 315π/512 = 1.933 under a constant logarithm; the true one, ln b − 1 with b = 4k²/q_s², rises with energy and
    # takes 1/(ln b − 1) off the power 3/2 of τ
    mass = 0.4 * M_E
    electrons = make_electrons(
        valleys=1.0, dos_mass=mass, inertial_mass=mass, impurity_weight=1.0, acoustic_weight=0.0
    )
    density, l0, hall = hall_of(electrons, 900.0, 1e17)
    r = float(hall_factor(l0, hall, density)[0])
    b = 8 * mass * 5 * K_B * 900 / HBAR**2 / (EV**2 * 1e17 / (12 * constants.epsilon_0 * K_B * 900))
    x = 1.5 - 1 / (math.log(b) - 1)
    assert r == near(gamma(2 * x + 2.5) * gamma(2.5) / gamma(x + 2.5) ** 2, rel=0.01)  # next order, 1/ln² b = 0.2 %
    assert r < 315 * math.pi / 512


def test_kane_band_under_two_processes_is_what_quadrature_says(make_electrons, hall_of):
    # written out again from Ravich, Efimova & Smirnov (1970), in reduced energies, by QUADPACK
    t, alpha, dos, inertia, valleys = 500.0, 1.8 / EV, 0.7 * M_E, 0.2 * M_E, 4.0
    kt = K_B * t
    electrons = make_electrons(
        nonparabolicity=alpha,
        dos_mass=dos,
        inertial_mass=inertia,
        valleys=valleys,
        alloy_fraction=0.3,
        alloy_potential=0.9 * EV,
        mass_ratio=np.array([4.0]),
    )
    filling = carriers.fill(electrons, np.array(t), np.array(6e25))
    eta = float(filling.eta[0])

    def both(x):
        slope, g = 1 + 2 * alpha * x * kt, x * kt * (1 + alpha * x * kt)
        states = math.sqrt(2 * g) * dos**1.5 * slope / (math.pi**2 * HBAR**3)
        acoustic = math.pi * kt * (9 * EV) ** 2 / (HBAR * 1.5e11) * (slope**2 + 2) / (3 * slope**2)
        alloy = math.pi / HBAR * 0.3 * 0.7 * 2e-29 * (0.9 * EV) ** 2
        tau = valleys / (states * (acoustic + alloy))
        common = states * 2 * g / (3 * inertia * slope**2) * tau / (4 * math.cosh((x - eta) / 2) ** 2)
        return common, common * tau / (inertia * slope)

    edges = (0, 0.3, 2, 6, 15, 60)
    l0, hall = (
        sum(
            quad(lambda u, k=k: 2 * u * both(u * u)[k], math.sqrt(a), math.sqrt(b), epsabs=0, epsrel=1e-11)[0]
            for a, b in itertools.pairwise(edges)
        )
        for k in range(2)
    )
    _, found_l0, found = hall_of(electrons, t, 6e25)
    assert found_l0[0] == near(l0, rel=MESH)
    assert found[0] == near(hall * 3 * 4 * 6 / 81, rel=MESH)


def test_long_valleys():
    # Herring (1955): 1 for a sphere, ¾ for a needle; n-Si (0.916/0.191) 0.871, n-Ge (1.59/0.0823) 0.785
    assert hall_anisotropy(1.0) == 1
    assert hall_anisotropy([1e12, 1e-12]) == near([0.75, 6e-12], rel=1e-9)
    assert hall_anisotropy([0.916 / 0.191, 1.59 / 0.0823]) == near([0.871, 0.785], abs=2e-3)
    for bad in (0.0, -1.0, math.inf, math.nan):
        with pytest.raises(ValueError, match="ratio of masses"):
            hall_anisotropy(bad)


def test_boundaries_leave_the_hall_density_of_many_carriers_alone(make_electrons, hall_of):
    # one relaxation time at the Fermi level, however short: R_H = 1/en
    mass = 0.4 * M_E
    electrons = make_electrons(valleys=1.0, dos_mass=mass, inertial_mass=mass)
    density, l0, hall = hall_of(electrons, 4.0, 3e27, np.array([[np.inf], [1e-7], [1e-9]]).ravel())
    assert l0[2, 0] < 0.5 * l0[0, 0]
    assert hall_factor(l0, hall, density)[:, 0] == near([1, 1, 1], rel=1e-7)


# ---- two kinds


def test_mirror_bands_have_no_hall_effect(make_electrons, hall_of):
    electrons = make_electrons(side=np.array([1.0, -1.0]), edge=np.array([0.4, 0.0]) * EV)
    density, l0, hall = hall_of(electrons, 600.0, 1e12)
    found = hall_coefficient(l0[0], hall[0], l0[1], hall[1])
    alone = hall_coefficient(l0[0], hall[0], 0.0, 0.0)
    assert density[0] == near(density[1], rel=1e-8)
    assert abs(found) < 1e-7 * abs(alone)


@pytest.mark.parametrize(("p", "n", "b"), [(1e24, 1e24, 3.0), (5e24, 1e23, 10.0), (1e23, 0.0, 2.0)])
def test_two_simple_carriers(p, n, b):
    # any textbook: R_H = (p − n b²)/(e (p + n b)²), b = µ_e/µ_h
    hole = 0.02 / EV
    up, down = n * b * hole, p * hole
    found = hall_coefficient(up, n * (b * hole) ** 2, down, p * hole**2)
    assert found == near((p - n * b**2) / (EV * (p + n * b) ** 2), rel=1e-13)


def test_sign_turns_smoothly_on_the_way_to_intrinsic(make_electrons, hall_of):
    # light electrons outdo the holes of a p-type body when it gets hot; nothing diverges on the way
    electrons = make_electrons(
        carrier=-1,
        side=np.array([1.0, -1.0]),
        edge=np.array([0.2, 0.0]) * EV,
        inertial_mass=np.array([0.1, 0.5]) * M_E,
    )
    _, l0, hall = hall_of(electrons, np.linspace(250, 900, 40), 1e24)
    found = hall_coefficient(l0[:, 0], hall[:, 0], l0[:, 1], hall[:, 1])
    assert found[0] > 0 > found[-1]
    assert np.all(np.isfinite(found))
    assert np.sum(np.diff(np.sign(found)) != 0) == 1


# ---- evaluate

POINT = (np.array([300.0, 700.0])[:, None, None], np.array([1e25, 2e26])[:, None], np.array([3e-9, 5e-8, np.inf]))


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("name", ["si-n", "pbte-p", "mg2sisn-n"])
def test_path_mesh_agrees_with_energy_by_energy(name, shape):
    candidate = load_candidate(name)
    electrons = crystal(candidate).electrons
    made = evaluate(candidate, *POINT, shape)
    t, n, d = (np.broadcast_to(a, (2, 2, 3)).copy() for a in POINT)
    filling = carriers.fill(electrons, t, n)
    flow = carriers.bulk_flow(electrons, t, n, filling)
    l0 = carriers.transport_integrals(flow, d, shape, electrons.reflection).l0
    hall = carriers.hall_integrals(electrons, t, flow, d, shape)
    up, many = electrons.side > 0, electrons.majority
    exact = hall_coefficient(*(np.sum(part[..., side], axis=-1) for side in (up, ~up) for part in (l0, hall)))
    factor = hall_factor(*(np.sum(part[..., many], axis=-1) for part in (l0, hall, filling.density)))
    assert made.hall_coefficient == near(exact, rel=2e-7)  # 1e-9 of F on a piece, and differences of two kinds
    assert made.hall_factor == near(factor, rel=2e-7)


@pytest.mark.parametrize("block", [1, 3])
def test_blocks_and_points_give_the_same_bits(block, monkeypatch):
    candidate = load_candidate("pbte-p")
    whole = evaluate(candidate, *POINT)
    assert whole.hall_coefficient.shape == whole.hall_factor.shape == (2, 2, 3)
    point = evaluate(candidate, 700.0, 1e25, 5e-8)
    assert point.hall_coefficient == whole.hall_coefficient[1, 0, 1]
    monkeypatch.setattr(properties, "_STATES", block)
    monkeypatch.setattr(properties, "_POINTS", 2 * block)
    assert np.array_equal(evaluate(candidate, *POINT).hall_coefficient, whole.hall_coefficient)
    grid = evaluate(candidate, *(a.copy() for a in np.broadcast_arrays(*POINT)))
    assert np.array_equal(grid.hall_coefficient, whole.hall_coefficient)


def test_signs_and_columns():
    n, p = (evaluate(load_candidate(name), 300.0, 1e26, [2e-8, np.inf]) for name in ("pbte-n", "pbte-p"))
    assert np.all(n.hall_coefficient < 0)
    assert np.all(p.hall_coefficient > 0)
    # one kind of carrier: Hall mobility is the factor times the drift mobility
    assert n.hall_mobility == near(n.hall_factor * n.mobility, rel=1e-6)
    table = p.to_frame()
    assert table["hall coefficient [cm^3/C]"][1] == near(p.hall_coefficient[1] * 1e6, rel=1e-14)
    assert table["hall mobility [cm^2/V/s]"][1] == near(p.hall_mobility[1] * 1e4, rel=1e-14)


def test_mass_ratio_of_a_candidate_bears_on_the_hall_effect_alone(tmp_path):
    source = load_candidate("si-n").path.read_text(encoding="utf-8")
    key = "inertial_mass ="
    ratio = (
        'mass_ratio = {{ value = {}, unit = "1", spread = 0.1, source = "this-library", basis = "from memory" }}'
    )

    def edited(value):
        path = tmp_path / f"si-{value}.toml"
        path.write_text(source.replace(key, f"{ratio.format(value)}\n{key}"), encoding="utf-8")
        return load_candidate(str(path))

    plain = evaluate(load_candidate("si-n"), 300.0, 1e24, np.inf)
    long = evaluate(edited(4.7), 300.0, 1e24, np.inf)
    assert long.electrical_conductivity == plain.electrical_conductivity
    assert long.hall_coefficient == near(plain.hall_coefficient * 3 * 4.7 * 6.7 / 10.4**2, rel=1e-12)
    with pytest.raises(InputError, match="mass_ratio"):
        edited(0)


# ---- from the density of carriers back to the dopant


def test_atomic_per_cent_and_density_are_inverse():
    x, volume = np.array([0.0, 0.01, 2.0, 100.0]), 3.373e-29
    density = active_density(x, volume, 0.7)
    assert atomic_percent(density, volume, 0.7) == near(x, rel=1e-14)
    # silicon has 5.0e22 atoms/cm³ (any handbook, two figures): one per cent of them, all active
    assert active_density(1.0, (5.431e-10) ** 3 / 8) == near(5.0e26, rel=5e-3)
    for bad in (-1.0, 101.0, math.nan):
        with pytest.raises(ValueError, match="atomic per cent"):
            active_density(bad, volume)
    with pytest.raises(ValueError, match="atomic per cent"):
        atomic_percent(1e30, volume)


def test_solubility_has_the_slope_of_its_enthalpy():
    t = np.linspace(400, 1300, 10)
    limit = solubility(3e26, 0.42 * EV, 1100.0, t)
    slope = np.diff(np.log(limit)) / np.diff(1 / (K_B * t))
    assert slope == near(np.full(9, -0.42 * EV), rel=1e-11)  # rounding of the differences
    assert solubility(3e26, 0.42 * EV, 1100.0, 1100.0) == 3e26
    assert np.all(np.diff(limit) > 0)
    for bad in (0.0, -300.0, math.nan):
        with pytest.raises(ValueError, match="above 0 K"):
            solubility(3e26, 0.42 * EV, 1100.0, bad)


SOLUTION = """
solution_enthalpy = { value = 0.3, unit = "eV", spread = 0.3, source = "this-library", basis = "from memory" }
solution_temperature = { value = 1000, unit = "K", spread = 0.05, source = "this-library", basis = "from memory" }
"""


def test_limit_of_a_candidate_follows_its_file(tmp_path):
    plain = load_candidate("pbte-n")
    assert np.array_equal(active_limit(plain.data.doping, [300.0, 900.0]), [plain.data.doping.highest.si] * 2)
    text = plain.path.read_text(encoding="utf-8")
    path = tmp_path / "pbte.toml"
    path.write_text(text.replace("[doping]\n", f"[doping]{SOLUTION}"), encoding="utf-8")
    doping = load_candidate(str(path)).data.doping
    exact = doping.highest.si * math.exp(-0.3 * EV / K_B * (1 / 600 - 1 / 1000))
    assert active_limit(doping, [1000.0, 600.0]) == near([doping.highest.si, exact], rel=1e-12)
    path.write_text(text.replace("[doping]\n", f"[doping]\n{SOLUTION.splitlines()[1]}\n"), encoding="utf-8")
    with pytest.raises(InputError, match="go together"):
        load_candidate(str(path))
