"""Flags of design points that hang on more than one number of the file."""

from __future__ import annotations

import re

import numpy as np
import pytest
from scipy import constants

from legwright.base.errors import InputError
from legwright.base.units import NM
from legwright.candidate.library import candidates_folder, load_candidate
from legwright.decide.warnings import point_flags
from legwright.physics.properties import evaluate

SOLUTION = """
solution_enthalpy = { value = 0.5, unit = "eV", spread = 0.3, source = "this-library", basis = "from memory" }
solution_temperature = { value = 1200, unit = "K", spread = 0.02, source = "this-library", basis = "from memory" }
"""


@pytest.fixture
def dissolving(tmp_path):
    text = (candidates_folder() / "si-n.toml").read_text(encoding="utf-8")
    path = tmp_path / "mine-n.toml"
    path.write_text(text.replace("[doping]\n", "[doping]" + SOLUTION, 1), encoding="utf-8")
    return load_candidate(path)


def flags_at(candidate, temperature, doping, size=np.inf, shape="grain"):
    return point_flags(candidate, evaluate(candidate, temperature, doping, size, shape), shape)


def test_a_dopant_beyond_solubility_is_flagged_only_where_it_moves(dissolving):
    highest = dissolving.data.doping.highest.si
    at_900 = highest * np.exp(-0.5 * constants.e / constants.k * (1 / 900 - 1 / 1200))
    slug = "dopant-beyond-solubility"
    assert slug not in flags_at(dissolving, 900.0, 0.99 * at_900)
    assert slug in flags_at(dissolving, 900.0, 1.01 * at_900)
    assert slug not in flags_at(dissolving, 400.0, highest)  # frozen in
    assert slug not in flags_at(dissolving, 1200.0, highest)
    assert slug not in flags_at(load_candidate("si-n"), 900.0, highest)


def test_thin_wires_show_subbands():
    candidate = load_candidate("si-n")
    # 2ħ √[(3.8317² − 2.4048²)/(2 m k_B T)] with m = 0.26 m_e at 300 K, by hand: 14.2 nm
    for size, seen in ((14.0 * NM, True), (14.5 * NM, False)):
        assert ("thin-wire-subbands" in flags_at(candidate, 300.0, 1e25, size, "wire")) is seen
    assert "thin-wire-subbands" not in flags_at(candidate, 300.0, 1e25, 10 * NM, "grain")


def test_known_optical_heat_leaves_less_to_the_acoustic_branches_and_the_anchor_holds(tmp_path):
    """Small grains then suppress less: optical heat feels no boundary."""
    text = (candidates_folder() / "pbte-n.toml").read_text(encoding="utf-8")
    at, known = re.search(r"optical_share = \{ value = ([0-9.]+).*\n", text).group(0, 1)
    path = tmp_path / "plain-n.toml"
    path.write_text(text.replace(at, ""), encoding="utf-8")
    rich, plain = load_candidate("pbte-n"), load_candidate(path)
    anchor = next(a for a in plain.data.anchor if a.fixes == "anharmonicity")
    t, n = anchor.temperature.si, anchor.doping.si if anchor.doping else 1e20
    small, coarse = (evaluate(rich, t, n, d).lattice_thermal_conductivity for d in (5 * NM, np.inf))
    small_plain, coarse_plain = (evaluate(plain, t, n, d).lattice_thermal_conductivity for d in (5 * NM, np.inf))
    assert float(coarse) == pytest.approx(float(coarse_plain), rel=1e-6, abs=0)  # the anchor's own solver
    assert small > 1.05 * small_plain
    assert small > float(known) * anchor.measured.si


def test_optical_share_needs_optical_branches(tmp_path):
    text = (candidates_folder() / "si-n.toml").read_text(encoding="utf-8")
    share = (
        'optical_share = { value = 0.3, unit = "1", spread = 0.3, source = "this-library", basis = "from memory" }'
    )
    text = text.replace("[lattice]\n", f"[lattice]\n{share}\n", 1)
    text = text.replace("atoms = { value = 2,", "atoms = { value = 1,", 1)
    path = tmp_path / "wrong-n.toml"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(InputError, match="one atom per primitive cell"):
        load_candidate(path)
