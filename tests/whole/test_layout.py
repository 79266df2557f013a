"""Tables as they stand on screens of several widths, drawn from kept records so that no physics moves them.

Run as a script to draw the golden files anew from the records; with `--anew` the records come from the verbs again,
cut to the rows that show the layout. Then look.
"""

from __future__ import annotations

import io
import json
import re
import sys
from functools import partial
from pathlib import Path

import pytest

from legwright.base.flags import MEANINGS
from legwright.candidate.hazards import ELEMENTS, PROCESS
from legwright.show import tables
from legwright.show.cli import run
from legwright.show.layout import Column, Screen, intervals, numbers, scores
from legwright.show.plain import encodes, plain

GOLDEN = Path(__file__).with_name("golden")
EXAMPLES = Path(__file__).resolve().parents[2] / "examples"
KILN = str(EXAMPLES / "kiln-flue.toml")
POINT = ("--temperature", "700", "--doping", "1e20")
WIDTHS = (80, 120)

#: what draws a record, and the command that made it
TABLES = {
    "rank": (tables.rank, ("rank", KILN)),
    "rank-draws": (partial(tables.rank, trade_offs=True), ("rank", KILN, "--draws", "64")),
    "peak": (partial(tables.peak, best_doping=True), ("peak", "sige-n", "--temperature", "700")),
    "sheet": (tables.sheet, ("sheet", "sige-n", *POINT, "--size", "50")),
    "why": (tables.why, ("why", "sige-n", *POINT, "--size", "50")),
    "search": (tables.search, ("search", "sige-n", KILN)),
    "leg": (tables.leg, ("leg", "sige-n", KILN)),
    "couple": (tables.leg, ("leg", "pbte-p", KILN, "--then", "bisbte-p", "--partner", "pbte-n")),
    "measure": (tables.measure, ("measure", KILN, "--draws", "64")),
    "fit": (tables.fit, ("fit", str(GOLDEN / "own.csv"), "--like", "mg2sisn-n")),
    "audit": (tables.audit, ("audit",)),
    "candidates": (tables.library, ("candidates",)),
    "candidate": (tables.one_candidate, ("candidates", "mgagsb-p")),
}


def drawn(name: str, width: int, encoding: str = "utf-8", **options: object) -> str:
    """What a pipe of that width and encoding gets of a kept record."""
    page = io.TextIOWrapper(io.BytesIO(), encoding=encoding, newline="\n")
    record = json.loads((GOLDEN / f"{name}.json").read_text(encoding="utf-8"))
    TABLES[name][0](Screen(file=page, width=width, **options), record)
    page.flush()
    return page.buffer.getvalue().decode(encoding)


@pytest.mark.parametrize("width", WIDTHS)
@pytest.mark.parametrize("name", TABLES)
def test_a_table_is_as_it_was_looked_at(name, width):
    assert drawn(name, width) == (GOLDEN / f"{name}-{width}.txt").read_text(encoding="utf-8")


@pytest.mark.parametrize("encoding", ["utf-8", "ascii"])
@pytest.mark.parametrize("name", TABLES)
def test_no_row_is_folded_at_any_width(name, encoding):
    """Every table has as many rows as on an endless screen, and no line is wider than its own."""
    whole = {len(rows) for rows in rows_of(drawn(name, 1000, encoding))}
    for width in (60, *WIDTHS, 200):
        said = drawn(name, width, encoding)
        assert max(map(len, said.splitlines())) <= width
        assert {len(rows) for rows in rows_of(said)} == whole


def rows_of(text: str) -> list[list[str]]:
    """The lines between the rule of each table and the next empty line."""
    found, inside = [], False
    for line in text.splitlines():
        rule = len(line) > 8 and set(line) <= {"─", "-"}
        if rule:
            found.append([])
        elif inside and line:
            found[-1].append(line)
        inside = rule or (inside and bool(line))
    return found


@pytest.mark.parametrize("name", TABLES)
def test_a_screen_without_unicode_gets_words_not_question_marks(name):
    said = drawn(name, 120, "ascii")
    assert said.isascii()
    assert "?" not in said


def test_units_and_signs_have_words_of_our_own():
    assert plain("90 °, 5 … 9 nm, ΔT 40 K, 3 S/cm, 2e19 cm⁻³") == "90 deg, 5 .. 9 nm, dT 40 K, 3 S/cm, 2e19 1/cm3"
    assert plain("10⁻⁸ W Ω/K², µV/K, κ, ±, ×, Zürich") == "1e-8 W ohm/K2, uV/K, kappa, +-, x, Zurich"


@pytest.mark.parametrize("text", [*MEANINGS.values(), *ELEMENTS.values(), *PROCESS])
def test_what_stands_under_tables_can_be_said_in_ascii(text):
    assert "?" not in plain(text)


def test_a_stream_says_what_it_can_show():
    assert encodes(io.StringIO())
    assert not encodes(io.TextIOWrapper(io.BytesIO(), encoding="ascii"))
    assert not encodes(io.TextIOWrapper(io.BytesIO(), encoding="cp1252"))
    assert encodes(io.TextIOWrapper(io.BytesIO(), encoding="utf-16"))


def test_what_does_not_fit_is_named_and_stands_in_markdown():
    narrow = re.sub(r"\s+", " ", drawn("rank", 80))
    (left,) = re.findall(r"Not shown at this width, but on wider screens and in --json: (.*?)\.", narrow)
    wide = drawn("rank", 1000)
    for title in left.split(", "):
        assert title in wide
        assert f"| {title} |" in drawn("rank", 80, markdown=True)


def test_columns_that_matter_most_stay_beside_the_first():
    columns = [Column("name", "name"), *(Column(f"{k} " * 5, "x", matters=k) for k in (3, 1, 4, 2, 0))]
    page = io.StringIO()
    Screen(file=page, width=30).table("T", columns, [{"name": "a", "x": "b"}])
    heads = [line for line in page.getvalue().splitlines() if line.startswith("name")]
    assert [re.findall(r"\d", line)[::5] for line in heads] == [["1", "0"], ["3", "2"]]
    assert "--json: 4 4 4 4 4" in page.getvalue()


def test_a_name_that_would_drive_all_else_out_is_cut_with_a_mark():
    long = "a-candidate-with-a-name-of-more-than-forty-characters"
    page = io.StringIO()
    columns = [Column("name", "name"), Column("one", "x"), Column("two", "x")]
    Screen(file=page, width=40).table("T", columns, [{"name": long, "x": "0123456789"}])
    last = page.getvalue().splitlines()[-1]
    assert last.startswith("a-candidate-wit…")
    assert last.count("0123456789") == 2


@pytest.mark.parametrize(
    ("value", "low", "high", "score", "ends"),
    [
        (0.0513, 0.041, 0.062, "0.05", "0.041 … 0.062"),  # half-width 0.0105
        (0.0513, 0.0505, 0.0524, "0.0513", "0.05050 … 0.05240"),  # half-width 0.00095
        (61.7, 55.0, 70.0, "62", "55.0 … 70.0"),  # half-width 7.5
        (812.0, 700.0, 950.0, "800", "700 … 950"),  # half-width 125
        (2.24e20, 1.87e20, 2.61e20, "2.2e20", "1.87e20 … 2.61e20"),  # half-width 3.7e19
    ],
)
def test_figures_follow_the_uncertainty(value, low, high, score, ends):
    assert scores([(value, low, high)]) == [score]
    assert intervals([(low, high)]) == [ends]


def test_points_stand_under_each_other():
    assert numbers(3)([1.25, 10.04, None, 0.0]) == [" 1.2", "10.0", " –  ", " 0  "]
    assert numbers(3)([0.0996, 0.00822]) == ["0.0996", "0.0082"]
    assert numbers(3)([120.0, 0.00822]) == ["120      ", "  0.00822"], "one that would vanish keeps its figures"


def test_off_a_terminal_the_width_is_columns_or_120(monkeypatch):
    for said, width in (("97", 97), ("", 120), ("wide", 120), ("0", 120), (None, 120)):
        monkeypatch.delenv("COLUMNS", raising=False)
        if said is not None:
            monkeypatch.setenv("COLUMNS", said)
        assert Screen(file=io.StringIO()).console.width == width


def test_styles_are_weight_alone_so_that_light_and_dark_screens_both_show_them(monkeypatch):
    monkeypatch.setenv("FORCE_COLOR", "1")
    monkeypatch.setenv("TERM", "xterm-256color")
    said = drawn("rank", 120)
    assert set(re.findall(r"\x1b\[([\d;]*)m", said)) == {"0", "1", "2"}


def kept(record: dict[str, object]) -> dict[str, object]:
    """A record without what its table does not show, and of long lists the rows that show the layout."""
    rows = record.get("rows")
    if record["verb"] == "rank":
        fronts = {name for names in record["trade_offs"].values() for name in names}
        able = [row for row in rows if row["score"]]
        some = [row for i, row in enumerate(able) if i < 8 or i % 5 == 0 or row["candidate"] in fronts]
        record["rows"] = some + [row for row in rows if not row["score"]][:3]
    elif record["verb"] == "peak":
        del record["curve"]
    elif record["verb"] == "audit":
        record["samples"] = [row for row in record["samples"] if not row["inside"] and not row["fitted"]][::4]
        record["totals"] = record["totals"][::6]
    elif "candidates" in record:
        record["candidates"] = record["candidates"][::4]
    elif "values" in record:
        record["values"] = record["values"][::4]
        used = {value["source"] for value in record["values"]}
        record["sources"] = {key: text for key, text in record["sources"].items() if key in used}
    elif "covariance" in record:
        del record["covariance"]
        record["measurements"] = Path(record["measurements"]).name
    elif "service" in record:
        record["service"]["along"] = {"size_nm": record["service"]["along"]["size_nm"]}
    return record


def main(anew: bool) -> None:
    for name, (_, command) in TABLES.items():
        if anew:
            said, sys.stdout = sys.stdout, io.StringIO()
            run([*command, "--json"])
            said, sys.stdout = sys.stdout.getvalue(), said
            text = json.dumps(kept(json.loads(said)), ensure_ascii=False, indent=1)
            (GOLDEN / f"{name}.json").write_text(text + "\n", encoding="utf-8")
        for width in WIDTHS:
            (GOLDEN / f"{name}-{width}.txt").write_text(drawn(name, width), encoding="utf-8")


if __name__ == "__main__":
    main("--anew" in sys.argv)
