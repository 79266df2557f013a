"""The search lands where dense maps say, replays from its checkpoint, and keeps the best when stopped."""

from __future__ import annotations

import json

import pytest

from legwright.base.errors import InputError
from legwright.candidate.family import load_family
from legwright.candidate.library import load_candidate
from legwright.decide import search as searching
from legwright.decide.brief import Brief
from legwright.decide.search import search


@pytest.fixture
def brief():
    return Brief.model_validate(
        {
            "title": "Test",
            "duty": {"kind": "generator", "hot_K": 640.0, "cold_K": 350.0, "maximise": "efficiency"},
            "size": {"shape": "grain", "min_nm": 50.0, "max_nm": 5000.0},
        }
    )


@pytest.mark.parametrize("name", ["pbte-p", "cosb3-n"])
def test_it_lands_within_half_a_per_cent_and_the_polish_within_a_hundredth(name, brief):
    found = search(load_candidate(name), brief, 40, seed=1)
    assert found.evaluations == 40
    assert found.before_polish > 0.995 * found.map_score
    assert found.score > (1 - 1e-4) * found.map_score
    assert found.score >= found.before_polish


def test_a_family_is_searched_over_its_composition(brief):
    found = search(load_family("mg-si-sn-n"), brief, 40, seed=0)
    # the dense map knows 13 compositions only
    assert found.score > (1 - 1e-4) * found.map_score
    share = float(found.candidate.name.rpartition(":")[2])
    assert 0.55 < share < 0.8  # the two bands meet near 65 to 70 per cent tin (Liu et al. 2012)


def test_an_interrupt_keeps_the_best_and_the_checkpoint_replays_to_the_same_end(brief, tmp_path, monkeypatch):
    one, path = load_candidate("pbte-p"), tmp_path / "points.json"
    whole = search(one, brief, 16, seed=3)
    asked = {"count": 0}
    worth = searching._Space.worth

    def stops(self, u):
        asked["count"] += 1
        if asked["count"] == 10:
            raise KeyboardInterrupt
        return worth(self, u)

    monkeypatch.setattr(searching._Space, "worth", stops)
    broken = search(one, brief, 16, seed=3, resume=path)
    assert not broken.complete
    assert broken.evaluations == 9
    assert len(json.loads(path.read_text(encoding="utf-8"))["answers"]) == 9
    asked["count"] = -10_000
    again = search(one, brief, 16, seed=3, resume=path)
    assert again.complete
    assert (again.score, again.doping, again.size) == (whole.score, whole.doping, whole.size)


@pytest.mark.parametrize(
    ("spoil", "message"),
    [
        (lambda text: text.replace("0.0", "0.1", 1), "damaged"),
        (lambda text: "{}", "no checkpoint"),
        (lambda text: text[:20], "no checkpoint"),
    ],
)
def test_a_spoiled_checkpoint_is_refused(spoil, message, brief, tmp_path):
    path = tmp_path / "points.json"
    searching._write(path, searching._key(load_candidate("pbte-p"), brief, 0), [0.01, 0.02])
    path.write_text(spoil(path.read_text(encoding="utf-8")), encoding="utf-8")
    with pytest.raises(InputError, match=message):
        search(load_candidate("pbte-p"), brief, 12, resume=path)


def test_a_checkpoint_of_another_search_is_refused(brief, tmp_path):
    path = tmp_path / "points.json"
    searching._write(path, searching._key(load_candidate("pbte-p"), brief, 0), [0.01])
    with pytest.raises(InputError, match="another search"):
        search(load_candidate("pbte-p"), brief, 12, seed=1, resume=path)


def test_nothing_that_serves_is_said(brief):
    with pytest.raises(InputError, match="can serve this brief"):
        search(load_candidate("bisbte-p"), brief, 12)
