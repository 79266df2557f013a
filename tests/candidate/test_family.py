"""Alloy lines: members at nodes, between them, and what a family file may not say."""

from __future__ import annotations

import numpy as np
import pytest

from legwright.base.errors import InputError
from legwright.candidate.family import families_folder, family_names, load_family, member
from legwright.candidate.library import candidates_folder, load_candidate
from legwright.candidate.model import numbers
from legwright.physics.properties import evaluate

FAMILIES = family_names()


def at(family, shares):
    return member(family, tuple(shares[1:]))


@pytest.mark.parametrize("name", FAMILIES)
def test_a_member_at_a_library_composition_is_that_candidate(name):
    """Its own numbers and prefactors, so every property agrees: far within any spread."""
    family = load_family(name)
    t, n, d = np.array([[300.0], [600.0]]), np.array([1e25, 3e26]), [2e-8]
    for node, place in zip(family.nodes, family.data.node, strict=True):
        ours, theirs = evaluate(at(family, place.shares), t, n, d), evaluate(node, t, n, d)
        for quantity in ("seebeck", "electrical_conductivity", "lattice_thermal_conductivity", "zt"):
            # 2e-6: a node's own file may round the composition's x and sizes
            assert getattr(ours, quantity) == pytest.approx(getattr(theirs, quantity), rel=2e-6, abs=0), quantity


@pytest.mark.parametrize("name", FAMILIES)
def test_numbers_run_without_jumps_and_disorder_peaks_between_the_ends(name):
    family = load_family(name)
    most = [end.most for end in family.data.end]
    if len(most) > 2:
        line = [(1 - x, x, *[0.0] * (len(most) - 2)) for x in np.linspace(0, 1, 41)]
    else:
        low, high = 1 - most[0], most[1]
        line = [(1 - x, x) for x in np.linspace(low, high, 41)]
    members = [at(family, shares) for shares in line]
    disorder = np.array([one.disorder.mass_variance + one.disorder.size_variance for one in members])
    assert np.max(disorder) > 2 * min(disorder[0], disorder[-1])
    volume = np.array([one.data.cell.volume_per_atom.si for one in members])
    assert np.all(np.abs(np.diff(volume)) < 0.01 * volume[1:])
    made = [evaluate(one, 300.0, 1e26, np.inf) for one in members]
    for quantity in ("seebeck", "mobility"):
        values = np.array([float(getattr(one, quantity)) for one in made])
        assert np.all(np.isfinite(values))
        assert np.max(np.abs(np.diff(values) / values[1:])) < 0.1, quantity


def test_silicon_germanium_conducts_heat_least_between_its_ends():
    """Undoped, 300 K: 148 in silicon, 7 to 9 with 20 to 30 per cent germanium (Abeles 1963, from memory)."""
    kappa = [
        float(evaluate(load_candidate(f"si-ge-n:{x}"), 300.0, 1e20, np.inf).lattice_thermal_conductivity)
        for x in (0.0, 0.02, 0.1, 0.3)
    ]
    assert np.all(np.diff(kappa) < 0)
    assert 6.0 < kappa[-1] < 9.5


def test_the_two_bands_of_magnesium_silicide_stannide_meet_where_they_were_found_to():
    """Convergence at 65 to 70 per cent tin: Liu et al., Physical Review Letters 108, 166601 (2012)."""
    family = load_family("mg-si-sn-n")
    shares = np.linspace(0.3, 0.95, 66)
    apart = [
        abs(one.data.band[0].edge.si - one.data.band[1].edge.si)
        for one in (member(family, (float(x),)) for x in shares)
    ]
    assert 0.6 < shares[int(np.argmin(apart))] < 0.76
    seebeck = [
        abs(float(evaluate(load_candidate(f"mg-si-sn-n:{x}"), 300.0, 2e26, np.inf).seebeck))
        for x in (0.2, 0.7, 1.0)
    ]
    assert seebeck[1] > 1.2 * max(seebeck[0], seebeck[2])


def test_the_ends_of_magnesium_silicide_stannide_are_near_what_they_conduct():
    """From one node with 60 per cent tin, whose κ_L is a third: undoped, 300 K, 7.5 to 8 and 5.5 to 7 W/(m K)
    (LaBotz & Mason 1963, Martin & Danielson 1968, Martin 1972; from memory). A third of either is allowed for."""
    for x, measured in ((0.0, 7.75), (1.0, 6.25)):
        one = load_candidate(f"mg-si-sn-n:{x}")
        got = float(evaluate(one, 300.0, 1e20, np.inf).lattice_thermal_conductivity)
        assert got == pytest.approx(measured, rel=1 / 3, abs=0)


@pytest.mark.parametrize("name", FAMILIES)
def test_numbers_of_a_member_keep_their_origin(name):
    family = load_family(name)
    middle = member(family, tuple(0.85 * share for share in family.data.node[-1].shares[1:]))
    for key, number in numbers(middle.data):
        assert number.source, key
        assert number.spread >= 0, key
    assert any(number.note == "between the nodes of its alloy line" for _, number in numbers(middle.data))
    assert not middle.data.anchor


@pytest.mark.parametrize(
    ("name", "message"),
    [
        ("si-ge-n:0.9", "not within 0 … 0.5"),
        ("si-ge-n:-0.1", "not within"),
        ("si-ge-n:0.1,0.2", "give the share of Ge"),
        ("si-g-n:0.1", "si-ge-n"),
    ],
)
def test_a_composition_off_the_line_is_refused(name, message):
    with pytest.raises(InputError, match=message):
        load_candidate(name)


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("shares = [0.8, 0.2]", "shares = [0.7, 0.2]", "add up to 1"),
        ("shares = [0.8, 0.2]", "shares = [0.7, 0.3]", "do not give its composition"),
        ('candidate = "sige-n"', 'candidate = "sige-p"', "not one line"),
        ('candidate = "sige-n"', 'candidate = "sigee-n"', "sige-n"),
        ('key = "cell.volume_per_atom"', 'key = "cell.volume_per_atoms"', "cell.volume_per_atom"),
        ('unit = "angstrom^3"', 'unit = "angstrom"', "not a unit that converts"),
        ('source = "okada1984"', 'source = "okada1985"', "okada1984"),
        ('between = ["Si", "Ge"]', 'between = ["Si", "Si"]', "bowing is between two"),
    ],
)
def test_a_faulty_family_file_is_refused_by_name(old, new, message, tmp_path):
    text = (families_folder() / "si-ge-n.toml").read_text(encoding="utf-8")
    assert old in text
    path = tmp_path / "mine.toml"
    path.write_text(text.replace(old, new, 1), encoding="utf-8")
    with pytest.raises(InputError, match=message) as caught:
        load_family(path)
    assert "mine.toml" in str(caught.value)


def test_own_families_are_read_by_path(tmp_path):
    text = (families_folder() / "si-ge-n.toml").read_text(encoding="utf-8")
    path = tmp_path / "mine.toml"
    path.write_text(text, encoding="utf-8")
    (tmp_path / "sources.bib").write_text("", encoding="utf-8")
    own, library = load_candidate(f"{path}:0.3"), load_candidate("si-ge-n:0.3")
    assert own.data.cell.volume_per_atom.si == library.data.cell.volume_per_atom.si


def test_a_member_of_one_node_is_not_the_node():
    one, other = load_candidate("mg-si-sn-n:0.3"), load_candidate("mg2sisn-n")
    assert one.data.formula == "Mg2Si0.7Sn0.3"
    assert one.data.lattice.sound_longitudinal.si > 1.05 * other.data.lattice.sound_longitudinal.si
    assert candidates_folder() not in one.path.parents
