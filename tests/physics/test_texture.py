"""Pores and spread grain sizes: closed forms, and what they do to a candidate."""

from __future__ import annotations

from dataclasses import replace
from functools import partial

import numpy as np
import pytest

from legwright.candidate.library import load_candidate
from legwright.physics.crystal import crystal
from legwright.physics.properties import evaluate_crystal
from legwright.physics.texture import effective_size_ratio, porous_share

near = partial(pytest.approx, abs=0.0)
POINT = (600.0, 1e26, np.array([2e-8, 3e-7, np.inf]))


def test_pores_in_maxwells_form():
    # Maxwell (1873): (κ − κ₀)/(κ + 2κ₀) = φ (κ_p − κ₀)/(κ_p + 2κ₀) with empty pores, κ_p = 0
    phi = np.array([0.0, 0.05, 0.3, 0.9])
    share = porous_share(phi)
    assert (share - 1) / (share + 2) == near(-phi / 2, rel=1e-14)
    for bad in (-0.1, 1.0, np.nan):
        with pytest.raises(ValueError, match="porosity"):
            porous_share(bad)


@pytest.mark.parametrize("s", [0.0, 0.3, 0.8])
def test_spread_sizes_by_their_moments(s):
    rng = np.random.default_rng(3)
    d = np.exp(s * rng.standard_normal(4_000_000))
    # 4 million draws leave 1 % of the third moment at s = 0.8
    assert effective_size_ratio(s) == near(np.mean(d**3) / np.mean(d**2), rel=1e-2)
    with pytest.raises(ValueError, match="spread"):
        effective_size_ratio(-s - 1e-9)


def test_pores_lower_both_conductivities_alike_and_leave_zt():
    dense = crystal(load_candidate("sige-n"))
    solid, porous = (evaluate_crystal(one, *POINT) for one in (dense, replace(dense, dense_share=0.8)))
    for name in ("electrical_conductivity", "thermal_conductivity", "lattice_thermal_conductivity", "mobility"):
        assert getattr(porous, name) == near(0.8 * getattr(solid, name), rel=1e-14)
    assert porous.seebeck == near(solid.seebeck, rel=1e-15)
    assert porous.zt == near(solid.zt, rel=1e-13)


@pytest.mark.parametrize("shape", ["grain", "wire"])
def test_a_spread_of_grains_acts_as_a_larger_grain(shape):
    even = crystal(load_candidate("sige-n"))
    spread = replace(even, size_ratio=float(effective_size_ratio(0.5)))
    t, n, d = POINT
    found = evaluate_crystal(spread, t, n, d, shape)
    larger = evaluate_crystal(even, t, n, d * (1.8682459574322223 if shape == "grain" else 1.0), shape)
    for name in ("electrical_conductivity", "lattice_thermal_conductivity", "hall_coefficient"):
        assert getattr(found, name) == near(getattr(larger, name), rel=1e-13)
    assert np.array_equal(found.size, d)
