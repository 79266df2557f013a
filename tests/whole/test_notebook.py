"""What a notebook shows: tables, with nothing in them that is not text."""

from __future__ import annotations

import dataclasses
import re

import numpy as np

import legwright as lw
from legwright.decide.brief import load_brief
from legwright.decide.rank import rank
from legwright.show.records import rank_frame


def test_a_candidate_is_a_table_of_plain_text():
    one = lw.load_candidate("sige-n")
    shown = one._repr_html_()
    assert "<caption>sige-n</caption>" in shown
    assert "Si0.8Ge0.2" in shown
    assert f"{sum(one.basis_counts.values())}" == str(
        sum(map(int, re.findall(r"numbers [^<]*</th><td>(\d+)", shown)))
    )
    hostile = dataclasses.replace(one, name="<script>x</script>")
    assert "<script" not in hostile._repr_html_()


def test_properties_are_their_frame_and_a_long_one_is_cut():
    made = lw.evaluate(lw.load_candidate("sige-n"), np.linspace(300, 1000, 100), 2e26, 5e-8)
    shown = made._repr_html_()
    assert "temperature [K]" in shown
    assert "zT [1]" in shown
    assert shown.count("<tr") < 60


def test_a_ranking_is_a_frame_with_units_in_its_columns(brief):
    path = brief({"candidates.use": '["sige-n", "sige-p"]'})
    frame = rank_frame(rank(load_brief(path), path))
    assert list(frame.index) == [1, 2]
    assert {"candidate", "size_nm", "doping_per_cm3", "score", "zt_mean"} <= set(frame.columns)
    assert "sige-n" in frame._repr_html_()
