"""Legs as they are made: quadrature against closed forms and against legs scattered at random, one by one."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from pydantic import ValidationError
from scipy.interpolate import CubicSpline, RectBivariateSpline

from legwright.candidate.library import load_candidate
from legwright.decide.brief import Brief
from legwright.decide.drawn import drawn
from legwright.decide.rank import rank_one
from legwright.decide.robust import MadeMap, Scatter
from legwright.decide.score import score
from legwright.decide.search import search


def brief_of(name: str, making: dict | None, least: float = 20.0) -> Brief:
    content = {
        "title": "Test",
        "duty": {"kind": "generator", "hot_K": 640.0, "cold_K": 350.0, "maximise": "efficiency"},
        "size": {"shape": "grain", "min_nm": least, "max_nm": 5000.0},
        "candidates": {"use": (name,)},
    }
    return Brief.model_validate(content | ({"making": making} if making else {}))


def map_of(surface, scatter: Scatter) -> MadeMap:
    """A map of a made-up surface over ln doping and ln size from −6 to 6."""
    axis = np.linspace(-6, 6, 121)
    values = surface(axis[:, None], axis)
    return MadeMap(scatter, RectBivariateSpline(axis, axis, values), CubicSpline(axis, values[:, -1]))


def test_the_expected_score_of_a_bell_is_the_closed_form():
    """∫ exp(−½(x² + y²/4)) over normal scatter s, t: 1/√((1 + s²)(1 + t²/4)) at the top."""
    s, t = 0.3, 0.5
    found = map_of(lambda x, y: np.exp(-0.5 * (x**2 + y**2 / 4)), Scatter(t, s, "expected"))
    exact = 1 / math.sqrt((1 + s**2) * (1 + t**2 / 4))
    assert float(found.worth(1.0, 1.0)) == pytest.approx(exact, rel=1e-5)  # cubics a tenth apart
    doping, size, best = found.best((0.05, 30.0), (0.05, 30.0))
    assert (doping, size) == (pytest.approx(1, rel=0.02), pytest.approx(1, rel=0.02))
    assert best == pytest.approx(exact, rel=1e-4)


def test_the_tenth_of_a_power_law_is_the_closed_form():
    """Score n^a d^b: ln of it is normal with spread √(a²s² + b²t²), and nine in ten lie above −1.2816 of them."""
    a, b, s, t = 0.5, -0.4, 0.2, 0.4
    found = map_of(lambda x, y: np.exp(a * x + b * y), Scatter(t, s, "tenth"))
    exact = math.exp(-1.2815516 * math.hypot(a * s, b * t))
    # 512 points of a balanced net
    assert float(found.worth(1.0, 1.0)) == pytest.approx(exact, rel=5e-3)


def test_it_keeps_away_from_a_cliff():
    """A slow rise towards an edge beyond which legs are worth nothing: the more scatter, the further off."""

    def cliff(x, y):
        return np.exp(0.2 * x) / (1 + np.exp(12 * (x - 1))) + 0 * y

    calm, expected, tenth = (
        math.log(map_of(cliff, Scatter(0.01, s, take)).best((0.1, 5.0), (0.5, 2.0))[0])
        for s, take in ((0.02, "expected"), (0.3, "expected"), (0.3, "tenth"))
    )
    assert calm > 0.6  # the edge begins to tell some 0.3 before 1
    assert expected < calm - 0.2
    assert tenth < calm - 0.2


@pytest.mark.parametrize("take", ["expected", "tenth"])
@pytest.mark.parametrize("name", ["pbte-p", "sige-n"])
def test_worth_is_that_of_legs_made_at_random(name, take):
    """2000 legs scattered about the design, each by the direct path."""
    making = {"size_scatter": 1.3, "doping_scatter": 1.2, "maximise": take}
    brief = brief_of(name, making)
    row = rank_one(brief, load_candidate(name))
    normal = np.random.default_rng(2).standard_normal((2, 2000))
    doping, size = row.doping * 1.2 ** normal[0], row.size * 1.3 ** normal[1]
    parts = zip(doping.reshape(20, -1), size.reshape(20, -1), strict=True)
    legs = np.concatenate([score(row.candidate, brief.task, n, d, "grain") for n, d in parts])
    made = float(np.mean(legs) if take == "expected" else np.quantile(legs, 0.1))
    assert row.score == pytest.approx(made, rel=6e-3)  # 2000 legs: three times the spread of their mean or tenth
    assert row.score < row.score_as_designed
    plain = rank_one(brief_of(name, None), load_candidate(name))
    assert plain.score == plain.score_as_designed >= row.score_as_designed * (1 - 1e-6)


def test_hardly_any_scatter_is_no_scatter():
    name = "pbte-p"
    plain = rank_one(brief_of(name, None), load_candidate(name))
    calm = rank_one(brief_of(name, {"size_scatter": 1.0, "doping_scatter": 1.001}), load_candidate(name))
    assert calm.score == pytest.approx(plain.score, rel=1e-4)  # where the top is flat, as between zooms
    assert calm.gain_over_bulk == pytest.approx(plain.gain_over_bulk, rel=1e-3)
    assert calm.window == pytest.approx(plain.window, rel=1e-2)  # a map's step apart, ends of a flat curve


def test_the_search_finds_what_the_ranking_finds():
    brief = brief_of("cosb3-n", {"size_scatter": 1.4, "doping_scatter": 1.3, "maximise": "tenth"})
    found = search(load_candidate("cosb3-n"), brief, 24)
    row = rank_one(brief, load_candidate("cosb3-n"))
    assert found.score == pytest.approx(found.map_score, rel=2e-3)  # a quantile of legs is not quite smooth
    assert found.score == pytest.approx(row.score, rel=5e-3)  # nine temperatures here, seventeen there


@pytest.mark.parametrize(
    "making", [{"size_scatter": 1.0}, {"size_scatter": 0.9}, {"doping_scatter": 1.2, "maximise": "mean"}]
)
def test_scatter_that_makes_no_sense_is_refused(making):
    with pytest.raises(ValidationError):
        brief_of("pbte-p", making)


def test_draws_lose_to_scatter_what_the_row_loses():
    brief = brief_of("pbte-p", {"size_scatter": 1.4})
    row = rank_one(brief, load_candidate("pbte-p"))
    made, designed = (drawn(brief, each, 16, 0) for each in (row, replace(row, score=row.score_as_designed)))
    assert np.allclose(made.score / designed.score, row.score / row.score_as_designed, rtol=1e-12)
    assert np.array_equal(made.score > made.coarse, designed.score > designed.coarse)
