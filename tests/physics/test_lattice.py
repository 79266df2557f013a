"""Lattice heat of a model crystal against closed limits and against plain quadrature of the published formulas."""

import itertools
import math
from dataclasses import replace
from functools import partial

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import constants
from scipy.integrate import quad
from scipy.special import expn, zeta

from legwright.physics import lattice
from legwright.physics.phonon_scattering import carrier_rate

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

EV, M_E, HBAR, K_B = constants.e, constants.m_e, constants.hbar, constants.k
PURE = {"mass_variance": 0.0, "size_variance": 0.0}
ELECTRONS = lattice.Carriers(
    eta=np.array([8.0, 5.0]), valley_mass=np.array([0.3, 0.5]) * M_E, valleys=np.array([4.0, 12.0])
)


def conductivity(
    phonons: lattice.Phonons,
    temperature: float,
    size: float = np.inf,
    shape: str = "grain",
    *,
    doping: float = 0.0,
    carriers: lattice.Carriers | None = None,
    count: int = 128,
) -> float:
    """Acoustic conductivity at one point."""
    mesh, t = lattice.modes(phonons, count), np.array(float(temperature))
    rates = lattice.crystal_rates(phonons, mesh, t, np.array(doping), carriers)
    return float(lattice.acoustic_conductivity(phonons, mesh, rates, t, np.array(float(size)), shape))


# ---- spectrum


def test_dispersion_is_born_and_von_karman(make_phonons):
    phonons = make_phonons()
    # two atoms of 2e-29 m³ a cell: q_D = (6π²/4e-29)^(1/3); ω_max = 2 v q_D/π
    zone = (6 * math.pi**2 / 4e-29) ** (1 / 3)
    assert phonons.zone_edge == near(zone, rel=1e-14)
    assert phonons.top_frequency == near(2 / math.pi * zone * np.array([6000.0, 4000.0]), rel=1e-14)
    mesh = lattice.modes(phonons)
    long = mesh.omega[:, 0] / mesh.q[0]  # sound at the long-wave end: 1 − (πq/2q_D)²/6, q/q_D = 2e-6
    assert long == near([6000.0, 4000.0], rel=1e-10)
    # the group velocity is the slope: compare with differences of neighbouring modes of a fine mesh
    fine = lattice.modes(phonons, 400)
    slope, middle = (
        np.diff(fine.omega, axis=1) / np.diff(fine.q),
        0.5 * (fine.velocity[:, 1:] + fine.velocity[:, :-1]),
    )
    assert np.max(np.abs(slope - middle)) < 1e-4 * 6000


def test_heat_capacity_is_dulong_and_petit_hot_and_debye_cold(make_phonons):
    phonons = make_phonons()
    mesh = lattice.modes(phonons)

    def capacity(t: float) -> float:  # the weights hold the 1/3 of the direction average
        return 3 * float(np.sum(mesh.weight * lattice.mode_heat(mesh.omega, np.array(t))))

    # three acoustic branches of 1/(2 × 2e-29 m³) modes each; next term (θ/T)²/12 ≤ 1e-5
    assert capacity(3e4) == near(3 * K_B / 4e-29, rel=2e-5)
    # Debye (1912): C = Σ (2π²/15) k_B (k_B T/ħv)³; dispersion adds (T/θ)² × 40 at T/θ = 1/110
    cold = sum(n * 2 * math.pi**2 / 15 * K_B * (K_B * 2.0 / (HBAR * v)) ** 3 for n, v in ((1, 6000.0), (2, 4000.0)))
    assert capacity(2.0) == near(cold, rel=5e-3)


def test_heat_of_a_mode_is_einsteins():
    # k_B x² eˣ/(eˣ − 1)² by hand at x = 3
    omega = 3 * K_B * 200.0 / HBAR
    assert lattice.mode_heat(omega, np.array(200.0)) == near(
        K_B * 9 * math.exp(3) / (math.exp(3) - 1) ** 2, rel=1e-13
    )


# ---- one process alone: closed forms

HOT = 3e4  # so hot that every mode holds k_B, but for (θ/T)²/12 ≤ 1e-5
ALONE = PURE | {"normal_ratio": 0.0}


def test_umklapp_alone_in_the_heat_has_a_closed_form(make_phonons):
    # ∫₀^(π/2) x² cot² x dx = π ln 2 − π³/24, so a branch carries k_B q_D (ln 2 − π²/24)/(3π² A T e^(−θ/bT))
    phonons = make_phonons(**ALONE)
    exact = 0.0
    for n, v, gamma in zip((1, 2), (6000.0, 4000.0), (1.1, 0.8), strict=True):
        theta = HBAR * 2 * v * phonons.zone_edge / (math.pi * K_B)
        strength = HBAR * gamma**2 / (6e-26 * v**2 * theta)
        rate = strength * HOT * math.exp(-theta / (3 * HOT))
        exact += n * K_B * phonons.zone_edge * (math.log(2) - math.pi**2 / 24) / (3 * math.pi**2 * rate)
    assert conductivity(phonons, HOT) == near(exact, rel=2e-5)


def test_grey_grains_alone_in_the_heat_have_a_closed_form(make_phonons):
    # Λ = c d for every mode: κ = c d Σ k_B v q_D³/(6π²) ∫ s² cos(πs/2) ds, the integral being (8/π³)(π²/4 − 2)
    phonons = make_phonons(**ALONE, umklapp_weight=0.0, grain_exponent=0.0, grain_prefactor=0.7)
    share = 8 / math.pi**3 * (math.pi**2 / 4 - 2)
    exact = 0.7 * 50e-9 * K_B * (6000 + 2 * 4000) * phonons.zone_edge**3 / (6 * math.pi**2) * share
    assert conductivity(phonons, HOT, 50e-9) == near(exact, rel=2e-5)


def test_point_defects_and_grey_grains_match_plain_quadrature(make_phonons):
    phonons = make_phonons(normal_ratio=0.0, umklapp_weight=0.0, grain_exponent=0.0)
    gamma, zone = 0.02 + 40.0 * 1e-4, phonons.zone_edge

    def branch(v: float) -> float:
        def carried(s: float) -> float:
            q, omega, group = (
                zone * s,
                2 * v * zone / math.pi * math.sin(0.5 * math.pi * s),
                v * math.cos(0.5 * math.pi * s),
            )
            tamura = math.pi / 6 * 2e-29 * gamma * omega**2 * 3 * q**2 / (2 * math.pi**2 * group)
            return q**2 * zone / (6 * math.pi**2) * K_B * group**2 / (tamura + group / 50e-9)

        return quad(carried, 0, 1, epsrel=1e-11)[0]

    # every mode holds k_B but for 1e-5
    assert conductivity(phonons, HOT, 50e-9) == near(branch(6000.0) + 2 * branch(4000.0), rel=2e-5)


@pytest.mark.parametrize("shape", ["wire", "grain"])
def test_cold_fine_wires_and_grains_follow_casimir(shape, make_phonons):
    # Casimir (1938): κ = (1/3) Σ C v d ∝ T³ where walls alone scatter; a grey grain is the same with Λ = c d
    phonons = make_phonons(**ALONE, grain_exponent=0.0)
    t, d = 3.0, 30e-9
    heat = sum(n * 2 * math.pi**2 / 15 * K_B * (K_B * t / HBAR) ** 3 / v**2 for n, v in ((1, 6000.0), (2, 4000.0)))
    found = conductivity(phonons, t, d, shape)
    assert found == near(heat * d / 3, rel=5e-3)  # dispersion, (T/θ)² × 40 at T/θ = 1/75
    assert conductivity(phonons, 2 * t, d, shape) / found == near(8, rel=0.03)
    assert conductivity(phonons, t, 2 * d, shape) / found == near(2, rel=1e-3)


# ---- normal processes


def test_without_normal_processes_the_modes_simply_add_up(make_phonons):
    phonons = make_phonons(normal_weight=0.0)
    mesh, t = lattice.modes(phonons), np.array(150.0)
    rates = lattice.crystal_rates(phonons, mesh, t, np.array(0.0), None)
    plain = np.sum(mesh.weight * lattice.mode_heat(mesh.omega, t) * mesh.velocity**2 / rates.resistive)
    assert conductivity(phonons, 150.0) == near(float(plain), rel=1e-14)


@pytest.mark.parametrize("ratio", [0.0, 0.3, 10.0, 1e6])
def test_normal_processes_change_nothing_where_all_modes_resist_alike(ratio, make_phonons):
    # straight branches of one speed and one resistive rate: the shared drift is the solution already, so
    # κ = (1/3) C v² τ_R whatever the normal rate (Callaway 1959)
    phonons, v, rate = make_phonons(), 5000.0, 3e10
    mesh = lattice.modes(phonons)
    straight = replace(mesh, omega=v * np.stack([mesh.q, mesh.q]), velocity=np.full(mesh.velocity.shape, v))
    t = np.array(200.0)
    zero = np.zeros(mesh.velocity.shape)
    rates = lattice.Rates(
        umklapp=zero + rate, defects=zero, carriers=zero, normal=ratio * rate * (straight.omega / 1e13) ** 2
    )
    found = lattice.acoustic_conductivity(phonons, straight, rates, t, np.array(np.inf), "grain")
    third = float(np.sum(mesh.weight * lattice.mode_heat(straight.omega, t)))
    assert found == near(third * v**2 / rate, rel=1e-12)


def test_overwhelming_normal_processes_reach_zimans_limit(make_phonons):
    # Ziman (1960): κ = [Σ∫ C v q/ω]²/Σ∫ C (q/ω)²/τ_R, the least of the family. Umklapp alone resists: the point
    # defects of a sine branch would make the lower integral diverge, as the logarithm, at the zone edge
    phonons = make_phonons(**PURE)
    mesh, t = lattice.modes(phonons), np.array(150.0)
    resist = lattice.crystal_rates(phonons, mesh, t, np.array(0.0), None).resistive
    heat, slowness = mesh.weight * lattice.mode_heat(mesh.omega, t), mesh.q / mesh.omega
    ziman = np.sum(heat * mesh.velocity * slowness) ** 2 / np.sum(heat * slowness**2 * resist)
    strong = conductivity(replace(phonons, normal_weight=1e12), 150.0)
    assert strong == near(float(ziman), rel=1e-6)
    assert strong < conductivity(phonons, 150.0) < conductivity(replace(phonons, normal_weight=0.0), 150.0)


def fuchs(knudsen: float) -> float:
    """Diffuse film in plane (Fuchs 1938) by scipy's exponential integrals; its limit where they cancel."""
    if knudsen > 1e5:
        return 0.75 * (math.log(knudsen) + 1 - np.euler_gamma) / knudsen
    k = 1 / knudsen
    return 1 - 3 / (8 * k) + 3 / (2 * k) * (expn(3, k) - expn(5, k))


def callaway_by_quadrature(phonons: lattice.Phonons, t: float, d: float, doping: float, shape: str) -> float:
    """Callaway's conductivity with grains or faces, defects, dopants, Umklapp and normal processes."""
    zone = phonons.zone_edge
    disorder = phonons.mass_variance + phonons.strain_parameter * phonons.size_variance
    dopants = phonons.dopant_mass_variance + phonons.strain_parameter * phonons.dopant_size_variance
    disorder += doping * phonons.volume_per_atom * dopants

    def parts(v: float, gamma: float, which: int) -> float:
        top = 2 * v * zone / math.pi
        theta = HBAR * top / K_B
        strength = HBAR * gamma**2 / (phonons.mean_mass * v**2 * theta)

        def integrand(s: float) -> float:
            q, omega = zone * s, top * math.sin(0.5 * math.pi * s)
            group = v * math.cos(0.5 * math.pi * s)
            x = HBAR * omega / (K_B * t)
            heat = K_B * x**2 * math.exp(x) / math.expm1(x) ** 2
            resistive = strength * omega**2 * t * math.exp(-theta / (phonons.umklapp_divisor * t))
            resistive += (
                math.pi / 6 * phonons.volume_per_atom * disorder * omega**2 * 3 * q**2 / (2 * math.pi**2 * group)
            )
            normal = phonons.normal_ratio * strength * omega**2 * t
            if shape == "grain":
                resistive += group / (phonons.grain_prefactor * d) * math.sqrt(omega / top)
                lifetime = 1 / (resistive + normal)
            else:  # the faces shorten the lifetime; what they add to the rates destroys momentum
                inside = 1 / (resistive + normal)
                lifetime = inside * fuchs(group * inside / d)
                resistive = 1 / lifetime - normal
            share = q**2 * zone / (6 * math.pi**2) * heat
            slow = q / omega
            return (
                share
                * (
                    group**2 * lifetime,
                    group * slow * lifetime * normal,
                    slow**2 * lifetime * normal * resistive,
                )[which]
            )

        edges = (1e-12, 1e-3, 0.03, 0.2, 0.5, 0.8, 0.95, 1 - 1e-9)
        return sum(quad(integrand, a, b, epsabs=0, epsrel=1e-11)[0] for a, b in itertools.pairwise(edges))

    direct, drift, lost = (parts(6000.0, 1.1, k) + 2 * parts(4000.0, 0.8, k) for k in range(3))
    return direct + drift**2 / lost


@pytest.mark.parametrize(
    ("t", "d", "shape"),
    [
        (40.0, 1e-6, "grain"),
        (300.0, 50e-9, "grain"),
        (900.0, np.inf, "grain"),
        (80.0, 3e-7, "film"),
        (400.0, 20e-9, "film"),
    ],
)
def test_callaway_matches_plain_quadrature(t, d, shape, make_phonons):
    phonons = make_phonons()
    exact = callaway_by_quadrature(phonons, t, d, 1e26, shape)
    # the mesh leaves 1e-12 (measured against 512 modes), the quadrature 1e-9
    assert conductivity(phonons, t, d, shape, doping=1e26) == near(exact, rel=3e-9)
    # gathered by mean free path first, as `evaluate` does
    mesh = lattice.modes(phonons)
    rates = lattice.crystal_rates(phonons, mesh, np.array([t]), np.array([1e26]), None)
    spectrum = lattice.heat_spectrum(phonons, mesh, rates, np.array([t]), shape)
    assert lattice.conductivity_at(spectrum, np.array([d]), shape)[0] == near(exact, rel=5e-9)


CASES = [
    (10.0, 1e-6, "grain"),
    (100.0, np.inf, "grain"),
    (100.0, 50e-9, "wire"),
    (300.0, 50e-9, "film"),
    (900.0, 2e-8, "grain"),
]


def mesh_error(phonons: lattice.Phonons, count: int) -> float:
    exact = [conductivity(phonons, *case, count=512) for case in CASES]
    found = [conductivity(phonons, *case, count=count) for case in CASES]
    return float(np.max(np.abs(np.divide(found, exact) - 1)))


def test_doubling_the_modes_squares_the_error_of_an_alloy(make_phonons):
    # Gauss–Legendre on an analytic integrand converges geometrically: e(2n) ≈ e(n)²
    at_16, at_32, at_64 = (mesh_error(make_phonons(), count) for count in (16, 32, 64))
    assert 1e-6 < at_16 < 1e-3
    assert at_32 < 10 * at_16**2
    assert at_64 < 2e-14  # rounding of the sum


def test_a_nearly_pure_crystal_is_no_harder(make_phonons):
    # few defects and the diverging density of states at the zone edge make a thin layer there, where the mesh
    # is close: 1e-4, 1.3e-9 and 6e-15 were measured with 16, 32 and 64 modes
    clean = make_phonons(mass_variance=2e-4, size_variance=0.0)
    at_16, at_32, at_64 = (mesh_error(clean, count) for count in (16, 32, 64))
    assert at_16 < 2e-4
    assert at_32 < 3e-9
    assert at_64 < 2e-14


# ---- what each process does

WEIGHTS = ["umklapp_weight", "normal_weight", "defect_weight", "carrier_weight"]


@pytest.mark.parametrize("weight", WEIGHTS)
def test_doubling_a_rate_costs_heat_and_switching_it_off_gives_heat(weight, make_phonons):
    phonons = make_phonons(mass_variance=2e-3)

    def at(value: float) -> float:
        made = replace(phonons, **{weight: value})
        return conductivity(made, 300.0, 1e-6, doping=1e26, carriers=ELECTRONS)

    assert at(2.0) < 0.97 * at(1.0)
    assert at(0.0) > 1.03 * at(1.0)


def test_switching_off_removes_exactly_that_rate(make_phonons):
    phonons = make_phonons()
    mesh, t, n = lattice.modes(phonons), np.array(300.0), np.array(1e26)
    full = lattice.crystal_rates(phonons, mesh, t, n, ELECTRONS)
    assert np.all(full.resistive == full.umklapp + full.defects + full.carriers)
    for weight, name in zip(WEIGHTS, ("umklapp", "normal", "defects", "carriers"), strict=True):
        cut = lattice.crystal_rates(replace(phonons, **{weight: 0.0}), mesh, t, n, ELECTRONS)
        for other in ("umklapp", "normal", "defects", "carriers"):
            assert np.array_equal(
                getattr(cut, other), 0 * getattr(full, other) if other == name else getattr(full, other)
            ) or (other == name == "carriers" and not np.any(cut.carriers))


def test_carriers_of_all_bands_add_up(make_phonons):
    phonons = make_phonons()
    mesh, t = lattice.modes(phonons), np.array(300.0)
    found = lattice.crystal_rates(phonons, mesh, t, np.array(1e26), ELECTRONS).carriers
    expected = sum(
        carrier_rate(mesh.omega, mesh.q, 300.0, eta, m, valleys, 3 * EV, 3000.0)
        for eta, m, valleys in ((8.0, 0.3 * M_E, 4.0), (5.0, 0.5 * M_E, 12.0))
    )
    assert found == near(expected, rel=1e-12)


def test_scales_act_on_what_they_name(make_phonons):
    phonons = make_phonons()
    mesh, t, n = lattice.modes(phonons), np.array(300.0), np.array(1e26)
    plain = lattice.crystal_rates(phonons, mesh, t, n, None)
    scaled = lattice.crystal_rates(replace(phonons, anharmonic_scale=2.0, strain_scale=3.0), mesh, t, n, None)
    assert scaled.umklapp == near(2 * plain.umklapp, rel=1e-14)
    assert scaled.normal == near(2 * plain.normal, rel=1e-14)
    # Γ = mass + S² × size for the host and, per dopant atom in 2e-29 m³ × 1e26 m⁻³, for the dopants
    share = 2e-29 * 1e26
    before, after = (0.02 + s * 1e-4 + share * (0.5 + s * 0.01) for s in (40.0, 120.0))
    assert scaled.defects == near(plain.defects * after / before, rel=1e-13)


@pytest.mark.parametrize(
    ("change", "direction"),
    [({"grain_prefactor": 2.0}, 1), ({"grain_exponent": 0.0}, -1), ({"grain_exponent": 1.0}, 1)],
)
def test_the_grain_law_matters(change, direction, make_phonons):
    # a longer boundary path, or one that grows faster with wavelength, lets more heat through
    before = conductivity(make_phonons(), 300.0, 30e-9)
    after = conductivity(make_phonons(**change), 300.0, 30e-9)
    assert direction * (after / before - 1) > 0.05
    # and nothing of it in coarse material
    assert conductivity(make_phonons(**change), 300.0) == conductivity(make_phonons(), 300.0)


@pytest.mark.parametrize("shape", ["grain", "wire", "film"])
def test_large_bodies_are_bulk_and_thin_ones_conduct_less(shape, make_phonons):
    phonons = make_phonons()
    bulk = conductivity(phonons, 300.0)
    ratio = [conductivity(phonons, 300.0, d, shape) / bulk for d in (1.0, 1e-5, 1e-6, 1e-7, 1e-8)]
    assert ratio[0] == near(1, abs=1e-3)  # the longest waves feel even a metre: Λ grows as ω⁻²
    assert all(b < a for a, b in itertools.pairwise(ratio))
    assert ratio[-1] < 0.25


def test_at_one_size_a_film_conducts_best_and_a_wire_less(make_phonons):
    # a film bounds in one direction, a wire in two
    wire, film = (conductivity(make_phonons(), 300.0, 50e-9, shape) for shape in ("wire", "film"))
    assert wire < 0.9 * film


@given(
    t=st.floats(15, 1200),
    log_d=st.lists(st.floats(-9, -3), min_size=2, max_size=6),
    shape=st.sampled_from(["grain", "wire", "film"]),
    disorder=st.floats(1e-4, 0.3),
    ratio=st.floats(0, 10),
)
@settings(derandomize=True, deadline=None, max_examples=40)
def test_conductivity_falls_with_size_and_with_disorder(t, log_d, shape, disorder, ratio, make_phonons):
    sizes = [*(10**x for x in sorted(log_d)), np.inf]
    few, many = (
        [conductivity(make_phonons(mass_variance=g, normal_ratio=ratio), t, d, shape) for d in sizes]
        for g in (disorder, 1.5 * disorder)
    )
    assert np.all(np.isfinite(few))
    assert np.all(np.array(few) > 0)
    assert np.all(np.diff(few) >= -1e-12 * np.array(few[1:]))
    assert np.all(np.array(many) < few)


# ---- glass and optical modes


def cahill(phonons: lattice.Phonons, t: float, start: float = 0.0) -> float:
    """Cahill, Watson & Pohl (1992), each branch from `start` × θ/T, by QUADPACK."""
    total = 0.0
    for n, v in ((1, 6000.0), (2, 4000.0)):
        theta = HBAR * v / K_B * (6 * math.pi**2 / 2e-29) ** (1 / 3)
        top = theta / t
        integral = quad(
            lambda x: x**3 * math.exp(-x) / math.expm1(-x) ** 2, max(start * top, 1e-9), top, epsrel=1e-12
        )[0]
        total += n * v / top**2 * integral
    return (math.pi / 6) ** (1 / 3) * K_B * (1 / 2e-29) ** (2 / 3) * total


@pytest.mark.parametrize("t", [60.0, 300.0, 1500.0])
def test_amorphous_minimum_matches_plain_quadrature(t, make_phonons):
    assert lattice.amorphous_minimum(make_phonons(), np.array(t)) == near(cahill(make_phonons(), t), rel=1e-9)


def test_amorphous_minimum_in_the_heat_and_in_the_cold(make_phonons):
    # ½ (π/6)^(1/3) k_B n^(2/3) (v_l + 2 v_t), less (θ/T)²/72; and T² with ∫ x³eˣ/(eˣ−1)² dx = 6 ζ(3)
    hot = 0.5 * (math.pi / 6) ** (1 / 3) * K_B * 2e-29 ** (-2 / 3) * 14000
    assert lattice.amorphous_minimum(make_phonons(), np.array(2e5)) == near(hot, rel=1e-6)
    cold = 0.0
    for n, v in ((1, 6000.0), (2, 4000.0)):
        theta = HBAR * v / K_B * (6 * math.pi**2 / 2e-29) ** (1 / 3)
        cold += (math.pi / 6) ** (1 / 3) * K_B * 2e-29 ** (-2 / 3) * n * v * (20 / theta) ** 2 * 6 * zeta(3)
    assert lattice.amorphous_minimum(make_phonons(), np.array(20.0)) == near(cold, rel=1e-5)


def test_optical_heat_needs_more_than_one_atom_a_cell(make_phonons):
    assert lattice.optical_conductivity(make_phonons(atoms=1.0), np.array(400.0)) == 0
    for atoms in (2.0, 5.0, 17.0):
        made = make_phonons(atoms=atoms)
        expected = cahill(made, 400.0, atoms ** (-1 / 3))
        assert lattice.optical_conductivity(made, np.array(400.0)) == near(expected, rel=1e-9)
    hot = [float(lattice.optical_conductivity(make_phonons(atoms=n), np.array(1e5))) for n in (2.0, 8.0)]
    whole = float(lattice.amorphous_minimum(make_phonons(), np.array(1e5)))
    assert np.divide(hot, whole) == near([1 - 2 ** (-2 / 3), 3 / 4], rel=1e-5)


def test_known_optical_heat_comes_on_top_of_the_least(make_phonons):
    plain = make_phonons(atoms=2.0)
    rich = replace(plain, optical_excess=0.5, optical_temperature=300.0)
    t = np.array([300.0, 600.0, 1200.0])
    more = lattice.optical_conductivity(rich, t) - lattice.optical_conductivity(plain, t)
    top = float(np.max(plain.top_frequency))
    held = [einstein_share(HBAR * top / (K_B * float(one))) for one in t]
    # Einstein heat capacity over T, both relative to 300 K
    assert more == near([0.5 * c / held[0] * 300.0 / one for c, one in zip(held, t, strict=True)], rel=1e-12)
    cold = np.array(3.0)  # frozen out: exp(−θ/3 K) beats 1/T
    gone = lattice.optical_conductivity(rich, cold) - lattice.optical_conductivity(plain, cold)
    assert 0 <= gone < 1e-9


def einstein_share(x: float) -> float:
    """x² eˣ/(eˣ − 1)²: Einstein 1907, in plain floats."""
    return x**2 * math.exp(x) / math.expm1(x) ** 2
