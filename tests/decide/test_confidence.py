"""Confidence: intervals that hold the nominal score, wins that add up, draws that do not hang on who is asked."""

from __future__ import annotations

import contextlib
import io
import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from legwright.candidate.library import library_names, load_candidate
from legwright.candidate.measurements import read_measurements
from legwright.decide import drawn as drawing
from legwright.decide.brief import Brief
from legwright.decide.confidence import Confidence, confidences, draw_all, with_cautions
from legwright.decide.drawn import Drawn
from legwright.decide.draws import law_normals, own_normals, own_spread, rounded
from legwright.decide.fit import candidate_text, fit
from legwright.decide.rank import rank
from legwright.physics.crystal import crystal
from legwright.physics.properties import evaluate, evaluate_crystal
from legwright.show.cli import run

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


def sure_of(brief: Brief, rows, draws: int, seed: int, workers: int = 1) -> dict[str, Confidence]:
    return confidences(draw_all(brief, rows, draws, seed, workers))


@pytest.fixture(scope="module")
def ranked():
    brief = brief_of(*NAMES)
    return brief, rank(brief, Path("test.toml"))


def test_intervals_hold_the_score_and_wins_add_up(ranked):
    brief, rows = ranked
    found = sure_of(brief, rows, 64, 0)
    assert set(found) == set(NAMES)
    for row in rows:
        sure = found[row.candidate.name]
        assert 0 < sure.low < row.score < sure.high
        assert sure.high < 4 * sure.low
        assert sure.size_low * (1 - 1e-9) <= row.size <= sure.size_high * (1 + 1e-9)  # both at a limit
        assert sure.first_three_share == 1  # of three
        assert row.candidate.name not in sure.tied_with
    assert sum(sure.win_share for sure in found.values()) == pytest.approx(1, abs=1e-12)  # no two scores are equal


def test_the_same_seed_gives_the_same_bits_and_another_does_not(ranked):
    brief, rows = ranked
    assert sure_of(brief, rows, 32, 5) == sure_of(brief, rows, 32, 5)
    assert sure_of(brief, rows, 32, 5) != sure_of(brief, rows, 32, 6)


def test_neither_workers_nor_order_nor_who_else_is_asked_change_a_bit(ranked):
    brief, rows = ranked
    one = draw_all(brief, rows, 32, 1)
    many = draw_all(brief, rows[::-1], 32, 1, workers=2)
    alone = draw_all(brief, rows[1:2], 32, 1)
    name = rows[1].candidate.name
    for other in (many, alone):
        for field in ("score", "doping", "size", "coarse", "measured", "normals"):
            assert np.array_equal(getattr(one[name], field), getattr(other[name], field))
    assert confidences(one) == confidences(many)
    assert confidences(alone)[name].win_share == 1


def test_candidates_err_apart_and_apart_from_the_shared_laws():
    """Unshuffled nets of two seeds have leading digits in common: correlations up to 0.94 were seen."""
    count, names = 1024, library_names()[:8]
    own = [own_normals(load_candidate(name), count, 0) for name in names]
    every = np.hstack([*own, law_normals(count, 0)])
    correlation = np.corrcoef(every.T) - np.eye(every.shape[1])
    assert np.max(np.abs(correlation)) < 5 / count**0.5  # five spreads of a chance correlation, 1275 pairs
    assert np.allclose(np.std(every, axis=0), 1, atol=0.02)  # each a balanced net


def test_without_doubt_every_draw_is_the_row_s_score(ranked, monkeypatch):
    brief, rows = ranked
    calm = lambda candidate, count, seed: replace(  # noqa: E731
        drawing_laws(candidate, count, seed),
        exponent=np.full(count, 0.5),
        prefactor=np.ones(count),
        reflection=np.full(count, 0.3),
    )
    drawing_laws = drawing.laws_for
    monkeypatch.setattr(drawing, "laws_for", calm)
    monkeypatch.setattr(drawing, "own_spread", lambda *which: np.zeros((3, 6)))
    for row, one in zip(rows, draw_all(brief, rows, 16, 0).values(), strict=True):
        # nine temperatures and a coarser current than the row's seventeen
        assert one.score == pytest.approx(row.score, rel=1e-3, abs=0)
        assert one.coarse == pytest.approx(row.score / row.gain_over_bulk, rel=1e-3, abs=0)
        assert np.ptp(one.score) <= 1e-12 * row.score
        made = evaluate(row.candidate, 495.0, row.doping, row.size)  # mid-span
        direct = np.log([made.electrical_conductivity, abs(made.seebeck), made.thermal_conductivity])
        assert np.allclose(one.measured, direct, rtol=0, atol=1e-3)  # cubics between nodes of the map


def test_less_doubt_narrows_the_interval(ranked, monkeypatch):
    brief, rows = ranked
    name, whole = rows[0].candidate.name, own_spread
    wide = sure_of(brief, rows[:1], 64, 0)[name]
    monkeypatch.setattr(drawing, "own_spread", lambda *which: 0.25 * whole(*which))
    narrow = sure_of(brief, rows[:1], 64, 0)[name]
    assert narrow.high / narrow.low < 0.6 * wide.high / wide.low


def made_up(*scores: float) -> Drawn:
    score = np.array(scores)
    same = np.ones_like(score)
    return Drawn(score, same, same * np.arange(1, score.size + 1), 0.99 * score, same[:, None], same[:, None])


def test_wins_places_and_ties_by_hand():
    """Three draws: a beats b twice (tied: one in three), c never, d always last; e serves in one draw alone."""
    found = {
        "a": made_up(5.0, 5.0, 4.0),
        "b": made_up(4.0, 4.0, 5.0),
        "c": made_up(3.0, 3.0, 3.0),
        "d": made_up(2.0, 2.0, 2.0),
        "e": made_up(0.0, 0.0, 9.0),
    }
    sure = confidences(found)
    assert [sure[name].win_share for name in "abcde"] == pytest.approx([2 / 3, 0, 0, 0, 1 / 3])
    assert [sure[name].first_three_share for name in "abcde"] == pytest.approx([1, 1, 2 / 3, 0, 1 / 3])
    assert sure["a"].tied_with == ("b", "e")
    assert sure["b"].tied_with == ("a", "e")
    assert sure["d"].tied_with == ("e",)
    assert [one.nanostructuring_pays for one in sure.values()] == [0] * 5  # by one per cent only
    assert confidences({}) == {}
    nobody = confidences({"a": made_up(0.0, 0.0), "b": made_up(0.0, 0.0)})
    assert [one.win_share for one in nobody.values()] == [0, 0]


def test_a_sure_win_from_memory_is_flagged(ranked):
    _, rows = ranked
    row = replace(rows[0], flags=("from-memory",))
    sure = {row.candidate.name: Confidence(0.1, 0.2, 0.96, 1.0, 1e-7, 1e-7, 1.0, ())}
    assert with_cautions([row], sure)[0].flags == ("from-memory", "sure-from-memory")
    close = {row.candidate.name: replace(sure[row.candidate.name], win_share=0.95)}
    assert with_cautions([row], close)[0].flags == ("from-memory",)
    read = replace(row, flags=())
    assert with_cautions([read], sure)[0].flags == ()
    assert with_cautions([row], {}) == [row]


def test_draws_are_whole_nets():
    assert [rounded(n) for n in (1, 16, 17, 1000, 1024)] == [16, 16, 32, 1024, 1024]


@pytest.fixture(scope="module")
def fitted(tmp_path_factory):
    """A candidate fitted to a table of its own library values."""
    folder = tmp_path_factory.mktemp("fitted")
    temperature = np.linspace(320, 640, 5)
    made = evaluate(load_candidate("mg2sisn-n"), temperature, 1.5e26, np.inf)
    lines = ["temperature [K],electrical_conductivity [S/cm],seebeck [uV/K],thermal_conductivity [W/m/K]"]
    lines += [
        f"{t},{s / 100},{a * 1e6},{k}"
        for t, s, a, k in zip(
            temperature, made.electrical_conductivity, made.seebeck, made.thermal_conductivity, strict=True
        )
    ]
    (folder / "own.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")
    (folder / "own.toml").write_text(
        candidate_text(fit(read_measurements(folder / "own.csv", "n"), load_candidate("mg2sisn-n"))),
        encoding="utf-8",
    )
    return load_candidate(folder / "own.toml")


def test_a_fitted_candidate_keeps_its_covariance(fitted):
    """ln σ, ln S, ln κ_L scatter as crystals drawn from the fit's own covariance do, each worked out directly."""
    temperature, design = np.linspace(350, 640, 5), (1.5e26, 1e-7)
    matrix = own_spread(fitted, temperature, *design, "grain")[:, :3]
    names = ("mass", "lattice scattering", "anharmonicity", "gap")
    places = [fitted.data.fitted.names.index(name) for name in names]
    covariance = np.array(fitted.data.fitted.covariance)[np.ix_(places, places)]
    drawn = np.random.default_rng(1).multivariate_normal(np.zeros(4), covariance, 400)
    one, logs = crystal(fitted), []
    for mass, scattering, anharmonicity, gap in drawn:
        electrons = replace(
            one.electrons,
            mass_scale=one.electrons.mass_scale * np.exp(mass),
            lattice_scale=one.electrons.lattice_scale * np.exp(scattering),
            edge=one.electrons.edge
            + np.where(one.electrons.majority, 0, one.electrons.side * gap * 1.602176634e-19),
        )
        phonons = replace(one.phonons, anharmonic_scale=one.phonons.anharmonic_scale * np.exp(anharmonicity))
        made = evaluate_crystal(replace(one, electrons=electrons, phonons=phonons), temperature, *design)
        logs.append(
            [
                np.mean(np.log(np.abs(values)))
                for values in (made.electrical_conductivity, made.seebeck, made.lattice_thermal_conductivity)
            ]
        )
    direct = np.cov(np.array(logs).T)
    carried = matrix @ matrix.T
    spread, expected = np.sqrt(np.diag(carried)), np.sqrt(np.diag(direct))
    assert np.allclose(spread, expected, rtol=0.15)  # 400 draws tell a spread to 4 %; the rest is curvature
    assert np.allclose(carried / np.outer(spread, spread), direct / np.outer(expected, expected), atol=0.15)
    assert abs(carried[0, 1]) > 0.3 * spread[0] * spread[1]  # mass moves σ and S together


def test_draws_are_columns_of_the_ranking(tmp_path):
    path = tmp_path / "brief.toml"
    path.write_text(
        'title = "T"\n[duty]\nkind = "generator"\nhot_K = 640\ncold_K = 350\nmaximise = "efficiency"\n'
        '[size]\nshape = "grain"\nmin_nm = 50\nmax_nm = 5000\n[candidates]\nuse = ["pbte-p", "bisbte-p"]\n',
        encoding="utf-8",
    )
    out = io.StringIO()
    with contextlib.redirect_stdout(out):
        assert run(["rank", str(path), "--draws", "16", "--json"]) == 0
    rows = json.loads(out.getvalue())["rows"]
    assert rows[0]["win_share"] == rows[0]["first_three_share"] == 1
    assert rows[0]["score_low"] < rows[0]["score"] < rows[0]["score_high"]
    assert rows[0]["size_low_nm"] <= rows[0]["size_high_nm"]
    assert 0 <= rows[0]["nanostructuring_pays"] <= 1
    assert rows[0]["tied_with"] == []
    assert rows[1]["score"] == rows[1]["score_high"] == rows[1]["win_share"] == 0
    assert rows[1]["size_low_nm"] is None
    assert rows[1]["nanostructuring_pays"] is None
