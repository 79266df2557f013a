"""Pores of a candidate file: from the key to the figures, and the flag that says so."""

from __future__ import annotations

from functools import partial
from pathlib import Path

import numpy as np
import pytest

from legwright.base.errors import InputError
from legwright.candidate.library import Candidate, load_candidate
from legwright.decide.warnings import point_flags
from legwright.physics.crystal import crystal
from legwright.physics.properties import evaluate
from legwright.physics.texture import porous_share

near = partial(pytest.approx, abs=0.0)

#: temperatures, doping (1/m³) and sizes (m)
POINTS = (np.array([[300.0], [900.0]]), 1e26, np.array([3e-8, np.inf]))


def with_pores(folder: Path, value: float, unit: str = "percent") -> Candidate:
    text = load_candidate("sige-n").path.read_text(encoding="utf-8")
    origin = 'spread = 0.1, source = "trade-practice", basis = "from memory"'
    key = f'porosity = {{ value = {value}, unit = "{unit}", {origin} }}'
    path = folder / "sige-n.toml"
    path.write_text(text.replace("[making]\n", f"[making]\n{key}\n"), encoding="utf-8")
    return load_candidate(path)


@pytest.mark.parametrize("shape", ["grain", "wire", "film"])
def test_pores_lower_every_conductivity_alike_and_nothing_else(shape, tmp_path):
    porous = evaluate(with_pores(tmp_path, 8), *POINTS, shape)
    dense = evaluate(load_candidate("sige-n"), *POINTS, shape)
    share = 0.92 / 1.04  # Maxwell–Eucken, (1 − φ)/(1 + φ/2)
    for name in (
        "electrical_conductivity",
        "electronic_thermal_conductivity",
        "bipolar_thermal_conductivity",
        "lattice_thermal_conductivity",
        "amorphous_minimum",
        "power_factor",
    ):
        assert getattr(porous, name) == near(share * getattr(dense, name), rel=1e-13), name
    for name in ("seebeck", "lorenz_number", "zt"):
        assert getattr(porous, name) == near(getattr(dense, name), rel=1e-13), name


def test_the_anchors_count_as_dense(tmp_path):
    porous, dense = crystal(with_pores(tmp_path, 20)), crystal(load_candidate("sige-n"))
    assert porous.electrons.lattice_scale == dense.electrons.lattice_scale
    assert porous.phonons.anharmonic_scale == dense.phonons.anharmonic_scale
    assert porous.dense_share == near(float(porous_share(0.2)), rel=1e-14)


def test_few_pores_cost_half_as_much_again_as_their_volume():
    # Maxwell (1873): 1 − 3φ/2 to first order
    assert 1 - porous_share(1e-6) == near(1.5e-6, rel=1e-6)


def test_a_porous_candidate_says_so(tmp_path):
    made = with_pores(tmp_path, 5)
    assert "porous" in point_flags(made, evaluate(made, *POINTS), "grain")
    dense = load_candidate("sige-n")
    assert "porous" not in point_flags(dense, evaluate(dense, *POINTS), "grain")


@pytest.mark.parametrize("value", [-1, 100])
def test_impossible_porosity_is_refused(value, tmp_path):
    with pytest.raises(InputError, match=r"making\.porosity.*out of range"):
        with_pores(tmp_path, value)
