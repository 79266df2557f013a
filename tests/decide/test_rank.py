"""The map and its refinement, and the window, against plain denser work."""

from __future__ import annotations

import numpy as np
import pytest

from legwright.candidate.library import load_candidate
from legwright.decide.rank import WINDOW_SHARE, best_coarse_score, best_design, design_map, window, window_of
from legwright.decide.score import score
from legwright.leg.duty import Duty

DUTIES = {
    "generator": Duty("generator", 700.0, 400.0, "efficiency", 1e-3),
    "cooler": Duty("cooler", 305.0, 285.0, "cop", 1e-3),
}
CASES = [("sige-n", "generator"), ("pbte-p", "generator"), ("bisbte-p", "cooler"), ("bitese-n", "cooler")]


@pytest.mark.parametrize(("name", "kind"), CASES)
def test_the_best_design_is_that_of_a_dense_map(name, kind):
    candidate, duty = load_candidate(name), DUTIES[kind]
    limits = candidate.data.doping
    dopings, sizes = (limits.lowest.si, limits.highest.si), (8e-9, 5e-6)
    _, _, best = best_design(candidate, duty, dopings, sizes, "grain")
    dense = score(candidate, duty, np.geomspace(*dopings, 160)[:, None], np.geomspace(*sizes, 240), "grain")
    assert best >= np.max(dense) * (1 - 1e-6)  # the dense map's own best lies up to a step off the top
    assert best <= np.max(dense) * (1 + 2e-3)


@pytest.mark.parametrize(("name", "kind"), CASES)
def test_the_window_keeps_its_share_just_to_its_ends(name, kind):
    candidate, duty = load_candidate(name), DUTIES[kind]
    limits, sizes = candidate.data.doping, (3e-9, 2e-5)
    doping, size, _ = best_design(candidate, duty, (limits.lowest.si, limits.highest.si), sizes, "grain")
    low, high, _ = window(candidate, duty, doping, size, sizes, "grain")
    assert sizes[0] <= low <= size <= high <= sizes[1]
    best, at_low, at_high = score(candidate, duty, doping, np.array([size, low, high]), "grain")
    for end, kept in ((low, at_low / best), (high, at_high / best)):
        if end in sizes:
            assert kept >= WINDOW_SHARE
        else:
            assert kept == pytest.approx(WINDOW_SHARE, abs=5e-4)  # straight line between samples 7 % apart


def test_window_of_a_tent():
    size = np.geomspace(1.0, 100.0, 201)
    tent = 1 - 0.1 * np.abs(np.log(size / 10.0))
    low, high, open_ended = window_of(size, tent)
    assert (low, high) == (pytest.approx(10 * np.exp(-0.5), rel=1e-12), pytest.approx(10 * np.exp(0.5), rel=1e-12))
    assert not open_ended
    low, high, open_ended = window_of(size[:101], tent[:101])  # its top is the last size
    assert open_ended
    assert high == size[100]


@pytest.mark.parametrize(("name", "kind"), CASES)
def test_coarse_material_is_searched_at_its_own_doping(name, kind):
    candidate, duty = load_candidate(name), DUTIES[kind]
    limits = candidate.data.doping
    found = design_map(candidate, duty, (limits.lowest.si, limits.highest.si), (1e-8, 1e-6), "grain")
    best = best_coarse_score(found, candidate, duty, "grain")
    dense = score(candidate, duty, np.geomspace(limits.lowest.si, limits.highest.si, 400), np.inf, "grain")
    assert best == pytest.approx(np.max(dense), rel=2e-4)  # 9 temperatures and a coarse current here
