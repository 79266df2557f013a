"""The audit's committed table is the baseline; the discrepancies are what the fixed rule gives.

Run this file as a script to write the table anew after an intended change.
"""

from __future__ import annotations

import csv
import io
import math
from dataclasses import replace
from pathlib import Path

import pytest

from legwright.base.files import datasets_folder
from legwright.candidate.measurements import read_measurements
from legwright.candidate.priors import load_priors
from legwright.candidate.sources import source_keys
from legwright.decide.audit import NINETY, audit, fitting_discrepancy, of_first_half, totals
from legwright.show.records import judgement_record

TABLE = Path(__file__).with_name("audit.csv")


@pytest.fixture(scope="module")
def judged():
    return audit()


def as_text(judged) -> str:
    out = io.StringIO()
    rows = [judgement_record(one) for one in judged]
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(rows[0])
    for row in rows:
        writer.writerow([f"{value:.4g}" if isinstance(value, float) else value for value in row.values()])
    return out.getvalue()


def test_the_committed_table_is_what_the_model_says(judged):
    assert TABLE.read_text(encoding="utf-8") == as_text(judged)


def test_discrepancies_follow_from_the_first_half_of_the_papers_by_the_rule(judged):
    table = load_priors().discrepancy
    for quantity in type(table).model_fields:
        # written with two digits, rounded up
        written, found = getattr(table, quantity).si, fitting_discrepancy(judged, quantity)
        assert found - 1e-9 <= written <= found + 0.0101, quantity


def test_enough_of_the_literature_is_there(judged):
    assert len(judged) >= 100
    assert len({one.source for one in judged}) >= 30
    sized = {(one.material, one.sample) for one in judged if math.isfinite(one.size)}
    assert len(sized) >= 18


def test_every_row_has_a_known_source_and_a_basis():
    known = source_keys(datasets_folder() / "measurements")
    for path in (datasets_folder() / "measurements").glob("*.csv"):
        table = read_measurements(path)
        assert set(table.word("source")) <= known, path.name
        assert set(table.word("basis")) <= {"measured", "from memory"}, path.name
        assert set(table.word("role")) <= {"", "seen", "calibration"}, path.name


def test_what_fixed_a_parameter_is_not_counted(judged):
    counted = {total.quantity: total.values for total in totals(judged) if total.material == "all"}
    assert sum(counted.values()) == sum(one.role in ("", "seen") for one in judged)
    assert any(one.fitted for one in judged)


def test_both_halves_of_the_papers_are_there_and_the_second_is_covered_as_it_should_be(judged):
    """Nine in ten, within the binomial error of values that fixed nothing (99 %, since papers cluster)."""
    from scipy.stats import binomtest

    other = [one for one in judged if one.role in ("", "seen") and not of_first_half(one.source)]
    assert len(other) > 15
    inside = sum(one.inside for one in other)
    assert binomtest(inside, len(other), 0.9).pvalue > 0.01


def test_a_spoiled_model_is_noticed(judged):
    """Negative control: predictions three times too large are not inside as often as they say."""
    from scipy.stats import binomtest

    spoiled = [replace(one, predicted=3 * one.predicted) for one in judged if one.role in ("", "seen")]
    assert binomtest(sum(one.inside for one in spoiled), len(spoiled), 0.9).pvalue < 1e-6


def test_intervals_hold_their_prediction_and_widen_with_its_spread(judged):
    for one in judged:
        low, high = one.interval
        assert low < one.predicted < high
        assert one.half_width >= NINETY * one.spread
        wider = replace(one, spread=2 * one.spread)
        assert wider.half_width > one.half_width


if __name__ == "__main__":
    TABLE.write_text(as_text(audit()), encoding="utf-8")
