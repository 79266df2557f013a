"""What cannot serve is said so: score 0, a flag, last place; exit code 3 where nobody can."""

import pytest

NOBODY = {
    "too hot": ({"duty.hot_K": "1600"}, "above-service-temperature"),
    "avoided": ({"avoid.elements": '["Ge"]'}, "avoided-element"),
    "hazardous": ({"avoid.hazardous": "true", "candidates.use": '["sige-n"]'}, "hazardous-element"),
    "costly": ({"avoid.cost_above_USD_per_kg": "100.0"}, "too-costly"),
    "few hands": ({"avoid.supply_concentration_above": "4800.0"}, "supply-too-concentrated"),
    "avoided dopant": ({"avoid.elements": '["P"]'}, "avoided-element"),
    "no such doping": (
        {"doping.min_per_cm3": "1e15", "doping.max_per_cm3": "1e16"},
        "no-doping-range",
    ),
    "a difference that no leg spans": (
        {
            "duty.kind": '"cooler"',
            "duty.maximise": '"cop"',
            "duty.hot_K": "320",
            "duty.cold_K": "150",
        },
        "duty-out-of-reach",
    ),
}


@pytest.mark.parametrize(("changes", "flag"), NOBODY.values(), ids=NOBODY.keys())
def test_nobody_feasible_is_exit_3_with_the_table_still_printed(changes, flag, legwright, brief):
    said = legwright("rank", brief(changes), "--json")
    assert said.code == 3
    assert said.err.count("\n") == 1
    assert "Traceback" not in said.err
    whole = said.json
    (row,) = whole["rows"]
    assert row["score"] == 0
    assert row["flags"] == [flag]
    assert flag in whole["flag_meanings"]
    for key in ("size_nm", "window_nm", "doping_per_cm3", "zt_mean", "zt_peak", "gain_over_bulk"):
        assert row[key] is None


def test_nobody_feasible_prints_the_reason_under_the_table(legwright, brief):
    said = legwright("rank", brief({"duty.hot_K": "1600"}))
    assert said.code == 3
    assert "Test rig: generator leg" in said.out
    assert "Cannot serve, too hot: sige-n." in said.out
    assert "(above-service-temperature): " in said.out


def test_those_who_cannot_serve_stand_last(legwright, brief):
    use = '["bisbte-p", "bitese-n", "si-n", "sige-n"]'  # tellurides first by name, and too hot here
    said = legwright("rank", brief({"candidates.use": use, "candidates.carrier": '"either"'}), "--json")
    assert said.code == 0
    rows = said.json["rows"]
    assert [row["candidate"] for row in rows[2:]] == ["bisbte-p", "bitese-n"]
    assert [row["score"] > 0 for row in rows] == [True, True, False, False]
    assert all(row["flags"] == ["above-service-temperature"] for row in rows[2:])
    assert [row["rank"] for row in rows] == [1, 2, 3, 4]


@pytest.mark.parametrize("temperature", ["1300", "100"])
def test_a_sheet_out_of_range_is_given_with_a_flag(temperature, legwright):
    said = legwright("sheet", "sige-n", "--temperature", temperature, "--doping", "1e20", "--size", "50", "--json")
    assert said.code == 0
    assert "temperature-outside-data" in said.json["flags"]
    assert ("above-service-temperature" in said.json["flags"]) == (temperature == "1300")
