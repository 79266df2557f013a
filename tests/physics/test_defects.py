"""Vacancies, dislocations and precipitates: published forms, their limits, and what they do to a crystal."""

from __future__ import annotations

import itertools
import math
from functools import partial
from pathlib import Path

import numpy as np
import pytest
from scipy import constants
from scipy.integrate import quad

from legwright.base.errors import InputError
from legwright.candidate.composition import atomic_mass
from legwright.candidate.library import load_candidate
from legwright.physics import lattice
from legwright.physics.crystal import bulk_lattice_conductivity, crystal
from legwright.physics.phonon_scattering import (
    dislocation_core_rate,
    dislocation_strain_rate,
    point_defect_rate,
    precipitate_rate,
    vacancy_disorder,
)
from legwright.physics.shares import thermal_limits

near = partial(pytest.approx, abs=0.0)

T, UNDOPED = np.array(300.0), np.array(0.0)


def conductivity(phonons: lattice.Phonons, temperature: float = 300.0) -> float:
    mesh, t = lattice.modes(phonons), np.array(temperature)
    rates = lattice.crystal_rates(phonons, mesh, t, UNDOPED, None)
    return float(lattice.acoustic_conductivity(phonons, mesh, rates, t, np.array(np.inf), "grain"))


# ---- vacancies


def test_a_vacancy_in_an_element_counts_nine_masses():
    # Ratsifaritana & Klemens (1987): ΔM/M = −M_a/M̄ − 2 = −3 where all atoms are alike
    assert vacancy_disorder(1e-3, 5.0, 5.0) == near(9e-3, rel=1e-15)
    # in a compound: 1 % of light atoms, (0.2 + 2)² = 4.84, and of heavy ones, (1.8 + 2)² = 14.44
    assert vacancy_disorder(0.01, [0.2, 1.8], 1.0) == near([0.0484, 0.1444], rel=1e-14)


def test_vacancies_are_point_defects(make_phonons):
    phonons = make_phonons(vacancy_disorder=0.09)
    mesh = lattice.modes(phonons)
    with_them, without = (
        lattice.crystal_rates(made, mesh, T, UNDOPED, None).defects for made in (phonons, make_phonons())
    )
    assert with_them - without == near(point_defect_rate(mesh.omega, mesh.states, 2e-29, 0.09), rel=1e-9)


# ---- dislocations


def test_dislocations_in_round_numbers():
    # cores: N_D V^(4/3) ω³/v² with V = 1e-27 (V^(4/3) = 1e-36): 1e14 × 1e-36 × 1e36/1e6 = 1e8
    assert dislocation_core_rate(1e12, 1e3, 1e14, 1e-27) == near(1e8, rel=1e-12)
    # strain: 0.06 N_D γ² b² ω = 0.06 × 1e14 × 4 × 1e-18 × 1e12 = 2.4e7
    assert dislocation_strain_rate(1e12, 1e14, 1e-9, 2.0) == near(2.4e7, rel=1e-12)


def test_cores_grow_as_the_cube_and_strain_as_the_first_power_of_frequency():
    omega = np.array([1e12, 2e12])
    assert np.divide(*dislocation_core_rate(omega, 5e3, 1e15, 2e-29)[::-1]) == near(8, rel=1e-14)
    assert np.divide(*dislocation_strain_rate(omega, 1e15, 4e-10, 1.5)[::-1]) == near(2, rel=1e-14)


def test_strain_alone_follows_a_square_law_when_cold(make_phonons):
    """Klemens (1958): where strain fields alone scatter, κ goes as T²."""
    a = 0.06 * 1e15 * (4e-10) ** 2
    phonons = make_phonons(
        dislocation_density=1e15, burgers_vector=4e-10, umklapp_weight=0.0, normal_weight=0.0, defect_weight=0.0
    )
    t, zeta_3 = 0.5, 1.2020569031595942
    # ∫₀^∞ x³ eˣ/(eˣ − 1)² dx = 6 ζ(3); κ = Σ (k_B/6π² v)(k_B T/ħ)² 6ζ(3)/(a γ²)
    thermal = constants.k * t / constants.hbar
    exact = sum(
        n * constants.k / (6 * np.pi**2 * v) * thermal**2 * 6 * zeta_3 / (a * g**2)
        for n, v, g in ((1, 6000.0, 1.1), (2, 4000.0, 0.8))
    )
    assert conductivity(phonons, t) == near(exact, rel=1e-2)  # cores and dispersion: (T/θ)² × 40
    assert conductivity(phonons, 2 * t) / conductivity(phonons, t) == near(4, rel=2e-2)


# ---- precipitates


def kim_majumdar(q: float, v: float, share: float, radius: float, contrast: float) -> float:
    """As published, one radius."""
    short = 2 * math.pi * radius**2
    long = math.pi * radius**2 * 4 / 9 * contrast**2 * (q * radius) ** 4
    return v * share / (4 / 3 * math.pi * radius**3) / (1 / short + 1 / long)


@pytest.mark.parametrize("q", [1e6, 3e8, 1e9, 1e10])
def test_one_radius_is_the_published_form(q):
    found = precipitate_rate(q, 4000.0, 0.02, 2e-9, 0.7)
    assert found == near(kim_majumdar(q, 4000.0, 0.02, 2e-9, 0.7), rel=1e-14)


@pytest.mark.parametrize("spread", [0.1, 0.5, 1.0, 1.5])
@pytest.mark.parametrize("q_radius", [1e-3, 0.3, 1.0, 3.0, 1e3])
def test_spread_radii_match_plain_quadrature(q_radius, spread):
    radius, q = 2e-9, q_radius / 2e-9

    def among(z: float, moment: bool) -> float:
        r = radius * math.exp(spread * z)
        weight = math.exp(-0.5 * z**2) / math.sqrt(2 * math.pi)
        if moment:
            return weight * (r / radius) ** 3
        return weight * kim_majumdar(q, 4000.0, 1.0, r, 0.7) * (r / radius) ** 3

    edges = np.linspace(-9, 9 + 6 * spread, 13)
    top, below = (
        sum(quad(among, a, b, args=(moment,), epsabs=0, epsrel=1e-11)[0] for a, b in itertools.pairwise(edges))
        for moment in (False, True)
    )
    # trapezoids of step 0.1: the pole of σ at Im ln R = π/4 leaves exp(−20π × π/4s), 5e-15 at s = 1.5
    assert precipitate_rate(q, 4000.0, 0.02, radius, 0.7, spread) == near(0.02 * top / below, rel=1e-9)


@pytest.mark.parametrize("spread", [0.0, 0.4, 1.0])
def test_limits_of_long_and_short_waves(spread):
    """Log-normal moments: Rayleigh ⟨R⁶⟩/⟨R³⟩ = R³ e^(13.5 s²), geometric ⟨R²⟩/⟨R³⟩ = e^(−2.5 s²)/R."""
    radius, contrast = 3e-9, 0.5
    q_long, q_short = 1e3, 1e16
    rayleigh = 0.02 / (4 / 3) * 4 / 9 * contrast**2 * q_long**4 * radius**3 * math.exp(13.5 * spread**2)
    assert precipitate_rate(q_long, 1.0, 0.02, radius, contrast, spread) == near(rayleigh, rel=1e-9)
    geometric = 0.02 / (4 / 3) * 2 / radius * math.exp(-2.5 * spread**2)
    assert precipitate_rate(q_short, 1.0, 0.02, radius, contrast, spread) == near(geometric, rel=1e-9)


def test_what_is_like_its_host_scatters_nothing():
    assert precipitate_rate(1e9, 4000.0, 0.02, 3e-9, 0.0) == 0
    heavier, lighter = precipitate_rate(1e9, 4000.0, 0.02, 3e-9, [0.4, -0.4])
    assert heavier == lighter


# ---- in a crystal

DEFECTS = {
    "vacancy_weight": {"vacancy_disorder": 0.09},
    "dislocation_weight": {"dislocation_density": 1e16, "burgers_vector": 4e-10},
    "precipitate_weight": {"precipitate_share": 0.03, "precipitate_radius": 2e-9, "precipitate_contrast": 0.8},
}


@pytest.mark.parametrize("weight", DEFECTS)
def test_each_kind_costs_heat_by_its_weight(weight, make_phonons):
    at = [conductivity(make_phonons(**DEFECTS[weight], **{weight: value})) for value in (0.0, 1.0, 2.0)]
    assert at[0] == conductivity(make_phonons())
    assert at[2] < 0.99 * at[1] < 0.98 * at[0]


def test_rates_add_up(make_phonons):
    phonons = make_phonons(**{key: value for table in DEFECTS.values() for key, value in table.items()})
    mesh = lattice.modes(phonons)
    rates = lattice.crystal_rates(phonons, mesh, T, UNDOPED, None)
    total = rates.umklapp + rates.defects + rates.carriers + rates.dislocations + rates.precipitates
    assert rates.resistive == near(total, rel=1e-15)
    cores = dislocation_core_rate(mesh.omega, [[6000.0], [4000.0]], 1e16, 2e-29)
    strain = dislocation_strain_rate(mesh.omega, 1e16, 4e-10, [[1.1], [0.8]])
    assert rates.dislocations == near(cores + strain, rel=1e-14)
    assert rates.precipitates == near(precipitate_rate(mesh.q, mesh.velocity, 0.03, 2e-9, 0.8), rel=1e-14)


def test_a_crystal_without_them_has_no_such_rates(make_phonons):
    rates = lattice.crystal_rates(make_phonons(), lattice.modes(make_phonons()), T, UNDOPED, None)
    assert rates.dislocations is None
    assert rates.precipitates is None


def test_precipitates_stop_long_waves_and_alloying_short_ones(make_phonons):
    """So the two together cost more than either, and precipitates cost an alloy a larger share than vacancies."""
    alloy = {"mass_variance": 0.2}
    plain, inclusions, gaps, both = (
        conductivity(make_phonons(**alloy, **extra))
        for extra in (
            {},
            DEFECTS["precipitate_weight"],
            {"vacancy_disorder": 0.02},
            DEFECTS["precipitate_weight"] | {"vacancy_disorder": 0.02},
        )
    )
    assert both < min(inclusions, gaps)
    assert inclusions / plain < gaps / plain


# ---- in a candidate file


def number(value: float, unit: str, spread: float = 0.2) -> str:
    origin = 'source = "trade-practice", basis = "from memory"'
    return f'{{ value = {value}, unit = "{unit}", spread = {spread}, {origin} }}'


def tables(in_anchors: str) -> str:
    return f"""
[lattice.vacancies]
share = {number(0.1, "percent")}
element = "Si"
in_anchors = {in_anchors}

[lattice.dislocations]
density = {number(1e12, "1/cm^2")}
burgers_vector = {number(0.384, "nm")}
in_anchors = {in_anchors}

[lattice.precipitates]
volume_share = {number(2, "percent")}
radius = {number(3, "nm")}
radius_spread = {number(0.4, "1")}
mass_density = {number(9.0, "g/cm^3")}
in_anchors = {in_anchors}
"""


def written(folder: Path, extra: str, name: str = "sige-n") -> Path:
    text = load_candidate(name).path.read_text(encoding="utf-8")
    before, after = text.split("\n[[anchor]]", 1)
    path = folder / f"{name}.toml"
    path.write_text(f"{before}\n{extra}\n[[anchor]]{after}", encoding="utf-8")
    return path


@pytest.fixture
def with_defects(tmp_path):
    return load_candidate(written(tmp_path, tables("false")))


def test_a_file_gives_every_field(with_defects):
    phonons = crystal(with_defects).phonons
    mean = with_defects.disorder.mean_mass
    assert phonons.vacancy_disorder == near(1e-3 * (atomic_mass("Si") / mean + 2) ** 2, rel=1e-12)
    assert phonons.dislocation_density == near(1e16, rel=1e-12)
    assert phonons.burgers_vector == near(3.84e-10, rel=1e-12)
    assert phonons.precipitate_share == near(0.02, rel=1e-12)
    assert phonons.precipitate_radius == near(3e-9, rel=1e-12)
    assert phonons.precipitate_spread == 0.4
    host = mean / with_defects.data.cell.volume_per_atom.si
    assert phonons.precipitate_contrast == near(9000 / host - 1, rel=1e-12)


def test_defects_brought_by_the_making_leave_the_prefactors_alone(with_defects):
    plain, changed = crystal(load_candidate("sige-n")), crystal(with_defects)
    assert changed.phonons.anharmonic_scale == plain.phonons.anharmonic_scale
    assert changed.phonons.strain_scale == plain.phonons.strain_scale
    before, after = (bulk_lattice_conductivity(one, 300.0, 2e26) for one in (plain, changed))
    assert after < 0.9 * before


def test_defects_of_the_anchors_are_inside_the_anchored_figures(tmp_path):
    few = (
        "[lattice.dislocations]"
        + tables("true").split("[lattice.precipitates]")[0].split("[lattice.dislocations]")[1]
    )
    held = crystal(load_candidate(written(tmp_path, few)))
    plain = crystal(load_candidate("sige-n"))
    assert held.phonons.dislocation_weight == 1.0
    assert held.phonons.anharmonic_scale < plain.phonons.anharmonic_scale
    added = crystal(load_candidate(written(tmp_path, few.replace("true", "false"))))
    before, inside, on_top = (bulk_lattice_conductivity(one, 300.0, 2e26) for one in (plain, held, added))
    # the prefactors move so that the anchors are met about as before; more anchors than unknowns
    assert abs(inside - before) < 0.1 * (before - on_top)


def test_they_are_named_among_what_limits(with_defects):
    shares = thermal_limits(crystal(with_defects), 300.0, 2e26, 1e-7, "grain").shares
    assert {"dislocations", "precipitates"} <= shares.keys()
    assert sum(shares.values()) == near(1, rel=1e-12)
    assert shares["precipitates"] > 0.01


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ('element = "Si"', 'element = "Te"', "'Te' is not in the formula"),
        ("value = 2, unit", "value = 50, unit", "out of range"),
        ('"1/cm^2"', '"1/cm^3"', "converts to 1/m"),
        ("in_anchors = false\n\n[lattice.dis", "\n\n[lattice.dis", "in_anchors"),
    ],
)
def test_what_cannot_be_is_refused(old, new, message, tmp_path):
    text = tables("false")
    assert old in text
    with pytest.raises(InputError, match=message):
        load_candidate(written(tmp_path, text.replace(old, new)))
