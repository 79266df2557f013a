"""Compressed maps against the direct path.

Run this file as a script to write the table of every library candidate, in three shapes at three temperatures, anew
(a minute).
"""

from __future__ import annotations

import csv
import io
from dataclasses import replace
from itertools import product
from pathlib import Path

import numpy as np
import pytest

import legwright as lw
from legwright.base.errors import InputError
from legwright.candidate.library import library_names
from legwright.physics import compressed
from legwright.physics.crystal import crystal
from legwright.physics.properties import evaluate_crystal

SIZES = (5e-9, 1e-5)
TABLE = Path(__file__).with_name("compressed.csv")
HEAD = [
    "candidate",
    "shape",
    "temperature [K]",
    "pieces in doping",
    "terms in doping",
    "terms in size",
    "estimated error",
    "worst of 40 200 points",
]
SLICE = (
    ("cosb3-n", "wire", 823.0),  # S changes sign
    ("ge-n", "film", 100.0),  # corners in doping, cold
    ("mg3sbbi-n", "grain", 300.0),  # barriers
    ("sige-p", "grain", 1273.0),
)
POSITIVE = (
    "electrical_conductivity",
    "electronic_thermal_conductivity",
    "lattice_thermal_conductivity",
    "mobility",
)
#: what the error of S is told in where S is smaller, V/K: said in the docstring of `compress`
LEAST_SEEBECK = 1e-6


def dopings_of(name: str) -> tuple[float, float]:
    limits = lw.load_candidate(name).data.doping
    return limits.lowest.si, limits.highest.si


def off_nodes(low: float, high: float, count: int, seed: int = 3) -> np.ndarray:
    return np.exp(np.random.default_rng(seed).uniform(np.log(low), np.log(high), count))


def worst(made, asked) -> float:
    """Largest error as `compress` promises it: relative, with its two exceptions."""
    errors = [np.abs(getattr(made, name) / getattr(asked, name) - 1) for name in POSITIVE]
    unit = np.maximum(np.abs(asked.seebeck), LEAST_SEEBECK)
    errors.append(np.abs(made.seebeck - asked.seebeck) / unit)
    per_seebeck = asked.electrical_conductivity * asked.temperature / asked.thermal_conductivity
    errors.append(np.abs(made.zt - asked.zt) / (unit**2 * per_seebeck))
    pairs = np.abs(made.bipolar_thermal_conductivity - asked.bipolar_thermal_conductivity)
    errors.append(pairs / asked.electronic_thermal_conductivity)
    return float(np.max(errors))


@pytest.fixture(scope="module")
def quick():
    """Three temperatures of a generator's span, with pairs at the hot end."""
    return lw.compress(lw.load_candidate("bisbte-p"), [300.0, 400.0, 500.0], dopings_of("bisbte-p"), SIZES)


def test_every_property_is_within_its_estimate_of_the_direct_path_and_that_within_the_tolerance(quick):
    doping, size = off_nodes(*dopings_of("bisbte-p"), 41), np.append(off_nodes(*SIZES, 53), np.inf)
    made = quick.evaluate(doping, size)
    asked = lw.evaluate(lw.load_candidate("bisbte-p"), quick.temperature[:, None, None], doping[:, None], size)
    assert 1e-9 < worst(made, asked) <= quick.error <= quick.tolerance == 1e-6
    assert np.array_equal(made.amorphous_minimum, asked.amorphous_minimum)
    for name in ("temperature", "doping", "size"):
        assert np.array_equal(getattr(made, name), getattr(asked, name))


def test_limits_of_the_ranges_belong_to_the_map_and_coarse_material_is_a_column_of_its_own(quick):
    doping, size = np.array(dopings_of("bisbte-p")), np.array([*SIZES, np.inf])
    made = quick.evaluate(doping, size)
    asked = lw.evaluate(lw.load_candidate("bisbte-p"), quick.temperature[:, None, None], doping[:, None], size)
    assert worst(made, asked) <= quick.error
    # between the largest size and coarse material there is a step, not a bridge
    assert np.all(made.lattice_thermal_conductivity[..., 2] > 1.001 * made.lattice_thermal_conductivity[..., 1])


def test_zt_alone_has_the_bits_of_all(quick):
    doping, size = off_nodes(*dopings_of("bisbte-p"), 11), np.append(off_nodes(*SIZES, 300), np.inf)
    assert np.array_equal(quick.zt(doping, size), quick.evaluate(doping, size).zt)


def test_axes_are_those_of_temperature_doping_and_size():
    """Outer product: scalars add no axis, arrays bring theirs."""
    candidate = lw.load_candidate("pbte-n")
    one = lw.compress(candidate, 600.0, (1e25, 8e25), SIZES)
    some = lw.compress(candidate, [[500.0], [600.0]], (1e25, 8e25), SIZES)
    assert one.zt(2e25, 1e-8).shape == ()
    assert one.zt(2e25, [1e-8, 1e-7]).shape == (2,)
    assert one.evaluate([[2e25], [3e25]], [1e-8]).seebeck.shape == (2, 1, 1)
    assert some.evaluate([2e25, 3e25, 4e25], [1e-8, 1e-7]).size.shape == (2, 1, 3, 2)
    # temperatures share their nodes, so the two maps differ by their errors
    assert some.zt(2e25, 1e-8)[1, 0] == pytest.approx(float(one.zt(2e25, 1e-8)), rel=some.error + one.error, abs=0)


def test_a_point_has_the_same_bits_in_any_order_in_any_part_and_alone(quick):
    doping, size = off_nodes(*dopings_of("bisbte-p"), 61), np.append(off_nodes(*SIZES, 1501), np.inf)
    whole = quick.evaluate(doping, size)
    turned = quick.evaluate(doping[::-1], np.roll(size, 77))
    part = quick.evaluate(doping[5:18], size[1099:1402])
    alone = quick.evaluate(doping[40], size[700])
    for name in (*POSITIVE, "seebeck", "bipolar_thermal_conductivity"):
        values = getattr(whole, name)
        assert np.array_equal(getattr(turned, name), np.roll(values[:, ::-1], 77, axis=-1))
        assert np.array_equal(getattr(part, name), values[:, 5:18, 1099:1402])
        assert np.array_equal(getattr(alone, name), values[:, 40, 700])


def test_what_is_made_from_the_properties_comes_along(quick):
    made = quick.evaluate(3e25, [1e-8, 1e-6])
    asked = lw.evaluate(lw.load_candidate("bisbte-p"), quick.temperature[:, None], 3e25, [1e-8, 1e-6])
    assert np.array_equal(made.hall_coefficient, asked.hall_coefficient)
    assert made.lorenz_number == pytest.approx(asked.lorenz_number, rel=2 * quick.error)
    assert len(made.to_frame()) == 6


def test_seebeck_through_zero_is_good_to_picovolts():
    """Pairs turn the sign of S in hot, thinly doped material: there its error is told in shares of 1 µV/K."""
    candidate, dopings = lw.load_candidate("cosb3-n"), dopings_of("cosb3-n")
    quick = lw.compress(candidate, 823.0, dopings, SIZES)
    doping, size = off_nodes(*dopings, 201), off_nodes(*SIZES, 203)
    made, asked = quick.evaluate(doping, size), lw.evaluate(candidate, 823.0, doping[:, None], size)
    assert np.min(asked.seebeck) < 0 < np.max(asked.seebeck)
    assert np.max(np.abs(made.seebeck - asked.seebeck)) < 1e-12
    assert worst(made, asked) <= quick.error


def test_series_are_cut_where_the_heavy_doping_factor_turns():
    """Knots of one height are no corners; those of germanium within the range are."""
    quick = lw.compress(lw.load_candidate("ge-n"), 300.0, (2e23, 5e25), SIZES)
    assert quick.edges.tolist() == pytest.approx([2e23, 1e24, 1e25, 5e25], rel=1e-12)
    assert lw.compress(lw.load_candidate("pbte-n"), 300.0, dopings_of("pbte-n"), SIZES).edges.size == 2


def test_a_corner_that_nobody_told_of_is_found_by_the_check(monkeypatch):
    """The range is halved around it until the error it makes is below the tolerance, or the map is refused."""
    monkeypatch.setattr(compressed, "_corners", lambda one: [])
    germanium = lw.load_candidate("ge-n")
    quick = lw.compress(germanium, 300.0, (2e23, 5e25), SIZES, tolerance=1e-3)
    assert quick.edges.size > 2
    doping = np.append(off_nodes(2e23, 5e25, 301), [1e24, 1e25])
    size = off_nodes(*SIZES, 11)
    assert worst(quick.evaluate(doping, size), lw.evaluate(germanium, 300.0, doping[:, None], size)) <= 1e-3
    with pytest.raises(InputError, match="tolerance: value 1e-06 is not allowed"):
        lw.compress(germanium, 300.0, (2e23, 5e25), SIZES)


def test_a_tolerance_out_of_reach_is_refused_with_what_was_reached():
    """At 2 K the modes' mesh itself makes the direct path ripple."""
    with pytest.raises(InputError, match=r"series of the most terms come within \de-0[345]"):
        lw.compress(lw.load_candidate("si-n"), 2.0, dopings_of("si-n"), SIZES)


def test_terms_grow_with_the_logarithm_of_the_tolerance():
    """Geometric convergence: each decade costs about as many terms, and the error keeps what it promises."""
    candidate, dopings = lw.load_candidate("bisbte-p"), dopings_of("bisbte-p")
    doping, size = off_nodes(*dopings, 31), off_nodes(*SIZES, 201)
    asked = lw.evaluate(candidate, 300.0, doping[:, None], size, "wire")
    maps = [lw.compress(candidate, 300.0, dopings, SIZES, "wire", 10.0**-k) for k in range(2, 8)]
    for one in maps:
        assert worst(one.evaluate(doping, size), asked) <= one.error <= one.tolerance
    steps = np.diff([one.terms for one in maps], axis=0)
    assert np.all(steps[:, 0] <= 4)
    assert np.all((steps[:, 1] >= 2) & (steps[:, 1] <= 6))  # ln 10/arsinh(π/ln 2000) = 5.7 at the most


@pytest.mark.parametrize(
    ("sizes", "shape"), [((1e-10, 1.0), "film"), ((1e-10, 1.0), "grain"), ((1e-8, 1.01e-8), "wire")]
)
def test_the_widest_and_the_narrowest_range_of_size(sizes, shape):
    candidate, dopings = lw.load_candidate("bisbte-p"), dopings_of("bisbte-p")
    quick = lw.compress(candidate, 300.0, dopings, sizes, shape)
    doping, size = off_nodes(*dopings, 21), off_nodes(*sizes, 301)
    assert (
        worst(quick.evaluate(doping, size), lw.evaluate(candidate, 300.0, doping[:, None], size, shape))
        <= quick.error
    )


def test_ranges_next_to_nothing():
    """Neighbouring doubles, nearly: all terms but the first are rounding."""
    candidate, dopings, sizes = (
        lw.load_candidate("bisbte-p"),
        (2e25, 2e25 * (1 + 1e-14)),
        (1e-8, 1e-8 * (1 + 1e-14)),
    )
    quick = lw.compress(candidate, 300.0, dopings, sizes)
    assert worst(quick.evaluate(dopings[0], sizes[1]), lw.evaluate(candidate, 300.0, dopings[0], sizes[1])) < 1e-11


def test_a_crystal_with_rough_walls_and_one_with_barriers():
    """Numbers of a crystal may be changed by hand, as for `evaluate_crystal`."""
    silicon, antimonide = crystal(lw.load_candidate("si-n")), crystal(lw.load_candidate("mg3sbbi-n"))
    rough = replace(silicon, phonons=replace(silicon.phonons, wall_roughness=1e-9))
    high = replace(antimonide, electrons=replace(antimonide.electrons, barrier=2e-20))
    for one, shape, dopings in ((rough, "wire", (1e25, 1e26)), (high, "grain", (1e25, 5e25))):
        quick = lw.compress(one, 300.0, dopings, (1e-8, 1e-6), shape)
        doping, size = off_nodes(*dopings, 13), off_nodes(1e-8, 1e-6, 29)
        asked = evaluate_crystal(one, 300.0, doping[:, None], size, shape)
        assert worst(quick.evaluate(doping, size), asked) <= quick.error


@pytest.mark.parametrize(
    ("doping", "size", "said"),
    [
        (9e24, 1e-8, r"doping: value 9e\+24 1/m³ is not allowed; 1e\+25 to 1e\+26 1/m³"),
        (2e25, 2e-5, r"size: value 2e-05 m is not allowed; 5e-09 to 1e-05 m, or infinite"),
        (2e25, np.nan, "size: value nan m"),
    ],
)
def test_outside_the_map_is_refused(quick, doping, size, said):
    for asked in (quick.evaluate, quick.zt):
        with pytest.raises(InputError, match=said):
            asked(doping, size)


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"tolerance": 1e-9}, "tolerance: value 1e-09"),
        ({"tolerance": 1.0}, "tolerance: value 1 "),
        ({"dopings": (1e26, 1e25)}, "dopings: .* ascends"),
        ({"sizes": (1e-8, np.inf)}, "sizes: value inf m is not allowed; 1e-10 to 1 m"),
        ({"sizes": (1e-11, 1e-8)}, "sizes: value 1e-11"),
        ({"temperature": 1.0}, "temperature: value 1 K"),
        ({"shape": "gran"}, "shape: .*did you mean 'grain'"),
    ],
)
def test_what_cannot_be_a_map_is_refused(changes, said):
    asked = {"temperature": 300.0, "dopings": (1e25, 1e26), "sizes": SIZES} | changes
    with pytest.raises(InputError, match=said):
        lw.compress(lw.load_candidate("bisbte-p"), **asked)


def temperatures(name: str) -> list[float]:
    """Cold, room and the highest of its service."""
    top = lw.load_candidate(name).data.service.highest_temperature.si
    return sorted({100.0, min(300.0, top), top})


def line(name: str, shape: str, temperature: float) -> list[str]:
    """One map over the whole range of doping, at random points between its nodes and of coarse material."""
    candidate, dopings = lw.load_candidate(name), dopings_of(name)
    quick = lw.compress(candidate, temperature, dopings, SIZES, shape)
    doping, size = off_nodes(*dopings, 200, seed=20), np.append(off_nodes(*SIZES, 200, seed=21), np.inf)
    error = worst(quick.evaluate(doping, size), lw.evaluate(candidate, temperature, doping[:, None], size, shape))
    figures = [quick.edges.size - 1, *quick.terms]
    return [name, shape, f"{temperature:g}", *map(str, figures), f"{quick.error:.1e}", f"{error:.1e}"]


def all_points() -> list[tuple[str, str, float]]:
    return [
        (name, shape, t)
        for name, shape in product(library_names(), ("grain", "wire", "film"))
        for t in temperatures(name)
    ]


@pytest.mark.evidence
def test_the_estimate_bounds_what_is_measured_and_the_tolerance_the_estimate():
    with TABLE.open(encoding="utf-8") as lines:
        head, *rows = csv.reader(lines)
    assert head == HEAD
    assert [tuple(row[:3]) for row in rows] == [(name, shape, f"{t:g}") for name, shape, t in all_points()]
    fresh = [line(*chosen) for chosen in SLICE]
    for row in (*rows, *fresh):
        assert 0 < float(row[-1]) <= float(row[-2]) <= 1e-6, row
    for row in fresh:
        kept = next(other for other in rows if other[:3] == row[:3])
        assert row[3] == kept[3]
        # a term more or less may fall on another machine's side of what is spared
        assert all(abs(int(a) - int(b)) <= int(row[3]) for a, b in zip(row[4:6], kept[4:6], strict=True)), row


if __name__ == "__main__":
    from joblib import Parallel, delayed

    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(HEAD)
    writer.writerows(Parallel(n_jobs=2)(delayed(line)(*point) for point in all_points()))
    TABLE.write_text(out.getvalue(), encoding="utf-8")
