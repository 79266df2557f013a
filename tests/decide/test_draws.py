"""Confidence: intervals that hold the nominal score, wins that add up, draws that do not hang on who is asked."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from legwright.decide import draws
from legwright.decide.brief import Brief
from legwright.decide.draws import OWN, confidences
from legwright.decide.rank import rank

NAMES = ("pbte-p", "cosb3-n", "mg2sisn-n")


def brief_of(*names: str) -> Brief:
    return Brief.model_validate(
        {
            "title": "Test",
            "duty": {"kind": "generator", "hot_K": 640.0, "cold_K": 350.0, "maximise": "efficiency"},
            "size": {"shape": "grain", "min_nm": 50.0, "max_nm": 5000.0},
            "candidates": {"use": names},
        }
    )


@pytest.fixture(scope="module")
def ranked():
    brief = brief_of(*NAMES)
    return brief, rank(brief, Path("test.toml"))


def test_intervals_hold_the_score_and_wins_add_up(ranked):
    brief, rows = ranked
    found = confidences(brief, rows, 64, 0)
    assert set(found) == set(NAMES)
    for row in rows:
        sure = found[row.candidate.name]
        assert 0 < sure.low < row.score < sure.high
        assert sure.high < 4 * sure.low
    assert sum(sure.win_share for sure in found.values()) == pytest.approx(1, abs=1e-12)  # no two scores are equal


def test_the_same_seed_gives_the_same_bits_and_another_does_not(ranked):
    brief, rows = ranked
    assert confidences(brief, rows, 32, 5) == confidences(brief, rows, 32, 5)
    assert confidences(brief, rows, 32, 5) != confidences(brief, rows, 32, 6)


def test_a_candidate_s_interval_does_not_hang_on_who_else_is_asked(ranked):
    brief, rows = ranked
    alone = [row for row in rows if row.candidate.name == "pbte-p"]
    beside, by_itself = (confidences(brief, some, 32, 1)["pbte-p"] for some in (rows, alone))
    assert (beside.low, beside.high) == (by_itself.low, by_itself.high)
    assert by_itself.win_share == 1


def test_without_doubt_every_draw_is_the_nominal_score(ranked, monkeypatch):
    """Nothing spread but the grid: each draw is then the best of the grid around the design, its own score."""
    brief, rows = ranked
    one = np.ones((1, OWN))
    monkeypatch.setattr(draws, "_own_factors", lambda candidate, laws, seed: (one, one, one))
    monkeypatch.setattr(draws, "with_each_law", lambda candidate, crystal, count, seed: [crystal])
    for row in rows:
        sure = confidences(brief, [row], OWN, 0)[row.candidate.name]
        # nine temperatures and a coarser current than the row's seventeen
        assert sure.low == pytest.approx(row.score, rel=2e-3, abs=0)
        assert sure.high == sure.low


def test_less_doubt_narrows_the_interval(ranked, monkeypatch):
    brief, rows = ranked
    wide = confidences(brief, rows[:1], 64, 0)[rows[0].candidate.name]
    whole = draws._own_factors
    monkeypatch.setattr(
        draws, "_own_factors", lambda candidate, laws, seed: tuple(f**0.25 for f in whole(candidate, laws, seed))
    )
    narrow = confidences(brief, rows[:1], 64, 0)[rows[0].candidate.name]
    assert narrow.high / narrow.low < 0.6 * wide.high / wide.low


def test_draws_are_columns_of_the_ranking(tmp_path):
    import json

    from legwright.show.cli import run

    path = tmp_path / "brief.toml"
    path.write_text(
        'title = "T"\n[duty]\nkind = "generator"\nhot_K = 640\ncold_K = 350\nmaximise = "efficiency"\n'
        '[size]\nshape = "grain"\nmin_nm = 50\nmax_nm = 5000\n[candidates]\nuse = ["pbte-p", "bisbte-p"]\n',
        encoding="utf-8",
    )
    import contextlib
    import io

    out = io.StringIO()
    with contextlib.redirect_stdout(out):
        assert run(["rank", str(path), "--draws", "16", "--json"]) == 0
    rows = json.loads(out.getvalue())["rows"]
    assert rows[0]["win_share"] == 1
    assert rows[0]["score_low"] < rows[0]["score"] < rows[0]["score_high"]
    assert rows[1]["score"] == rows[1]["score_high"] == rows[1]["win_share"] == 0
