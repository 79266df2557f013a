"""A candidate file becomes SI numbers, and its anchors fix the prefactors that they name."""

import re
from functools import partial
from pathlib import Path

import numpy as np
import pytest

from legwright.base.errors import InputError
from legwright.candidate.library import Candidate, candidates_folder, load_candidate
from legwright.physics.crystal import (
    PUBLISHED_ALLOY_RATIO,
    bulk_lattice_conductivity,
    bulk_mobility_and_seebeck,
    crystal,
)
from legwright.physics.properties import evaluate

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

TAIL = 'spread = 0.05, source = "this-library", basis = "from memory"'


def anchor(quantity: str, fixes: str, value: str, doping: str = "2e19") -> str:
    return f"""
[[anchor]]
quantity = "{quantity}"
fixes = "{fixes}"
temperature = {{ value = 300, unit = "K", {TAIL} }}
doping = {{ value = {doping}, unit = "1/cm^3", {TAIL} }}
{quantity} = {{ {value}, {TAIL} }}
"""


def edited(folder: Path, name: str, anchors: str | None = None, change: tuple[str, str] = ("", "")) -> Candidate:
    """A library candidate with other anchors, or with one pattern of its file replaced."""
    text = (candidates_folder() / f"{name}.toml").read_text(encoding="utf-8")
    if anchors is not None:
        text = text[: text.index("[[anchor]]")] + anchors + text[text.index("\n[doping]") :]
    text, count = re.subn(*change, text)
    assert count
    path = folder / f"{name}.toml"
    path.write_text(text, encoding="utf-8")
    return load_candidate(path)


def test_density_of_silicon():
    # handbook: 2329 kg/m³ (CRC Handbook of Chemistry and Physics)
    one = crystal(load_candidate("si-n"))
    assert one.electrons.density == near(2329, rel=2e-3)
    assert one.phonons.density == one.electrons.density


def test_as_many_anchors_as_prefactors_are_all_met(tmp_path):
    anchors = (
        anchor("mobility", "lattice scattering", 'value = 150, unit = "cm^2/V/s"')
        + anchor("seebeck", "mass", 'value = -230, unit = "uV/K"')
        + anchor("lattice_conductivity", "anharmonicity", 'value = 2.2, unit = "W/m/K"')
    )
    one = crystal(edited(tmp_path, "pbte-n", anchors))
    mobility, seebeck = bulk_mobility_and_seebeck(one.electrons, 300.0, 2e25)
    assert mobility == near(150e-4, rel=1e-7)
    assert seebeck == near(-230e-6, rel=1e-7)
    assert bulk_lattice_conductivity(one, 300.0, 2e25) == near(2.2, rel=1e-7)
    # and `evaluate` on coarse material gives the same figures
    made = evaluate(edited(tmp_path, "pbte-n", anchors), 300.0, 2e25, np.inf)
    assert made.mobility == near(150e-4, rel=1e-7)
    assert made.seebeck == near(-230e-6, rel=1e-7)
    assert made.lattice_thermal_conductivity == near(2.2, rel=1e-7)


def test_heavy_doping_anchors_are_met_each_by_its_own_factor(tmp_path):
    anchors = (
        anchor("mobility", "lattice scattering", 'value = 1000, unit = "cm^2/V/s"', "1e16")
        + anchor("mobility", "impurity scattering", 'value = 130, unit = "cm^2/V/s"', "1e19")
        + anchor("mobility", "impurity scattering", 'value = 60, unit = "cm^2/V/s"', "1e20")
    )
    one = crystal(edited(tmp_path, "si-n", anchors)).electrons
    mobility, _ = bulk_mobility_and_seebeck(one, 300.0, [1e22, 1e25, 1e26])
    assert mobility == near([1000e-4, 130e-4, 60e-4], rel=1e-6)
    factors = one.heavy_doping_factor(np.array([1e22, 1e25, 1e26]))
    assert factors[0] == near(1, rel=1e-12)
    # Brooks and Herring overestimate the mobility of heavily doped silicon: the factor must be above one
    assert factors[1] > 1
    assert factors[2] > factors[1]


def test_an_anchor_out_of_reach_is_refused_by_file_and_key(tmp_path):
    anchors = anchor("mobility", "lattice scattering", 'value = 1e7, unit = "cm^2/V/s"', "1e20")
    with pytest.raises(InputError, match=r"si-n\.toml: anchor\[1\]: no 'lattice scattering' meets this mobility"):
        crystal(edited(tmp_path, "si-n", anchors))


def test_published_alloy_potentials_are_brought_to_the_golden_rule(tmp_path):
    # the published form's rate is 3π²/8 = 3.70 times larger for the same U
    assert near(3.7011, rel=1e-4) == PUBLISHED_ALLOY_RATIO
    published = crystal(load_candidate("mg2sisn-n")).electrons.alloy_potential
    golden = crystal(
        edited(tmp_path, "mg2sisn-n", change=(r'alloy_form = "published 3 pi\^2/8"', 'alloy_form = "golden rule"'))
    ).electrons.alloy_potential
    assert np.any(golden > 0)
    assert published**2 == near(PUBLISHED_ALLOY_RATIO * golden**2, rel=1e-12)
