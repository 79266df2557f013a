"""What must hold for every candidate of the library at any design point, whatever its numbers."""

import math
from functools import partial

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from legwright.candidate.library import library_names, load_candidate
from legwright.physics.carriers import fill
from legwright.physics.crystal import crystal, majority_carriers
from legwright.physics.lattice import crystal_rates, mode_heat, modes, optical_conductivity
from legwright.physics.properties import SHAPES, evaluate

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

NAMES = library_names()
CALM = settings(derandomize=True, deadline=None, max_examples=60)
TEMPERATURES = st.floats(80, 1300)
SIZES = st.lists(st.floats(math.log(1e-9), math.log(1e-3)), min_size=2, max_size=6).map(lambda x: np.exp(sorted(x)))
#: sums of dozens of terms, and the table of the wall integrals
ROUNDING = 1e-11


@st.composite
def dopings(draw: st.DrawFn, name: str) -> float:
    """Within a factor of three of what the candidate's file says has been made."""
    made = load_candidate(name).data.doping
    return math.exp(draw(st.floats(math.log(made.lowest.si / 3), math.log(made.highest.si * 3))))


@given(data=st.data(), name=st.sampled_from(NAMES), shape=st.sampled_from(SHAPES), t=TEMPERATURES, sizes=SIZES)
@CALM
def test_neither_heat_nor_charge_gains_from_a_smaller_size(data, name, shape, t, sizes):
    doping = data.draw(dopings(name))
    made = evaluate(load_candidate(name), t, doping, np.append(sizes, np.inf), shape)
    for key in ("lattice_thermal_conductivity", "electrical_conductivity", "mobility"):
        values = getattr(made, key)
        assert np.all(np.diff(values) >= -ROUNDING * values[1:]), key


@given(data=st.data(), name=st.sampled_from(NAMES), shape=st.sampled_from(SHAPES), t=TEMPERATURES, sizes=SIZES)
@CALM
def test_nothing_is_undefined_or_negative(data, name, shape, t, sizes):
    doping = data.draw(dopings(name))
    made = evaluate(load_candidate(name), t, doping, np.append(sizes, np.inf), shape)
    for key in (
        "electrical_conductivity",
        "electronic_thermal_conductivity",
        "lattice_thermal_conductivity",
        "amorphous_minimum",
        "mobility",
        "lorenz_number",
    ):
        values = getattr(made, key)
        assert np.all(np.isfinite(values)), key
        assert np.all(values > 0), key
    assert np.all(np.isfinite(made.seebeck))
    assert np.all(made.bipolar_thermal_conductivity >= 0)
    assert np.all((made.zt >= 0) & np.isfinite(made.zt))


@given(data=st.data(), name=st.sampled_from(NAMES), t=TEMPERATURES, step=st.floats(1.05, 3))
@CALM
def test_more_dopant_never_helps_lattice_heat(data, name, t, step):
    """More disorder and more carriers, both of which scatter phonons."""
    doping = data.draw(dopings(name))
    few, many = evaluate(load_candidate(name), t, [doping, step * doping], np.inf).lattice_thermal_conductivity
    assert many <= few * (1 + ROUNDING)


@given(data=st.data(), name=st.sampled_from(NAMES), t=st.floats(100, 1200), shape=st.sampled_from(SHAPES))
@CALM
def test_no_step_between_neighbouring_temperatures_dopings_and_sizes(data, name, t, shape):
    """Across every switch of algorithm inside: a change of 1e-9 in any argument moves nothing by 1e-6.

    The energy mesh, shifting with the chemical potential, leaves some 1e-7; a knot of the heavy-doping factor
    is a kink, not a step. The Seebeck coefficient can pass zero, so its scale is k/e.
    """
    doping, size = data.draw(dopings(name)), math.exp(data.draw(st.floats(math.log(2e-9), math.log(1e-5))))
    beside = np.array([1.0, 1 + 1e-9])
    for point in ((t * beside, doping, size), (t, doping * beside, size), (t, doping, size * beside)):
        made = evaluate(load_candidate(name), *point, shape)
        for key in ("electrical_conductivity", "electronic_thermal_conductivity", "lattice_thermal_conductivity"):
            here, there = getattr(made, key)
            assert there == near(here, rel=1e-6), key
        assert abs(np.diff(made.seebeck)[0]) < 1e-6 * 86e-6


def median_path(name: str, t: float, doping: float) -> float:
    """Mean free path below which half of the acoustic heat of coarse material travels, m."""
    one, t_, n_ = crystal(load_candidate(name)), np.array(t), np.array(doping)
    mesh = modes(one.phonons, 128)
    carriers = majority_carriers(one.electrons, t_, fill(one.electrons, t_, n_).eta)
    rates = crystal_rates(one.phonons, mesh, t_, n_, carriers)
    path = mesh.velocity / (rates.resistive + rates.normal)
    heat = mesh.weight * mode_heat(mesh.omega, t_) * mesh.velocity * path
    order = np.argsort(path, axis=None)
    share = np.cumsum(heat.ravel()[order]) / heat.sum()
    return float(path.ravel()[order][np.searchsorted(share, 0.5)])


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("name", NAMES)
def test_a_tenth_of_the_dominating_path_really_cuts_the_heat(name, shape):
    candidate, t = load_candidate(name), 300.0
    doping = candidate.data.doping.lowest.si
    size = 0.1 * median_path(name, t, doping)
    optical = optical_conductivity(crystal(candidate).phonons, np.array(t))
    acoustic = evaluate(candidate, t, doping, [size, np.inf], shape).lattice_thermal_conductivity - optical
    # half of the acoustic heat meets a wall within a tenth of its path; optical heat feels no size
    assert acoustic[0] < 0.7 * acoustic[1]


@pytest.mark.parametrize("name", NAMES)
def test_the_acoustic_part_falls_towards_zero_and_never_through_it(name):
    doping = load_candidate(name).data.doping.lowest.si
    values = evaluate(load_candidate(name), 300.0, doping, [1e-10, 1e-9, 1e-7]).lattice_thermal_conductivity
    optical = optical_conductivity(crystal(load_candidate(name)).phonons, np.array(300.0))
    assert np.all(np.diff(values) > 0)
    assert values[0] > optical
    assert values[0] - optical < 0.2 * (values[2] - optical)


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("name", NAMES)
def test_every_corner_of_what_can_be_asked_has_an_answer(name, shape):
    """2 to 3000 K, 1e12 to 1e29 m⁻³, 0.1 nm to 1 m and bulk: far outside data, still finite and not negative."""
    t = np.array([2.0, 20.0, 300.0, 3000.0])[:, None, None]
    n = np.array([1e12, 1e20, 1e26, 1e29])[:, None]
    d = np.array([1e-10, 1e-8, 1e-4, 1.0, np.inf])
    made = evaluate(load_candidate(name), t, n, d, shape)
    for key in (
        "electrical_conductivity",
        "electronic_thermal_conductivity",
        "bipolar_thermal_conductivity",
        "lattice_thermal_conductivity",
        "mobility",
        "zt",
    ):
        values = getattr(made, key)
        assert np.all(np.isfinite(values)), key
        assert np.all(values >= 0), key
    assert np.all(np.isfinite(made.seebeck))
