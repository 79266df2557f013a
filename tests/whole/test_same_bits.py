"""The same question gives the same bytes, however it is asked."""

import os
import subprocess
import sys

import pytest

USE = '["bisbte-p", "pbte-n", "si-n"]'


@pytest.fixture
def question(brief):
    return brief({"candidates.use": USE, "duty.hot_K": "480", "duty.cold_K": "300"})


def test_same_command_twice_in_fresh_processes(question, legwright):
    """Another order of Python's sets and dicts of strings (its hash seed) changes nothing."""
    program = [sys.executable, "-c", "from legwright.show.cli import main; main()", "rank", question, "--json"]
    said = [
        subprocess.run(
            program, capture_output=True, env={**os.environ, "PYTHONHASHSEED": seed}, timeout=120, check=True
        ).stdout
        for seed in ("1", "2")
    ]
    assert said[0] == said[1]
    assert said[0].decode() == legwright("rank", question, "--json").out


def test_other_order_of_candidates_and_of_tables(question, brief, legwright):
    first = legwright("rank", question, "--json")
    assert first.code == 0
    turned = brief({"candidates.use": '["si-n", "bisbte-p", "pbte-n"]', "duty.hot_K": "480", "duty.cold_K": "300"})
    turned.write_text("".join(reversed(turned.read_text().splitlines(keepends=True))))
    assert legwright("rank", turned, "--json").out == first.out


def test_a_candidate_named_twice_counts_once(question, brief, legwright):
    twice = brief(
        {"candidates.use": USE.replace("]", ', "si-n"]'), "duty.hot_K": "480", "duty.cold_K": "300"}, "twice.toml"
    )
    assert legwright("rank", twice, "--json").out == legwright("rank", question, "--json").out


def test_a_row_does_not_depend_on_who_else_is_asked(question, brief, legwright):
    alone = brief({"candidates.use": '["pbte-n"]', "duty.hot_K": "480", "duty.cold_K": "300"}, "alone.toml")
    (row,) = legwright("rank", alone, "--json").json["rows"]
    beside = next(r for r in legwright("rank", question, "--json").json["rows"] if r["candidate"] == "pbte-n")
    assert {**row, "rank": None} == {**beside, "rank": None}


@pytest.mark.parametrize("workers", ["2", "8"])
def test_more_workers_give_the_bytes_of_one(workers, question, legwright):
    one = legwright("rank", question, "--json", "--workers", "1")
    more = legwright("rank", question, "--json", "--workers", workers)
    assert one.code == more.code == 0
    assert one.out == more.out
