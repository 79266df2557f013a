"""Lattice heat of short legs against closed limits and plain quadrature; and how many modes the sums need."""

from functools import partial

import numpy as np
import pytest
from scipy import constants
from scipy.integrate import quad

from legwright.base.errors import InputError
from legwright.candidate.library import library_names, load_candidate
from legwright.physics import carriers, lattice
from legwright.physics.crystal import crystal, majority_carriers
from legwright.physics.properties import evaluate
from legwright.physics.short_legs import short_leg_conductance

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

HBAR, K_B = constants.hbar, constants.k
#: sums of 256 doubles
ROUNDING = 1e-12


def short_leg(phonons: lattice.Phonons, temperature: object, length: object) -> np.ndarray:
    """Undoped short legs; temperature and length broadcast."""
    t, span = np.asarray(temperature, dtype=float), np.asarray(length, dtype=float)
    mesh = lattice.modes(phonons)
    rates = lattice.crystal_rates(phonons, mesh, t, np.array(0.0), None)
    return lattice.short_leg_conductivity(mesh, rates, t, span)


def bulk(phonons: lattice.Phonons, temperature: float) -> float:
    mesh, t = lattice.modes(phonons), np.array(float(temperature))
    rates = lattice.crystal_rates(phonons, mesh, t, np.array(0.0), None)
    return float(lattice.acoustic_conductivity(phonons, mesh, rates, t, np.array(np.inf), "grain"))


# ---- short legs


@pytest.mark.parametrize("t", [20.0, 300.0, 1000.0])
@pytest.mark.parametrize("normal_ratio", [0.0, 2.0, 50.0])
def test_a_long_leg_is_coarse_material(t, normal_ratio, make_phonons):
    phonons = make_phonons(normal_ratio=normal_ratio)
    assert float(short_leg(phonons, t, np.inf)) == near(bulk(phonons, t), rel=ROUNDING)


@pytest.mark.parametrize("t", [5.0, 12.0])
def test_a_cold_short_leg_is_ballistic(t, make_phonons):
    # Casimir (1938): G = ¼ Σ C v = Σ π² k_B⁴ T³/(30 ħ³ v²) per area, so κ_eff = G L
    conductance = sum(
        n * np.pi**2 * K_B**4 * t**3 / (30 * HBAR**3 * v**2) for n, v in ((1, 6000.0), (2, 4000.0))
    )  # fmt: skip
    found = float(short_leg(make_phonons(), t, 1e-12)) / 1e-12
    assert found == near(conductance, rel=40 * (t / 400) ** 2)  # dispersion, as for the Debye heat capacity


def test_the_ballistic_limit_is_a_quarter_of_heat_times_speed(make_phonons):
    phonons = make_phonons()
    mesh, t = lattice.modes(phonons), np.array(300.0)
    quarter = float(np.sum(0.75 * mesh.weight * lattice.mode_heat(mesh.omega, t) * mesh.velocity))
    # 4Λ/3L exceeds 1e5 for all but a few slow modes at the zone edge, where v Λ ∝ v² is small
    assert float(short_leg(phonons, 300.0, 1e-15)) / 1e-15 == near(quarter, rel=1e-4)


def test_without_normal_processes_the_modes_conduct_in_parallel(make_phonons):
    phonons = make_phonons(normal_weight=0.0)
    mesh, t, span = lattice.modes(phonons), np.array(300.0), np.array([3e-9, 1e-7, 4e-6])
    rates = lattice.crystal_rates(phonons, mesh, t, np.array(0.0), None)
    heat = 3 * mesh.weight * lattice.mode_heat(mesh.omega, t)  # of all directions
    path = mesh.velocity / rates.resistive
    conductance = short_leg_conductance(heat, mesh.velocity, path, span[:, None, None]).sum(axis=(-2, -1))
    assert lattice.short_leg_conductivity(mesh, rates, t, span) == near(conductance * span, rel=ROUNDING)


def test_umklapp_alone_matches_plain_quadrature(make_phonons):
    phonons = make_phonons(mass_variance=0.0, size_variance=0.0, normal_ratio=0.0)
    t, span, zone = 250.0, 80e-9, phonons.zone_edge
    exact = 0.0
    for n, v, gamma in ((1, 6000.0, 1.1), (2, 4000.0, 0.8)):
        top = 2 * v * zone / np.pi
        theta = HBAR * top / K_B
        strength = HBAR * gamma**2 / (6e-26 * v**2 * theta) * t * np.exp(-theta / (3 * t))

        def carried(s: float, v: float = v, top: float = top, strength: float = strength) -> float:
            omega, group = top * np.sin(0.5 * np.pi * s), v * np.cos(0.5 * np.pi * s)
            half = 0.5 * HBAR * omega / (K_B * t)
            heat = (zone * s) ** 2 * zone / (2 * np.pi**2) * K_B * (half / np.sinh(half)) ** 2
            path = group / (strength * omega**2)
            return 0.25 * heat * group / (1 + 0.75 * span / path)

        exact += n * quad(carried, 1e-12, 1 - 1e-12, epsabs=0, epsrel=1e-11, limit=200)[0]
    # a leg of 80 nm takes a third of the bulk: mesh and quadrature leave 1e-9
    assert float(short_leg(phonons, t, span)) == near(exact * span, rel=3e-9)


@pytest.mark.parametrize("name", ["si-n", "sige-n", "bisbte-p"])
def test_conductivity_grows_and_conductance_falls_with_length(name):
    span = np.geomspace(1e-9, 1e-2, 40)
    kept = short_leg(crystal(load_candidate(name)).phonons, [[100.0], [300.0], [900.0]], span)
    assert kept.shape == (3, 40)
    assert np.all(np.diff(kept, axis=-1) > 0)
    assert np.all(np.diff(kept / span, axis=-1) < 0)


def test_a_leg_has_a_length(make_phonons):
    with pytest.raises(ValueError, match="length > 0"):
        short_leg(make_phonons(), 300.0, 0.0)


# ---- how many modes

SIZES = np.array([1e-9, 1e-8, 1e-7, 1e-6, 1e-5, np.inf])[:, None, None]
KELVIN = np.array([50.0, 100.0, 150.0, 200.0, 300.0, 600.0, 1300.0])
#: largest relative error allowed at each temperature with the usual 128 modes, with carriers and without:
#: thrice the table below or rounding, whichever is larger
WITH_CARRIERS = np.array([2e-2, 7e-4, 1.3e-5, 1.2e-6, 1.5e-9, ROUNDING * 10, ROUNDING * 10])
UNDOPED = np.full(KELVIN.shape, ROUNDING)
#: the edge at twice the Fermi wave number lies where the mesh is wider (light or very many carriers), so that 128
#: modes give 2.8e-5 at 200 K (p-Ge), 1.2e-6 (InSb) to 1e-9 (ZnO) at 300 K, 6.7e-10 at 600 K (p-Si), and 1.7e-9 at
#: 1300 K (BiSb): thrice the largest of each
SHARP = {"bisb-n", "ge-p", "insb-n", "pbse-p", "si-p", "snte-p", "zno-n"}
OF_SHARP = np.array([2e-2, 2.4e-3, 4.6e-4, 8.6e-5, 3.7e-6, 2.4e-9, 5.1e-9])


def conductivities(name: str, counts: tuple[int, ...], shape: str, *, doped: bool) -> list[np.ndarray]:
    """Acoustic conductivity (sizes, temperatures, dopings) with each count of modes."""
    candidate = load_candidate(name)
    one, doping = crystal(candidate), candidate.data.doping
    t, n = np.broadcast_arrays(KELVIN[:, None], np.geomspace(doping.lowest.si, doping.highest.si, 3))
    eta = carriers.fill(one.electrons, t, n).eta
    among = majority_carriers(one.electrons, t, eta) if doped else None
    made = []
    for count in counts:
        mesh = lattice.modes(one.phonons, count)
        rates = lattice.crystal_rates(one.phonons, mesh, t, n, among)
        made.append(lattice.acoustic_conductivity(one.phonons, mesh, rates, t, SIZES, shape))
    return made


@pytest.mark.parametrize("shape", ["grain", "film"])
@pytest.mark.parametrize("name", library_names())
def test_the_usual_modes_are_enough(name, shape):
    """Largest relative error among all candidates, three dopings and sizes 1 nm to coarse, against 1536 modes:

    ======  =======  =======  =======  =======  =======  =======  =======
    modes   50 K     100 K    150 K    200 K    300 K    600 K    1300 K
    ======  =======  =======  =======  =======  =======  =======  =======
    with carriers
    16      1.1e-01  4.0e-02  2.8e-02  1.8e-02  7.9e-03  7.8e-04  8.9e-05
    32      2.7e-02  8.9e-03  9.1e-03  5.4e-03  1.5e-03  2.3e-05  2.6e-07
    64      8.8e-03  9.4e-03  2.1e-03  4.0e-04  1.2e-05  9.1e-09  6.3e-11
    128     6.6e-03  2.3e-04  4.4e-06  4.0e-07  5.0e-10  1.2e-12  1.1e-13
    256     2.2e-04  4.8e-07  1.1e-09  1.8e-12  1.2e-13  1.2e-13  1.2e-13
    undoped
    16      4.3e-03  1.7e-03  5.6e-04  2.6e-04  2.4e-04  1.2e-04  1.4e-04
    32      7.7e-06  1.5e-06  1.1e-06  5.4e-07  9.0e-08  2.1e-07  3.3e-07
    64      3.8e-10  1.2e-10  8.1e-12  9.3e-12  1.3e-12  1.9e-12  3.0e-11
    128     1.3e-13  1.2e-13  1.2e-13  1.2e-13  1.2e-13  1.2e-13  1.1e-13
    256     1.3e-13  1.2e-13  1.2e-13  1.2e-13  1.2e-13  1.2e-13  1.2e-13
    ======  =======  =======  =======  =======  =======  =======  =======

    Carriers absorb phonons up to twice the Fermi wave number, an edge whose width falls with temperature and whose
    place moves with doping; n-silicon at its highest doping is the worst. 128 modes give 1e-8 from 300 K up, where
    the data of all candidates but silicon begin (silicon: 100 K, 2e-4); below, the error stays far under that of
    any parameter.
    """
    for doped, allowed in ((True, OF_SHARP if name in SHARP else WITH_CARRIERS), (False, UNDOPED)):
        usual, many = conductivities(name, (128, 768), shape, doped=doped)
        error = np.max(np.abs(usual / many - 1), axis=(0, 2))
        assert np.all(error < allowed), (doped, error)


def test_fewer_modes_would_not_do():
    few, many = conductivities("si-n", (64, 768), "grain", doped=True)
    error = np.max(np.abs(few / many - 1), axis=(0, 2))
    assert error[KELVIN == 300.0] > 1e-6


def test_the_usual_count_is_the_one_that_was_measured(make_phonons):
    assert lattice.modes(make_phonons()).q.size == 128


@pytest.mark.parametrize("shape", ["grain", "wire", "film"])
@pytest.mark.parametrize("name", ["si-n", "bisbte-p"])
def test_properties_of_a_leg_join_both_limits_without_a_step(name, shape):
    candidate, size = load_candidate(name), np.array([30e-9, np.inf])

    def at(length: float) -> tuple[np.ndarray, ...]:
        made = evaluate(candidate, 350.0, 3e25, size, shape, length)
        return made.electrical_conductivity, made.thermal_conductivity, made.seebeck

    long, lengths = at(np.inf), np.geomspace(1e-9, 1e-1, 33)
    steps = [at(length) for length in lengths]
    for k in (0, 1):
        falling = np.array([step[k] for step in steps])
        assert np.all(np.diff(falling, axis=0) > 0)  # each longer leg conducts better per length
        # 4Λ/3L of the longest paths; the sums over modes and by path agree to 1e-8
        assert falling[-1] == pytest.approx(long[k], rel=2e-5)
        conductance = falling / lengths[:, None]
        assert np.all(np.diff(conductance, axis=0) < 0)
    electric = np.array([step[0] for step in steps]) / lengths[:, None]
    assert electric[0] == pytest.approx(electric[1], rel=0.6)  # ballistic: G no longer hangs on the length
    assert np.allclose(steps[-1][2], long[2], rtol=1e-6)


def test_a_leg_needs_a_length_above_zero():
    with pytest.raises(InputError, match="length"):
        evaluate(load_candidate("si-n"), 300.0, 1e25, np.inf, "grain", 0.0)
