"""The fit verb, as a user types it."""

from __future__ import annotations

import pytest

GOOD = """sample,temperature [K],hall_density [1/cm^3],resistivity [mohm cm],seebeck [uV/K],\
thermal_conductivity [W/m/K]
A,323,2.1e20,0.52,-95,2.8
A,473,,0.72,-135,2.4
A,673,,1.05,-182,2.2
"""


@pytest.fixture
def data(tmp_path):
    path = tmp_path / "own.csv"
    path.write_text(GOOD, encoding="utf-8")
    return path


def test_a_fit_writes_a_candidate_that_the_other_verbs_take(data, tmp_path, legwright):
    into = tmp_path / "mine-n.toml"
    said = legwright("fit", data, "--like", "mg2sisn-n", "--into", into, "--json")
    assert said.code == 0
    whole = said.json
    assert whole["complete"] is True
    assert {row["quantity"] for row in whole["residuals"]} == {
        "electrical_conductivity",
        "seebeck",
        "thermal_conductivity",
    }
    at = ("--temperature", "473", "--doping", "2.1e20", "--size", "bulk", "--json")
    ours = legwright("sheet", into, *at).json
    plain = legwright("sheet", "mg2sisn-n", *at).json
    assert abs(ours["seebeck_uV_per_K"] + 135) < abs(plain["seebeck_uV_per_K"] + 135) + 2
    assert pytest.approx(ours["electrical_conductivity_S_per_m"], rel=0.1) == 1e5 / 0.72  # laboratory spread 7 %


def test_the_table_says_what_the_data_do_not_decide(data, legwright):
    said = legwright("fit", data, "--like", "mg2sisn-n")
    assert said.code == 0
    assert "These data do not determine: gap" in said.out


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("seebeck [uV/K]", "seebeck [K]", "not a unit that converts"),
        ("-135", "135", "wrong sign"),
        ("A,473", "A,-20", "row 3"),
        ("A,473,,0.72,-135,2.4", "A,473,,,,", "row 3: gives nothing measured"),
        ("A,473,,0.72,-135,2.4", "A,323,2.1e20,0.52,-95,2.8", "row 3: repeats row 2"),
    ],
)
def test_a_malformed_table_is_refused_and_nothing_is_written(old, new, words, data, tmp_path, legwright):
    assert old in GOOD
    data.write_text(GOOD.replace(old, new, 1), encoding="utf-8")
    into = tmp_path / "mine-n.toml"
    said = legwright("fit", data, "--like", "mg2sisn-n", "--into", into)
    assert said.code == 2
    assert words in said.err
    assert said.out == ""
    assert not into.exists()


def test_the_candidate_goes_into_a_toml_file(data, tmp_path, legwright):
    said = legwright("fit", data, "--like", "mg2sisn-n", "--into", tmp_path / "mine.txt")
    assert said.code == 2
    assert "--into" in said.err
