"""Doubt, trade-offs and the scatter of making, as a user asks for them."""

import pytest

THREE = {"candidates.use": '["cosb3-n", "pbte-p", "mg2sisn-n"]', "duty.hot_K": "640", "duty.cold_K": "350"}


def test_trade_offs_stand_in_json_and_in_a_table(brief, legwright):
    path = brief(THREE)
    found = legwright("rank", path, "--json").json
    names = {row["candidate"] for row in found["rows"]}
    assert set(found["trade_offs"]) == {
        "cost_USD_per_kg",
        "supply_concentration",
        "hazardous_elements",
        "largest_size_nm",
    }
    for front in found["trade_offs"].values():
        assert front[0] == found["rows"][0]["candidate"]
        assert set(front) <= names
    for row in found["rows"]:
        assert row["cost_USD_per_kg"] > 0
        assert 0 < row["supply_concentration"] <= 10_000
        assert isinstance(row["hazardous_elements"], list)
    assert "Trade-offs" not in legwright("rank", path).out
    assert "Trade-offs" in legwright("rank", path, "--trade-offs").out


def test_doubt_has_a_table_of_its_own(brief, legwright):
    said = legwright("rank", brief(THREE), "--draws", "16", "--markdown").out
    assert "in first three" in said
    assert "tied with" in said


def test_legs_as_they_are_made_score_less_than_as_designed(brief, legwright):
    plain = legwright("rank", brief(THREE), "--json").json["rows"]
    made = legwright("rank", brief({**THREE, "making.doping_scatter": "1.3"}, "made.toml"), "--json").json["rows"]
    by_name = {row["candidate"]: row for row in plain}
    for row in made:
        best = by_name[row["candidate"]]
        assert best["score"] == best["score_as_designed"]
        assert row["score"] < row["score_as_designed"] <= best["score"] * (1 + 1e-6)
    assert [row["score"] for row in made] == sorted((row["score"] for row in made), reverse=True)


@pytest.mark.parametrize("command", [("measure",), ("rank", "--draws", "16")])
def test_more_workers_give_the_same_bytes(command, brief, legwright):
    verb, *options = command
    path = brief(THREE)
    one, two = (legwright(verb, path, *options, "--workers", n, "--json") for n in ("1", "2"))
    assert one.code == two.code == 0
    assert one.out == two.out
    turned = brief({**THREE, "candidates.use": '["pbte-p", "mg2sisn-n", "cosb3-n"]'}, "turned.toml")
    assert legwright(verb, turned, *options, "--json").out == one.out


@pytest.mark.parametrize(
    ("key", "text", "said"),
    [
        ("making.size_scatter", "0.8", "size_scatter"),
        ("making.doping_scatter", "1.0", "above 1"),
        ("making.maximise", '"median"', "maximise"),
        ("making.size_spread", "1.3", "size_scatter"),
    ],
)
def test_scatter_that_makes_no_sense_is_refused(key, text, said, brief, legwright):
    answer = legwright("rank", brief({key: text}))
    assert answer.code == 2
    assert answer.out == ""
    assert said in answer.err
