"""Advice against closed forms, and its sensitivities against a sampling of its own."""

from __future__ import annotations

import json
import math
from pathlib import Path

import numpy as np
import pytest
from scipy.special import ndtri
from scipy.stats import norm, qmc, sobol_indices

from legwright.decide.advise import QUANTITIES, advise, choices, effort_of, noise_of, sensitivities
from legwright.decide.drawn import Drawn
from legwright.decide.draws import OWN_NAMES, SHARED_NAMES, law_normals
from legwright.show.cli import run

COUNT, SEED = 4096, 0


def normals(dimensions: int, seed: int) -> np.ndarray:
    return ndtri(qmc.Sobol(dimensions, rng=np.random.default_rng(seed)).random(COUNT))


def drawn_of(score: np.ndarray, measured: np.ndarray, own: np.ndarray | None = None) -> Drawn:
    same = np.ones_like(score)
    return Drawn(score, same, same, same, measured, np.zeros((score.size, 6)) if own is None else own)


def test_the_gain_is_the_closed_form_for_one_normal_score_against_a_known_one():
    """θ ~ N(δ, s²) against 0, measured with noise e: t [φ(u) − u Φ(−u)], t = s²/√(s² + e²), u = δ/t.

    Raiffa & Schlaifer (1961).
    """
    spread, noise = 0.5, noise_of("thermal_conductivity")
    theta = spread * normals(1, 1)[:, 0]
    flat = np.zeros((COUNT, 3))
    telling = flat + np.array([0, 0, 1]) * theta[:, None]
    ahead = 0.1
    found = {"a": drawn_of(theta + 1 + ahead, telling), "b": drawn_of(np.full(COUNT, 1.0), flat)}
    advice = advise(found, frozenset(), SEED, ())
    best = max(advice.measurements, key=lambda m: m.gain)

    def gain(t: float) -> float:
        return t * (norm.pdf(ahead / t) - ahead / t * norm.cdf(-ahead / t))

    exact = gain(spread**2 / math.hypot(spread, noise))
    assert (best.candidate, best.quantity) == ("a", "thermal_conductivity")
    assert best.gain == pytest.approx(exact, abs=3 * best.error)
    assert best.error < 0.03 * exact
    assert advice.all_known == pytest.approx(gain(spread), rel=0.01)  # a balanced net of 4096
    for other in advice.measurements:
        if other is not best:
            assert abs(other.gain) <= 3 * other.error + 1e-12  # says nothing, so gains nothing


def test_a_measurement_of_one_tells_of_another_through_what_they_share():
    shared = normals(1, 2)[:, 0]
    flat = np.zeros((COUNT, 3))
    found = {
        "a": drawn_of(1 + 0.3 * shared, flat),
        "b": drawn_of(1 - 0.3 * shared, flat + np.array([0, 1, 0]) * shared[:, None]),
    }
    advice = advise(found, frozenset(), SEED, ())
    assert advice.measurements[0].candidate == "b"
    assert advice.measurements[0].quantity == "seebeck"
    assert advice.measurements[0].gain == pytest.approx(advice.all_known, rel=0.03)  # 6 % off: it knows the sign


def test_an_outcome_chooses_the_mean_that_its_likelihood_makes_best():
    scores = np.array([[1.0, 0.0], [0.0, 1.0]])
    known = np.array([0.0, 1.0])
    assert choices(scores, known, np.array([-9.0, 0.2, 0.8, 9.0]), 0.3).tolist() == [0, 0, 1, 1]
    assert choices(scores, known, known, 0.3, leave_out=True).tolist() == [1, 0]  # each knows only the other draw


def test_effort_counts():
    assert effort_of("seebeck") < effort_of("electrical_conductivity") < effort_of("thermal_conductivity")
    theta = 0.5 * normals(1, 1)[:, 0]
    measured = np.stack([theta, theta, theta], axis=1)
    found = {"a": drawn_of(1 + theta, measured), "b": drawn_of(np.full(COUNT, 1.0), np.zeros((COUNT, 3)))}
    ordered = [m.quantity for m in advise(found, frozenset(), SEED, ()).measurements if m.candidate == "a"]
    assert ordered[0] == "seebeck"  # the least noise, the least effort


def score_of(z: np.ndarray) -> np.ndarray:
    """A made-up score of nine inputs: products, a square, an exponential."""
    return np.exp(0.3 * z[3] + 0.2 * z[6]) * (1 + 0.1 * z[0] + 0.05 * z[0] * z[4]) + 0.05 * z[1] ** 2


def test_sensitivities_are_those_of_saltelli_s_design():
    own = normals(6, 3)[np.random.default_rng(4).permutation(COUNT)]
    shared = law_normals(COUNT, SEED)
    found, explained = sensitivities(
        "a", drawn_of(score_of(np.hstack([shared, own]).T), np.zeros((COUNT, 3)), own), SEED, False
    )
    reference = sobol_indices(func=score_of, n=2**14, dists=[norm()] * 9, rng=np.random.default_rng(5))
    by_source = {one.source: one for one in found}
    assert explained > 0.98  # third powers of the exponential are left out
    for place, source in enumerate([*SHARED_NAMES, *OWN_NAMES]):
        # what is not explained, and the reference's own error
        assert by_source[source].first == pytest.approx(reference.first_order[place], abs=0.02)
        assert by_source[source].total == pytest.approx(reference.total_order[place], abs=0.02)


def test_a_fitted_candidate_has_one_source_for_its_three_anchors():
    own = normals(6, 3)
    one = drawn_of(own[:, 0] + own[:, 1] * own[:, 2] + own[:, 3], np.zeros((COUNT, 3)), own)
    found, explained = sensitivities("a", one, SEED, True)
    by_source = {each.source: each for each in found}
    assert set(by_source) == {*SHARED_NAMES, "fit", *OWN_NAMES[3:]}
    assert by_source["fit"].first == pytest.approx(2 / 3, abs=0.01)  # a balanced net of 4096
    assert by_source["mobility discrepancy"].total == pytest.approx(1 / 3, abs=0.01)
    assert explained == pytest.approx(1, abs=1e-6)


@pytest.fixture(scope="module")
def brief(tmp_path_factory) -> Path:
    path = tmp_path_factory.mktemp("advice") / "brief.toml"
    path.write_text(
        'title = "T"\n[duty]\nkind = "generator"\nhot_K = 640\ncold_K = 350\nmaximise = "efficiency"\n'
        '[size]\nshape = "grain"\nmin_nm = 50\nmax_nm = 5000\n'
        '[candidates]\nuse = ["pbte-p", "cosb3-n", "bisbte-p"]\n',
        encoding="utf-8",
    )
    return path


def test_the_verb_gives_the_same_bytes_for_any_workers(brief, capsys):
    said = []
    for workers in ("1", "2"):
        assert run(["measure", str(brief), "--draws", "64", "--workers", workers, "--json"]) == 0
        said.append(capsys.readouterr().out)
    assert said[0] == said[1]
    found = json.loads(said[0])
    assert {row["quantity"] for row in found["rows"]} == set(QUANTITIES)
    assert {row["candidate"] for row in found["rows"]} == {"pbte-p", "cosb3-n"}  # the third cannot serve
    worth = [row["gain_per_effort"] for row in found["rows"]]
    assert worth == sorted(worth, reverse=True)
    assert found["chosen_now"] in ("pbte-p", "cosb3-n")
    assert 0 < found["gain_if_all_were_known"] < found["expected_score"]
    assert {row["candidate"] for row in found["sensitivities"]} <= {"pbte-p", "cosb3-n"}
    assert run(["measure", str(brief), "--draws", "64"]) == 0
    assert "What to measure next" in capsys.readouterr().out


def test_nothing_to_advise_where_nobody_can_serve(brief, capsys, tmp_path):
    hot = tmp_path / "hot.toml"
    hot.write_text(brief.read_text(encoding="utf-8").replace("640", "2500"), encoding="utf-8")
    assert run(["measure", str(hot), "--draws", "16"]) == 3
    assert capsys.readouterr().out == ""


def test_advice_is_on_legs_alone(brief, capsys, tmp_path):
    couple = tmp_path / "couple.toml"
    couple.write_text(brief.read_text(encoding="utf-8") + '[leg]\npartner = "pbte-n"\n', encoding="utf-8")
    assert run(["measure", str(couple), "--draws", "16"]) == 2
    said = capsys.readouterr()
    assert said.out == ""
    assert "leg.partner" in said.err
