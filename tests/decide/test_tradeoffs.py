"""Fronts: by hand, against a plain double loop, and of a ranking."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from legwright.candidate.supply import cost_per_kg, hazardous_elements, supply_concentration
from legwright.decide.brief import load_brief
from legwright.decide.rank import rank
from legwright.decide.tradeoffs import not_dominated, trade_offs

KILN = Path(__file__).resolve().parents[2] / "examples" / "kiln-flue.toml"


def dominated_by_loop(good):
    def beats(a, b):
        return all(x >= y for x, y in zip(a, b, strict=True)) and any(x > y for x, y in zip(a, b, strict=True))

    return [any(beats(other, one) for other in good) for one in good]


def test_the_filter_is_that_of_a_plain_loop():
    rng = np.random.default_rng(0)
    for axes in (1, 2, 3):
        good = rng.integers(0, 6, (60, axes)).astype(float)  # few values: many equals
        kept = not_dominated(good)
        assert (~kept).tolist() == dominated_by_loop(good.tolist())
        assert kept.any()


def test_what_is_not_known_is_not_on_the_front_and_beats_nobody():
    assert not_dominated([[2.0, np.nan], [1.0, 1.0]]).tolist() == [False, True]
    assert not_dominated(np.zeros((0, 2))).tolist() == []


def test_fronts_of_a_ranking():
    rows = rank(load_brief(KILN), KILN)
    fronts = trade_offs(rows)
    able = {row.candidate.name: row for row in rows if row.score > 0}
    best = rows[0].candidate.name
    figures = {
        "cost_USD_per_kg": lambda row: cost_per_kg(row.candidate),
        "supply_concentration": lambda row: supply_concentration(row.candidate),
        "hazardous_elements": lambda row: len(hazardous_elements(row.candidate)),
        "largest_size_nm": lambda row: -row.window[1],
    }
    assert set(fronts) == set(figures)
    for axis, figure in figures.items():
        front = fronts[axis]
        assert best in front  # nobody has its score
        along = [(able[name].score, figure(able[name])) for name in front]
        assert along == sorted(along, reverse=True)  # down in score, and each further one is cheaper
        for name, row in able.items():
            beaten = [f for f in front if able[f].score >= row.score and figure(able[f]) <= figure(row)]
            assert beaten, (axis, name)  # on the front itself, or behind one that is
