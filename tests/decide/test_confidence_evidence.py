"""Intervals on made-up truths, and win shares of few draws against those of many.

A trial takes four base candidates as the truth: their anchors are right, but the model misses each by its stated
discrepancy, under one law of grain boundaries drawn from the priors. An analyst sees anchors that are off by their
stated spreads, ranks, and draws; then truth and interval are compared.

Run this file as a script to write both tables anew (some ten minutes).
"""

from __future__ import annotations

import csv
import io
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from legwright.base.errors import InputError
from legwright.candidate.library import Candidate, load_candidate
from legwright.candidate.model import CandidateFile
from legwright.decide.brief import Brief
from legwright.decide.confidence import confidences, draw_all
from legwright.decide.drawn import LawMaps
from legwright.decide.draws import FEWEST, laws_for, own_spread
from legwright.decide.rank import rank_one
from legwright.physics.crystal import crystal

TABLE = Path(__file__).with_name("confidence_trials.csv")
SHARES = Path(__file__).with_name("win_share_trials.csv")
BASES = (
    "cefecosb-p", "cosb3-n", "gete-p", "hfzrnisn-n", "mg2sisn-n", "nbfesb-p", "pbse-n", "pbte-n",
    "pbte-p", "si-n", "sige-n", "sige-p", "snte-p", "ybcosb-n",
)  # fmt: skip
TRIALS, TOGETHER, DRAWS = 300, 4, 256
SLICE = (5, 77, 140, 201)
FEW, MANY, SEED = 1024, 8192, 0
BRIEF = Brief.model_validate(
    {
        "title": "Trials",
        "duty": {"kind": "generator", "hot_K": 640.0, "cold_K": 350.0, "maximise": "efficiency"},
        "size": {"shape": "grain", "min_nm": 20.0, "max_nm": 5000.0},
    }
)


def seen_by_analyst(base: Candidate, rng: np.random.Generator) -> Candidate:
    """The candidate with each anchor off by its stated spread; drawn again where no prefactor could meet them."""
    while True:
        raw = base.data.model_dump(by_alias=True, exclude_none=True)
        for anchor, kept in zip(raw["anchor"], base.data.anchor, strict=True):
            spread = kept.measured.relative_spread
            anchor[kept.quantity]["value"] *= float(np.exp(spread * rng.standard_normal()))
        seen = replace(base, data=CandidateFile.model_validate(raw))
        try:
            crystal(seen)
        except InputError:
            continue
        return seen


def truth(base: Candidate, trial: int, rng: np.random.Generator) -> float:
    """Best score of the base candidate under the trial's law, off by what the model misses."""
    maps = LawMaps.of(BRIEF, base)
    laws = laws_for(base, FEWEST, 10**6 + trial)
    spread = own_spread(base, maps.temperature, 1.0, 1.0, "grain")  # no fitted one: the design does not matter
    factors = spread[:, 3:] @ rng.standard_normal(3)
    held = maps.under(laws.exponent[:1], laws.prefactor[:1], laws.reflection[:1], factors[None])
    return float(held.best()[0][0])


def lines(trial: int) -> list[list[str]]:
    """Four rows: interval, win share, truth, whether inside and whether it truly won."""
    rng = np.random.default_rng([trial, 1])
    bases = [load_candidate(name) for name in sorted(rng.choice(BASES, TOGETHER, replace=False))]
    true = [truth(base, trial, rng) for base in bases]
    rows = [rank_one(BRIEF, seen_by_analyst(base, rng)) for base in bases]
    sure = confidences(draw_all(BRIEF, rows, DRAWS, trial))
    made = []
    for row, score in zip(rows, true, strict=True):
        known = sure[row.candidate.name]
        inside = known.low <= score <= known.high
        figures = [f"{x:.5g}" for x in (row.score, known.low, known.high, known.win_share, score)]
        made.append([str(trial), row.candidate.name, *figures, str(int(inside)), str(int(score == max(true)))])
    return made


def win_shares(names: tuple[str, ...], draws: int) -> dict[str, float]:
    rows = [rank_one(BRIEF, load_candidate(name)) for name in names]
    return {name: one.win_share for name, one in confidences(draw_all(BRIEF, rows, draws, SEED)).items()}


def sampling_error(share: float, few: int, many: int) -> float:
    """Of a difference of two shares from independent draws; a balanced net has no more."""
    return (max(share * (1 - share), 1 / few) * (1 / few + 1 / many)) ** 0.5


def kept_rows(table: Path) -> list[list[str]]:
    with table.open(encoding="utf-8") as text:
        return list(csv.reader(text))[1:]


@pytest.mark.evidence
def test_nine_intervals_in_ten_hold_the_truth():
    rows = kept_rows(TABLE)
    assert len(rows) == TRIALS * TOGETHER
    inside = np.array([int(row[7]) for row in rows])
    assert 0.87 <= np.mean(inside) <= 0.93
    fresh = [row for trial in SLICE for row in lines(trial)]
    places = {tuple(row[:2]): place for place, row in enumerate(rows)}
    assert all(tuple(row[:2]) in places for row in fresh)
    # of sixteen intervals, each 0.9 likely to hold: eleven or fewer once in sixty libraries of numbers
    assert sum(int(row[7]) for row in fresh) >= 12


@pytest.mark.evidence
def test_win_shares_are_how_often_they_truly_win():
    rows = kept_rows(TABLE)
    share, won = np.array([[float(row[5]), float(row[8])] for row in rows]).T
    for low, high in ((0.0, 0.1), (0.1, 0.3), (0.3, 0.6), (0.6, 1.01)):
        there = (share >= low) & (share < high)
        count = int(np.sum(there))
        expected = float(np.mean(share[there]))
        # three standard errors of a share of so many trials
        assert abs(np.mean(won[there]) - expected) <= 3 * (expected * (1 - expected) / count) ** 0.5, (low, high)


@pytest.mark.evidence
def test_few_draws_give_the_win_shares_of_many():
    rows = kept_rows(SHARES)
    assert {row[0] for row in rows} == set(BASES)
    for _, few, many in rows:
        assert abs(float(few) - float(many)) <= 3 * sampling_error(float(many), FEW, MANY)
    names = ("cosb3-n", "mg2sisn-n", "pbte-p")
    few, many = win_shares(names, 128), win_shares(names, 1024)
    for name in names:
        assert abs(few[name] - many[name]) <= 3 * sampling_error(many[name], 128, 1024)


def write(table: Path, head: list[str], rows: list[list[str]]) -> None:
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(head)
    writer.writerows(rows)
    table.write_text(out.getvalue(), encoding="utf-8")


if __name__ == "__main__":
    from joblib import Parallel, delayed

    found = Parallel(n_jobs=2)(delayed(lines)(trial) for trial in range(TRIALS))
    head = ["trial", "candidate", "seen score", "low", "high", "win share", "true score", "inside", "truly best"]
    write(TABLE, head, [row for rows in found for row in rows])
    few, many = (win_shares(BASES, draws) for draws in (FEW, MANY))
    write(
        SHARES,
        ["candidate", f"{FEW} draws", f"{MANY} draws"],
        [[n, f"{few[n]:.5f}", f"{many[n]:.5f}"] for n in BASES],
    )
