"""Tables as they stand on pages of several widths. Run as a script to write the golden files anew; then look."""

from __future__ import annotations

import io
import sys
from pathlib import Path

import pytest

from legwright.show import layout
from legwright.show.cli import run

GOLDEN = Path(__file__).with_name("golden")
EXAMPLES = Path(__file__).resolve().parents[2] / "examples"
FURNACE = str(EXAMPLES / "enamel-furnace.toml")
POINT = ("--temperature", "900", "--doping", "2e20")
VERBS = {
    "rank": ("rank", FURNACE),
    "rank-draws": ("rank", FURNACE, "--draws", "64"),
    "peak": ("peak", "sige-n", "--temperature", "900"),
    "sheet": ("sheet", "sige-n", *POINT, "--size", "50"),
    "why": ("why", "sige-n", *POINT, "--size", "50"),
    "leg": ("leg", "sige-n", FURNACE, "--doping", "2e20", "--size", "100"),
    "candidates": ("candidates",),
    "candidate": ("candidates", "mgagsb-p"),
}


def printed(arguments: tuple[str, ...], width: int, encoding: str = "utf-8") -> str:
    """What a pipe gets on a page of that width."""
    page = io.TextIOWrapper(io.BytesIO(), encoding=encoding, newline="\n")
    with pytest.MonkeyPatch.context() as patch:
        patch.setenv("COLUMNS", str(width))
        patch.setattr(sys, "stdout", page)
        assert run(list(arguments)) == 0
    page.flush()
    return page.buffer.getvalue().decode(encoding)


@pytest.mark.parametrize("width", [80, 120])
@pytest.mark.parametrize("verb", VERBS)
def test_a_table_is_as_it_was_looked_at(verb, width):
    assert printed(VERBS[verb], width) == (GOLDEN / f"{verb}-{width}.txt").read_text(encoding="utf-8")


@pytest.mark.parametrize("verb", VERBS)
@pytest.mark.parametrize("encoding", ["utf-8", "ascii"])
def test_no_line_is_wider_than_the_page_and_no_row_is_folded(verb, encoding):
    """A narrower page may hold more tables, but each table has as many rows as on a wide one."""
    wide = printed(VERBS[verb], 200, encoding)
    for width in (80, 120, 200):
        said = printed(VERBS[verb], width, encoding)
        assert max(map(len, said.splitlines())) <= width
        assert {len(table) for table in tables(said)} <= {len(table) for table in tables(wide)}
        assert encoding == "utf-8" or said.isascii()


def tables(text: str) -> list[list[str]]:
    """Rows of each table: what stands between its rule and the next empty line."""
    found: list[list[str]] = []
    inside = False
    for line in text.splitlines():
        if len(line) > 5 and set(line) <= set("─-+"):
            found.append([])
            inside = True
        elif not line.strip():
            inside = False
        elif inside:
            found[-1].append(line)
    return found


def test_a_narrow_page_stacks_the_columns_and_repeats_the_first():
    table = layout.draw(
        "T", ("name", "aaaaaaaaaa", "bbbbbbbbbb"), [("x", "1.5", "10.25"), ("y", "20", "3.5")], False
    )
    out = layout.Console(width=18, no_color=True)
    with out.capture() as seen:
        out.print(table)
    lines = [line.rstrip() for line in seen.get().splitlines()]
    assert lines == [
        "T", "name  aaaaaaaaaa", "────────────────", "x            1.5", "y           20",
        "", "name  bbbbbbbbbb", "────────────────", "x          10.25", "y           3.5", "",
    ]  # fmt: skip


def test_a_text_wider_than_the_page_is_cut_with_a_mark():
    out = layout.Console(width=20, no_color=True)
    with out.capture() as seen:
        out.print(layout.draw("", ("k", "words"), [("a", "one two three four five")], False))
    assert seen.get().strip().endswith("…")


if __name__ == "__main__":
    GOLDEN.mkdir(exist_ok=True)
    for each, arguments in VERBS.items():
        for page in (80, 120):
            (GOLDEN / f"{each}-{page}.txt").write_text(printed(arguments, page), encoding="utf-8")
