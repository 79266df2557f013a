"""Edges of what people type: each is served or refused in one line, never a fault of ours."""

from pathlib import Path

import pytest

from legwright.base.errors import InputError
from legwright.base.units import si_factor
from legwright.candidate.library import load_candidate

EXAMPLES = Path(__file__).parents[2] / "examples"


@pytest.mark.parametrize("unit", ["m**", "(", "1/0"])
def test_unit_that_cannot_be_read_is_refused(unit):
    with pytest.raises(InputError):
        si_factor(unit, "m")


@pytest.mark.parametrize(
    "arguments", [("candidates",), ("candidates", "si-n"), ("rank", EXAMPLES / "kiln-flue.toml")]
)
def test_markdown_has_one_line_a_record(arguments, legwright):
    whole = legwright(*arguments, "--json").json
    serving = [row for row in whole.get("rows", ()) if row["score"]]  # the others are told under the table
    rows = serving or whole.get("values") or whole.get("candidates")
    lines = [x for x in legwright(*arguments, "--markdown").out.splitlines() if x.startswith("|")]
    expected = len(rows) + 2
    if "families" in whole:  # the library's listing: two tables of candidates and one of families
        expected += len(rows) + 2 + len(whole["families"]) + 2
    assert len(lines) == expected


def refused(said, *words):
    assert (said.code, said.out, said.err.count("\n")) == (2, "", 1), said
    assert not [w for w in words if w not in said.err], said.err
    assert "literal[" not in said.err, said.err
    assert "tuple" not in said.err, said.err


def test_candidate_missing_beside_the_brief_names_brief_and_key(legwright, brief, tmp_path):
    refused(
        legwright("rank", brief({"candidates.use": '["mine.toml"]'})),
        "brief.toml",
        "candidates.use",
        str(tmp_path / "mine.toml"),
    )


@pytest.mark.parametrize("text", ['"sige-n"', "[7]", "7"])
def test_use_of_the_wrong_kind(text, legwright, brief):
    refused(legwright("rank", brief({"candidates.use": text})), "brief.toml: candidates.use")


def test_elements_as_text(legwright, brief):
    refused(legwright("rank", brief({"avoid.elements": '"Si"'})), "avoid.elements")


def test_deeply_nested(legwright, tmp_path):
    (tmp_path / "a.toml").write_text("a=" + "[" * 5000 + "]" * 5000)
    refused(legwright("rank", tmp_path / "a.toml"), "a.toml")


def test_byte_order_mark(legwright, brief):
    path = brief()
    path.write_bytes(b"\xef\xbb\xbf" + path.read_bytes())
    assert legwright("rank", path, "--json").code == 0


SHEET = {"--temperature": "300", "--doping": "1e20", "--size": "50"}


@pytest.mark.parametrize(
    ("option", "value"),
    [
        ("--temperature", "1e-5"),
        ("--temperature", "0.9"),
        ("--temperature", "1e5"),
        ("--temperature", "1e300"),
        ("--doping", "1e-300"),
        ("--doping", "1e24"),
        ("--doping", "1e30"),
        ("--size", "1e-300"),
        ("--size", "1e-3"),
        ("--size", "1e300"),
    ],
)
def test_extreme_number_is_served_or_refused_but_no_fault(option, value, legwright):
    said = legwright("sheet", "si-n", *(w for p in {**SHEET, option: value}.items() for w in p), "--json")
    assert said.code in (0, 2), said.err
    if said.code == 2:
        assert said.err.count("\n") == 1


@pytest.mark.parametrize(
    "changes",
    [
        {"duty.cold_K": "1e-9"},
        {"duty.cold_K": "0.5"},
        {"duty.hot_K": "400.0000001"},
        {"size.min_nm": "1e-300"},
        {"leg.length_mm": "1e-300"},
        {"size.max_nm": "1e300"},
    ],
)
def test_extreme_brief(changes, legwright, brief):
    said = legwright("rank", brief(changes), "--json")
    assert said.code in (0, 2, 3), said.err


def test_edited_candidate_is_read_again(tmp_path):
    demo = EXAMPLES / "candidates"
    (tmp_path / "sources.bib").write_bytes((demo / "sources.bib").read_bytes())
    text = (demo / "sige10-n.toml").read_text()
    (tmp_path / "m.toml").write_text(text)
    load_candidate(tmp_path / "m.toml")
    (tmp_path / "m.toml").write_text(text.replace("(invented demo data)", "(edited)"))
    assert "edited" in load_candidate(tmp_path / "m.toml").data.title


def test_bare_command_is_one_line_or_help(legwright):
    said = legwright()
    assert said.code in (0, 2)
    assert not said.err.startswith("legwright: Usage")


def test_empty_file_names(legwright, monkeypatch, tmp_path):
    monkeypatch.chdir(tmp_path)
    refused(legwright("candidates", "--csv", ""), "--csv")


def test_citation_is_plain_text(legwright):
    assert not [
        t
        for t in legwright("candidates", "bisbte-p", "--json").json["sources"].values()
        if "{" in t or "--" in t or "\\" in t
    ]


def test_size_and_window_stay_inside_the_brief(legwright, brief):
    (row,) = legwright("rank", brief({"size.min_nm": "20", "size.max_nm": "5000"}), "--json").json["rows"]
    low, high = row["window_nm"]
    assert 20 <= low <= row["size_nm"] <= high <= 5000


def test_no_brief_size_can_be_made_is_flagged(legwright, brief):
    (row,) = legwright(
        "rank", brief({"candidates.use": '["si-n"]', "size.min_nm": "1", "size.max_nm": "3"}), "--json"
    ).json["rows"]
    assert "below-smallest-makeable-size" in row["flags"]
