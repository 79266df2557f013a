"""`evaluate`: broadcasting, splitting into blocks, refusals, and properties that agree with one another."""

from functools import partial

import numpy as np
import pytest

from legwright.base.errors import InputError
from legwright.candidate.library import load_candidate
from legwright.physics import properties
from legwright.physics.crystal import crystal
from legwright.physics.lattice import acoustic_conductivity, crystal_rates, modes, optical_conductivity
from legwright.physics.properties import SHAPES, evaluate

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

ARRAYS = (
    "electrical_conductivity",
    "seebeck",
    "electronic_thermal_conductivity",
    "bipolar_thermal_conductivity",
    "lattice_thermal_conductivity",
    "amorphous_minimum",
    "mobility",
)
TEMPERATURE = np.linspace(300, 900, 5)[:, None, None]
DOPING = np.geomspace(2e24, 3e26, 4)[:, None]
SIZE = np.array([8e-9, 60e-9, 1e-6, np.inf])
#: between them: intervalley scattering, alloy scattering, heavy-doping factors, several bands a side
CANDIDATES = ("si-n", "sige-p", "pbte-p", "mg2sisn-n")


def same_bits(one: properties.Properties, other: properties.Properties, index: object = ...) -> bool:
    return all(np.array_equal(getattr(one, name)[index], getattr(other, name)) for name in ARRAYS)


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("name", CANDIDATES)
def test_blocks_give_the_same_bits(name, shape, monkeypatch):
    candidate = load_candidate(name)
    whole = evaluate(candidate, TEMPERATURE, DOPING, SIZE, shape)
    assert whole.zt.shape == (5, 4, 4)
    for block in (1, 3, 17):
        monkeypatch.setattr(properties, "_STATES", block)
        monkeypatch.setattr(properties, "_POINTS", 2 * block)
        assert same_bits(whole, evaluate(candidate, TEMPERATURE, DOPING, SIZE, shape))


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("name", CANDIDATES)
def test_slices_orders_and_single_points_give_the_same_bits(name, shape):
    candidate = load_candidate(name)
    whole = evaluate(candidate, TEMPERATURE, DOPING, SIZE, shape)
    assert same_bits(whole, evaluate(candidate, TEMPERATURE[1:3], DOPING, SIZE[::-1], shape), np.s_[1:3, :, ::-1])
    assert same_bits(whole, evaluate(candidate, TEMPERATURE, DOPING[2], SIZE[[3, 0]], shape), np.s_[:, 2:3, [3, 0]])
    for i, j, k in ((0, 0, 0), (4, 3, 2), (2, 1, 3), (3, 2, 1)):
        point = evaluate(candidate, TEMPERATURE[i, 0, 0], DOPING[j, 0], SIZE[k], shape)
        assert point.zt.shape == ()
        assert same_bits(whole, point, (i, j, k))
        inside_one = evaluate(candidate, TEMPERATURE[i, 0], DOPING[j], SIZE[[k]], shape)
        assert same_bits(whole, inside_one, (i, j, np.s_[k : k + 1]))


def test_full_grids_and_broadcast_axes_give_the_same_bits():
    candidate = load_candidate("si-n")
    t, n, d = np.broadcast_arrays(TEMPERATURE, DOPING, SIZE)
    whole = evaluate(candidate, TEMPERATURE, DOPING, SIZE)
    assert same_bits(whole, evaluate(candidate, t.copy(), n.copy(), d.copy()))
    flat = evaluate(candidate, t.ravel(), n.ravel(), d.ravel())
    assert all(np.array_equal(getattr(whole, name).ravel(), getattr(flat, name)) for name in ARRAYS)


@pytest.mark.parametrize("name", CANDIDATES)
def test_properties_agree_with_one_another(name):
    made = evaluate(load_candidate(name), TEMPERATURE, DOPING, SIZE)
    assert made.thermal_conductivity == near(
        made.electronic_thermal_conductivity + made.lattice_thermal_conductivity, rel=1e-15
    )
    zt = made.seebeck**2 * made.electrical_conductivity * made.temperature / made.thermal_conductivity
    assert made.zt == near(zt, rel=1e-14)
    assert made.power_factor == near(made.seebeck**2 * made.electrical_conductivity, rel=1e-14)
    lorenz = made.electronic_thermal_conductivity / (made.electrical_conductivity * made.temperature)
    assert made.lorenz_number == near(lorenz, rel=1e-14)
    assert np.all(made.bipolar_thermal_conductivity < made.electronic_thermal_conductivity)
    sign = 1 if load_candidate(name).data.carrier == "p" else -1
    assert np.all(sign * made.seebeck[0] > 0)  # at 300 K no minority carrier turns it
    # conductivity is at least that of the majority: e n µ with n at least the doping
    majority = 1.602176634e-19 * made.doping * made.mobility
    assert np.all(made.electrical_conductivity >= majority * (1 - 1e-12))


@pytest.mark.parametrize("shape", SHAPES)
def test_lattice_part_is_acoustic_and_optical_of_the_same_crystal(shape):
    candidate = load_candidate("sige-n")
    one, t, n, d = crystal(candidate), np.array(500.0), np.array(1e26), np.array(40e-9)
    made = evaluate(candidate, t, n, d, shape)
    mesh = modes(one.phonons)
    bare = acoustic_conductivity(one.phonons, mesh, crystal_rates(one.phonons, mesh, t, n, None), t, d, shape)
    optical = optical_conductivity(one.phonons, t)
    # carriers scatter phonons too: the whole is less than acoustic without them, more than optical alone
    assert optical < made.lattice_thermal_conductivity < bare + optical


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("name", CANDIDATES)
def test_a_very_large_body_is_coarse_material(name, shape):
    candidate = load_candidate(name)
    large = evaluate(candidate, 600.0, 1e26, 1.0, shape)
    coarse = evaluate(candidate, 600.0, 1e26, np.inf, shape)
    # a metre leaves carriers alone to 1e-6; the longest phonon waves feel it, Λ ∝ ω⁻²: a few 1e-4
    for key in ("electrical_conductivity", "seebeck", "electronic_thermal_conductivity"):
        assert getattr(large, key) == near(getattr(coarse, key), rel=1e-6)
    assert large.lattice_thermal_conductivity == near(coarse.lattice_thermal_conductivity, rel=1e-3)


def test_infinite_size_is_the_same_for_every_shape():
    grain, wire, film = (evaluate(load_candidate("si-p"), 400.0, 1e25, np.inf, shape) for shape in SHAPES)
    for other in (wire, film):
        assert same_bits(grain, other) or all(
            # the walls' integral adds up to 1 but for rounding
            getattr(other, key) == near(getattr(grain, key), rel=1e-13)
            for key in ARRAYS
        )


ALLOWED = {
    "temperature": (300.0, "2 to 3000 K"),
    "doping": (1e25, "1e[+]12 to 1e[+]29 1/m³"),
    "size": (1e-7, "1e-10 to 1 m"),
}


@pytest.mark.parametrize("bad", [0.0, -1.0, float("nan"), -np.inf, 1e40])
@pytest.mark.parametrize("key", ALLOWED)
def test_what_physics_forbids_is_refused_by_name_value_and_range(key, bad):
    point = {name: value for name, (value, _) in ALLOWED.items()}
    for value in (bad, [point[key], bad]):
        with pytest.raises(
            InputError, match=rf"^{key}: value {bad:g} .* is not allowed; {ALLOWED[key][1]}".replace("+40", ".40")
        ):
            evaluate(load_candidate("si-n"), **(point | {key: value}))


@pytest.mark.parametrize("key", ["temperature", "doping"])
def test_only_size_may_be_infinite(key):
    point = {"temperature": 300.0, "doping": 1e25, "size": np.inf}
    assert np.isfinite(evaluate(load_candidate("si-n"), **point).zt)
    with pytest.raises(InputError, match=rf"^{key}: value inf"):
        evaluate(load_candidate("si-n"), **(point | {key: np.inf}))


@pytest.mark.parametrize("temperature", [2.0, 3000.0])
@pytest.mark.parametrize("doping", [1e12, 1e29])
@pytest.mark.parametrize("size", [1e-10, 1.0])
def test_the_corners_of_what_is_allowed_are_computed(temperature, doping, size):
    for shape in SHAPES:
        made = evaluate(load_candidate("sige-n"), temperature, doping, size, shape)
        for name in (*ARRAYS, "zt", "lorenz_number"):
            assert np.isfinite(getattr(made, name)), (shape, name)


def test_a_shape_that_is_none_is_refused_with_the_nearest():
    with pytest.raises(InputError, match=r"shape: value 'grian' .* did you mean 'grain'"):
        evaluate(load_candidate("si-n"), 300.0, 1e25, 1e-7, "grian")


def test_table_names_a_unit_in_every_column_and_converts():
    made = evaluate(load_candidate("pbte-n"), 450.0, [1e25, 3e25], [[50e-9], [np.inf]])
    table = made.to_frame()
    assert len(table) == 4
    assert all(column.endswith("]") and " [" in column for column in table.columns)
    assert np.all(np.isfinite(table.drop(columns="size [nm]")))
    row = table.iloc[1]
    assert row["temperature [K]"] == 450
    assert row["doping [1/cm^3]"] == near(3e19, rel=1e-12)
    assert row["size [nm]"] == near(50, rel=1e-12)
    assert row["seebeck [uV/K]"] == near(made.seebeck[0, 1] * 1e6, rel=1e-12)
    assert row["mobility [cm^2/V/s]"] == near(made.mobility[0, 1] * 1e4, rel=1e-12)
    assert row["zT [1]"] == made.zt[0, 1]
    assert row["thermal conductivity [W/m/K]"] == near(
        row["electronic thermal conductivity [W/m/K]"] + row["lattice thermal conductivity [W/m/K]"], rel=1e-14
    )
