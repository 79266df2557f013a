"""`draw` as a user calls it: a file, words, data; and what it refuses."""

import csv
import xml.etree.ElementTree as ET

import pytest

from legwright.show.verbs.draw import KINDS

OF_A_CANDIDATE = [kind for kind in KINDS if kind not in ("ranking", "temperature")]


@pytest.mark.parametrize("kind", OF_A_CANDIDATE)
@pytest.mark.parametrize("aim", ["temperature", "brief"])
def test_a_candidate_is_drawn(kind, aim, legwright, brief, tmp_path):
    into = tmp_path / "figure.svg"
    value = "800" if aim == "temperature" else brief()
    design = () if aim == "brief" or kind in ("size", "map") else ("--doping", "1e20", "--size", "50")
    rows = tmp_path / "rows.csv"
    said = legwright("draw", kind, "sige-n", f"--{aim}", value, *design, "--into", into, "--json", "--csv", rows)
    assert said.code == 0, said.err
    whole = said.json
    assert whole["kind"] == kind
    assert whole["candidate"] == "sige-n"
    root = ET.parse(into).getroot()
    assert root[0].text == whole["title"]
    assert root[1].text == whole["says"]
    with rows.open(encoding="utf-8") as stream:
        assert len(list(csv.DictReader(stream))) > 3


@pytest.mark.parametrize(
    "design", [(), ("--doping", "1e20", "--size", "bulk"), ("--doping", "1e20", "--size", "20", "--shape", "wire")]
)
def test_bulk_data_are_drawn_with_and_without_a_design(design, legwright, tmp_path):
    into = tmp_path / "figure.png"
    said = legwright("draw", "temperature", "si-n", *design, "--into", into)
    assert said.code == 0, said.err
    assert into.read_bytes().startswith(b"\x89PNG")
    assert "fixed the candidate" in said.out


def test_a_ranking_is_drawn(legwright, brief, tmp_path):
    into = tmp_path / "figure.svg"
    said = legwright("draw", "ranking", brief(), "--draws", "16", "--into", into)
    assert said.code == 0, said.err
    assert "sige-n" in said.out
    assert "sige-n" in into.read_text(encoding="utf-8")


def test_a_member_of_a_family_is_drawn(legwright, brief, tmp_path):
    for kind in ("temperature", "sensitivity"):
        into = tmp_path / f"{kind}.svg"
        said = legwright("draw", kind, "si-ge-n:0.3", "--brief", brief(), "--into", into, "--json")
        assert said.code == 0, said.err
        assert into.is_file()
    assert any("anchor" in row["name"] for row in said.json["leans"])


@pytest.mark.parametrize(
    ("arguments", "named"),
    [
        (["pie", "sige-n", "--temperature", "800"], "no figure 'pie'"),
        (["sise", "sige-n", "--temperature", "800"], "did you mean 'size'?"),
        (["size", "sige-n"], "--temperature or --brief"),
        (["size", "sige-n", "--temperature", "800", "--size", "20"], "--size"),
        (["temperature", "sige-n", "--temperature", "800"], "--temperature"),
        (["temperature", "sige-n", "--doping", "1e20"], "--size"),
        (["temperature", "si-ge-n:0.31"], "si-ge-n:0.31"),
        (["map", "no-such-n", "--temperature", "800"], "no-such-n"),
        (["ranking", "{brief}", "--temperature", "800"], "ranking"),
        (["ranking", "{hot}"], "serve"),
    ],
)
def test_what_cannot_be_drawn_is_refused(arguments, named, legwright, brief, tmp_path):
    places = {"brief": brief(), "hot": brief({"duty.hot_K": "2000"}, "hot.toml")}
    into = tmp_path / "figure.svg"
    said = legwright("draw", *(argument.format(**places) for argument in arguments), "--into", into)
    assert said.code in (2, 3)
    assert said.out == ""
    assert named in said.err
    assert not into.exists()


@pytest.mark.parametrize("name", ["figure.jpg", "figure", "no/figure.svg"])
def test_a_file_that_cannot_be_is_refused(name, legwright, tmp_path):
    said = legwright("draw", "paths", "si-n", "--temperature", "300", "--into", tmp_path / name)
    assert said.code == 2
    assert name in said.err
    assert said.out == ""


def test_a_figure_needs_its_file(legwright):
    said = legwright("draw", "size", "si-n", "--temperature", "300")
    assert said.code == 2
    assert "--into" in said.err
