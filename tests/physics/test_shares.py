"""Shares of resistance: they add up, follow what is switched off, and the flow by free path is the flow."""

from __future__ import annotations

import itertools
from dataclasses import replace

import numpy as np
import pytest

from legwright.candidate.library import library_names, load_candidate
from legwright.physics.crystal import crystal
from legwright.physics.properties import SHAPES
from legwright.physics.shares import electrical_limits, thermal_limits

BOUNDARY = {"grain": "grain boundaries", "wire": "wire wall", "film": "film faces"}


def middle_doping(name: str) -> float:
    doping = load_candidate(name).data.doping
    return float(np.sqrt(doping.lowest.si * doping.highest.si))


@pytest.mark.parametrize("limits", [electrical_limits, thermal_limits])
@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("name", library_names())
def test_shares_add_up_and_the_boundary_grows_as_the_size_falls(name, shape, limits):
    one = crystal(load_candidate(name))
    boundary = []
    for size in (1e-5, 1e-6, 1e-7, 1e-8, 1e-9):
        found = limits(one, 400.0, middle_doping(name), size, shape)
        assert sum(found.shares.values()) == pytest.approx(1, abs=1e-13)  # rounding of some hundred terms
        assert min(found.shares.values()) >= 0
        boundary.append(found.shares[BOUNDARY[shape]])
    assert all(later > earlier for earlier, later in itertools.pairwise(boundary))
    assert boundary[-1] > 4 * boundary[0]


@pytest.mark.parametrize("shape", SHAPES)
def test_the_share_of_the_boundary_is_what_it_took_from_the_conductivity_of_one_free_path(shape):
    """With one mean free path for all (acoustic scattering of one parabolic band) it is 1 − σ/σ_bulk."""
    one = crystal(load_candidate("bisbte-p"))
    only = replace(
        one.electrons, impurity_weight=0.0, alloy_weight=0.0, nonparabolicity=0 * one.electrons.nonparabolicity
    )
    found = electrical_limits(replace(one, electrons=only), 300.0, 3e25, 2e-8, shape)
    bulk = electrical_limits(replace(one, electrons=only), 300.0, 3e25, np.inf, shape)
    assert bulk.shares[BOUNDARY[shape]] == 0
    assert 0.05 < found.shares[BOUNDARY[shape]] < 0.9
    assert found.shares["acoustic phonons"] == pytest.approx(1 - found.shares[BOUNDARY[shape]], rel=1e-12)


@pytest.mark.parametrize(
    ("weight", "process"),
    [("umklapp_weight", "Umklapp"), ("defect_weight", "point defects"), ("carrier_weight", "carriers")],
)
def test_a_process_that_is_off_has_no_share(weight, process):
    one = crystal(load_candidate("sige-n"))
    without = replace(one, phonons=replace(one.phonons, **{weight: 0.0}))
    point = (500.0, 2e26, 1e-7, "grain")
    assert thermal_limits(without, *point).shares[process] == 0
    assert thermal_limits(one, *point).shares[process] > 0.001


@pytest.mark.parametrize("limits", [electrical_limits, thermal_limits])
def test_flow_by_free_path_rises_from_nothing_to_all(limits):
    found = limits(crystal(load_candidate("si-n")), 300.0, 1e25, np.inf, "grain")
    within = found.carried_within(np.geomspace(1e-14, 1e3, 200))
    assert within[0] < 1e-6
    assert within[-1] == pytest.approx(1, abs=1e-12)
    assert np.all(np.diff(within) >= 0)
