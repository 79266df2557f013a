"""Polar-optical scattering: the golden rule by quadrature, Howarth and Sondheimer's limit, Kane bands, refusals."""

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
from legwright.physics import moments
from legwright.physics.bands import density_of_states, kane_slope, wave_number_squared
from legwright.physics.carrier_scattering import polar_rate
from legwright.physics.crystal import crystal
from legwright.physics.properties import evaluate

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

EV, M_E, K_B, HBAR, EPS_0 = constants.e, constants.m_e, constants.k, constants.hbar, constants.epsilon_0
KELVIN_VOLT = K_B / EV
STATIC, HIGH = 414 * EPS_0, 33 * EPS_0


def by_golden_rule(energy, mass, alpha, temperature, screening):
    """Angular integral of |M_q|² (1 − cos θ) over a sphere: Fröhlich's coupling, emission and absorption both in
    equipartition, k_BT e²(1/ε_∞ − 1/ε_s)/(q² + q_∞²), and the overlap of two-band Kane states, 1 − v² sin²(θ/2)."""
    gamma, slope = energy * (1 + alpha * energy), 1 + 2 * alpha * energy
    k2 = 2 * mass * gamma / HBAR**2
    mixing = 4 * alpha * gamma / slope**2
    one_spin = (2 * mass) ** 1.5 * math.sqrt(gamma) * slope / (4 * math.pi**2 * HBAR**3)

    def turned(cosine):
        q2 = 2 * k2 * (1 - cosine)
        return (1 - cosine) / (q2 + screening) * (1 - mixing * (1 - cosine) / 2)

    whole = sum(
        quad(turned, a, b, epsabs=0, epsrel=1e-12)[0]
        for a, b in itertools.pairwise((-1.0, 0.0, 0.9, 0.999, 0.99999, 1.0))
    )
    coupling = EV**2 * K_B * temperature * (1 / HIGH - 1 / STATIC)
    return 2 * math.pi / HBAR * coupling * one_spin * whole / 2


@pytest.mark.parametrize("energy", [1e-5, 0.03, 0.4])
@pytest.mark.parametrize("alpha", [0.0, 0.5, 3.2])
@pytest.mark.parametrize("length", [1e-10, 1e-9, 2e-8, math.inf])
def test_rate_is_that_of_the_golden_rule(energy, alpha, length):
    mass, t = 0.15 * M_E, 500.0
    screening = 0.0 if math.isinf(length) else length**-2
    found = polar_rate(
        density_of_states(energy * EV, mass, alpha / EV),
        kane_slope(energy * EV, alpha / EV),
        wave_number_squared(energy * EV, mass, alpha / EV),
        t,
        STATIC,
        HIGH,
        screening,
    )
    # the bracket as a difference loses ε/b² at worst: 2e-12 where the series takes over, b = 1e-2
    assert found == near(by_golden_rule(energy * EV, mass, alpha / EV, t, screening), rel=1e-11)


def test_strong_and_weak_screening_join():
    # δ near 100, where the closed form hands over to its series
    wave2 = np.array([1.0, 1 + 1e-9]) * 1e18
    rate = polar_rate(1e46, 1.3, wave2, 300.0, STATIC, HIGH, 4e20)
    assert rate[1] / rate[0] == near(1.0, rel=1e-8)
    # deep in the series the braces are b/2 − ½(1 − 1/s²) 2b/3
    b = 1e-8
    bare = math.pi * EV**2 * K_B * 300 * (1 / HIGH - 1 / STATIC) * 1e46 / (2 * HBAR * 1e18)
    exact = bare * (b / 2 - (1 - 1 / 1.69) * b / 3)
    assert polar_rate(1e46, 1.3, 1e18, 300.0, STATIC, HIGH, 4e18 / b) == near(exact, rel=2e-8)


def test_phonons_freeze_out_as_an_einstein_solid_holds_heat():
    # Ziman (1960): ρ ∝ (1/T)/((e^x − 1)(1 − e^−x)), hence x² e^x/(e^x − 1)² of the equipartition rate
    energy, t = 0.03 * EV, np.array([20.0, 100.0, 300.0, 3000.0])
    x = energy / (K_B * t)
    arguments = (1e46, 1.0, 1e18, t, STATIC, HIGH, 1e17)
    ratio = polar_rate(*arguments, energy) / polar_rate(*arguments)
    assert ratio == near(x**2 * np.exp(-x) / (1 - np.exp(-x)) ** 2, rel=1e-11)
    assert np.all(np.isfinite(polar_rate(1e46, 1.0, 1e18, 2.0, STATIC, HIGH, 1e17, 0.2 * EV)))


# ---- in a body

POLAR = {"high_frequency_permittivity": HIGH, "permittivity": STATIC, "acoustic_weight": 0.0, "valleys": 1.0}


def coefficients(found, t):
    l0, l1, l2 = (np.sum(part, axis=-1) for part in (found.l0, found.l1, found.l2))
    sigma = moments.conductivity(l0)
    return sigma, moments.seebeck(l0, l1, t), moments.electronic_heat(l0, l1, l2, t) / (sigma * t)


def test_few_carriers_of_howarth_and_sondheimer(make_electrons, solve):
    # µ = (8/3√π) e τ(k_BT)/m, S = −(k/e)(3 − η), L = 3 (k/e)² for τ ∝ ε^(1/2)
    t, mass = 600.0, 0.15 * M_E
    electrons = make_electrons(dos_mass=mass, inertial_mass=mass, **POLAR)
    filling, sums = solve(electrons, t, 1e16)
    sigma, seebeck, lorenz = coefficients(sums, t)
    thermal = K_B * t
    tau = HBAR**2 * 4 * math.pi * math.sqrt(thermal) / (EV**2 * math.sqrt(2 * mass) * thermal)
    tau /= 1 / HIGH - 1 / STATIC
    mobility = 8 / (3 * math.sqrt(math.pi)) * EV * tau / mass
    # screening by 1e16 carriers: δ ln(1/δ), δ = q²/4k² near 1e-7; the mesh leaves 1e-8
    assert sigma / (EV * 1e16) == near(mobility, rel=5e-6)
    assert seebeck == near(-KELVIN_VOLT * (3 - filling.eta[0]), rel=1e-6)
    assert lorenz == near(3 * KELVIN_VOLT**2, rel=1e-5)


@pytest.mark.parametrize(("temperature", "doping"), [(300.0, 1e24), (300.0, 3e25), (800.0, 1e25)])
def test_kane_band_with_screening_is_what_quadrature_says(temperature, doping, make_electrons, solve):
    alpha, dos, inertia, valleys, xi = 3.2 / EV, 0.26 * M_E, 0.087 * M_E, 4.0, 12 * EV
    electrons = make_electrons(
        dos_mass=dos,
        inertial_mass=inertia,
        nonparabolicity=alpha,
        deformation_potential=xi,
        **(POLAR | {"acoustic_weight": 1.0, "valleys": valleys}),
    )
    filling, sums = solve(electrons, temperature, doping)
    eta, kt, mass = float(filling.eta[0]), K_B * temperature, dos / valleys ** (2 / 3)
    screening = EV**2 * float(filling.compressibility[0]) / HIGH

    def spectral(x):
        energy = x * kt
        gamma, slope = energy * (1 + alpha * energy), 1 + 2 * alpha * energy
        states = math.sqrt(2 * gamma) * dos**1.5 * slope / (math.pi**2 * HBAR**3)
        acoustic = math.pi * kt * xi**2 * states / valleys / (HBAR * 1.5e11) * (slope**2 + 2) / (3 * slope**2)
        rate = acoustic + by_golden_rule(energy, mass, alpha, temperature, screening)
        return states * 2 * gamma / (3 * inertia * slope**2) / rate / (4 * math.cosh((x - eta) / 2) ** 2)

    edges = sorted({0.0, *(max(eta + d, 0.0) for d in (-12, -3, 0, 3, 12, 45)), 1.0})
    l0, l1 = (
        sum(
            quad(
                lambda u, k=k: 2 * u * spectral(u * u) * (u * u - eta) ** k,
                math.sqrt(a),
                math.sqrt(b),
                epsabs=0,
                epsrel=1e-9,
            )[0]
            for a, b in itertools.pairwise(edges)
        )
        for k in range(2)
    )
    sigma, seebeck, _ = coefficients(sums, temperature)
    # a branch point of the logarithm at b = −1, close to the edge when screening is weak, costs the mesh 5e-7
    assert sigma == near(EV**2 * l0, rel=5e-7)
    assert seebeck == near(-KELVIN_VOLT * l1 / l0, rel=5e-7)


def test_weight_doubles_and_switches_off(make_electrons, solve):
    electrons = make_electrons(dos_mass=0.2 * M_E, **(POLAR | {"acoustic_weight": 1.0}))
    plain = make_electrons(dos_mass=0.2 * M_E, permittivity=STATIC, valleys=1.0)
    one, two, none, without = (
        solve(each, 400.0, 1e25)[1].l0
        for each in (
            electrons,
            replace(electrons, polar_weight=2.0),
            replace(electrons, polar_weight=0.0),
            plain,
        )
    )
    assert two < 0.9 * one
    assert one < 0.9 * without
    assert np.array_equal(none, without)


def test_frozen_phonons_let_a_body_conduct(make_electrons, solve):
    # every rate falls by the factor of an Einstein solid, so does the sum of them; mesh and filling are the same
    plain = make_electrons(dos_mass=0.2 * M_E, **POLAR)
    frozen = replace(plain, optical_phonon=0.02 * EV)
    x = 0.02 * EV / (K_B * 120)
    ratio = solve(plain, 120.0, 1e25)[1].l0 / solve(frozen, 120.0, 1e25)[1].l0
    assert ratio == near(x**2 * math.exp(-x) / (1 - math.exp(-x)) ** 2, rel=1e-12)


def test_screening_frees_carriers(make_electrons):
    rates = [
        polar_rate(1e46, 1.0, 1e18, 300.0, STATIC, HIGH, screening) for screening in (0.0, 1e17, 1e18, 1e19, 1e21)
    ]
    assert np.all(np.diff(rates) < 0)
    # k_BT per phonon mode: twice as hot, twice the rate
    assert polar_rate(1e46, 1.0, 1e18, 600.0, STATIC, HIGH) == near(2 * rates[0], rel=1e-14)


# ---- in a candidate file

NUMBER = (
    '{key} = {{ value = {value}, unit = "{unit}", spread = 0.1, source = "this-library", basis = "from memory" }}\n'
)


@pytest.fixture
def with_polar(tmp_path):
    """A candidate of the library with lines added to its scattering table, saved and read."""

    def made(name, *numbers, basis=None):
        lines = "".join(NUMBER.format(key=key, value=value, unit=unit) for key, value, unit in numbers)
        text = (
            load_candidate(name)
            .path.read_text(encoding="utf-8")
            .replace("[scattering]\n", f"[scattering]\n{lines}")
        )
        if basis:
            start = text.index("deformation_potential =")
            end = text.index("\n", start)
            line = text[start:end]
            was = line[line.index('basis = "') :].split('"')[1]
            text = text[:start] + line.replace(f'basis = "{was}"', f'basis = "{basis}"') + text[end:]
        path = tmp_path / f"{name}.toml"
        path.write_text(text, encoding="utf-8")
        return load_candidate(str(path))

    return made


def test_a_candidate_with_polar_phonons_still_meets_its_anchors(with_polar):
    polar = with_polar("mg2sisn-n", ("high_frequency_dielectric", 14, "1"), ("optical_phonon", 30, "meV"))
    with_them, without = (crystal(each).electrons for each in (polar, load_candidate("mg2sisn-n")))
    assert with_them.high_frequency_permittivity == near(14 * EPS_0, rel=1e-14)
    assert with_them.optical_phonon == near(30e-3 * EV, rel=1e-12)
    assert without.high_frequency_permittivity is None
    # the measured mobility is shared out: less of it is left to the deformation potential
    assert with_them.lattice_scale < 0.99 * without.lattice_scale
    anchor = next(a for a in polar.data.anchor if a.fixes == "lattice scattering")
    point = (anchor.temperature.si, anchor.doping.si, np.inf)
    assert evaluate(polar, *point).mobility == near(
        float(evaluate(load_candidate("mg2sisn-n"), *point).mobility), rel=1e-8
    )


@pytest.mark.parametrize(
    ("numbers", "said"),
    [
        ((("high_frequency_dielectric", 500, "1"),), "must be below dielectric_constant"),
        ((("high_frequency_dielectric", 0.5, "1"),), "out of range"),
        ((("optical_phonon", 13.6, "meV"),), "optical_phonon needs high_frequency_dielectric"),
    ],
)
def test_what_cannot_be_is_refused(numbers, said, with_polar):
    with pytest.raises(InputError, match=said):
        with_polar("pbte-n", *numbers)


def test_a_potential_fitted_to_mobility_takes_no_polar_phonons_beside_it(with_polar):
    with pytest.raises(InputError, match=r"band\[1\].deformation_potential is calibrated on bulk"):
        with_polar("si-n", ("high_frequency_dielectric", 10, "1"), basis="calibrated on bulk")
