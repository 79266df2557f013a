"""How a table looks: weightiest columns first, decimals in line, no row ever folded, plain where the screen is."""

from __future__ import annotations

import codecs
import math
import os
import re
import sys
import unicodedata
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from rich import box
from rich.cells import cell_len, set_cell_size
from rich.console import Console, ConsoleOptions, RenderResult
from rich.table import Table
from rich.text import Text

#: columns off a terminal where nothing says how wide the page is; Markdown rows must not fold at all
_OFF_TERMINAL, _UNFOLDED = 120, 100_000
#: what rich's plain box puts around each cell, and a text column is not cut below this
_GAP, _LEAST_TEXT = 2, 12


def console(markdown: bool) -> Console:
    """A console on stdout, as wide as the screen, COLUMNS or 120 characters; without colour off a terminal."""
    _plain_where_needed()
    if markdown:
        return Console(highlight=False, width=_UNFOLDED, no_color=True, soft_wrap=True)
    out = Console(highlight=False)
    if out.is_terminal or os.environ.get("COLUMNS", "").isdigit():
        return out
    return Console(highlight=False, width=_OFF_TERMINAL, no_color=True)


@dataclass(frozen=True)
class Layout:
    """A titled table that fits whatever width it is printed in.

    Columns that do not fit beside the others go into a table of their own below, with the first column again; a
    text wider than the page is cut, with a mark.
    """

    title: str
    columns: Sequence[str]
    rows: Sequence[Sequence[str]]
    markdown: bool

    def __rich_console__(self, console: Console, options: ConsoleOptions) -> RenderResult:
        columns = [_aligned([row[i] for row in self.rows]) for i in range(len(self.columns))]
        if self.markdown:
            yield self._table(range(len(columns)), columns, _UNFOLDED)
            return
        widths = [
            max(cell_len(name), *map(cell_len, cells), 0) if cells else cell_len(name)
            for name, cells in zip(self.columns, columns, strict=True)
        ]
        yield Text(_cut(self.title, options.max_width), "bold")
        for chosen in _stacked(widths, options.max_width):
            yield self._table(chosen, columns, options.max_width)
            yield Text()

    def _table(self, chosen: Iterable[int], columns: Sequence[Sequence[str]], width: int) -> Table:
        if self.markdown:
            table = Table(box=box.MARKDOWN)
        else:
            table = Table(box=box.SIMPLE_HEAD, show_edge=False, pad_edge=False, padding=(0, 1, 0, 0))
        cells = []
        left = width
        for place, index in enumerate(chosen):
            name = self.columns[index]
            room = max(left - _GAP * (place > 0), _LEAST_TEXT)
            words = [_cut(text, room) for text in columns[index]]
            left -= max((cell_len(word) for word in [*words, name]), default=0) + _GAP * (place > 0)
            header = Text(_cut(name, room))
            if index and any(re.match(r"[×+−-]?\d", word) for word in words):
                widest = max(map(cell_len, [*words, header.plain]))
                words = [" " * (widest - cell_len(word)) + word for word in words]  # rich would strip what aligns
                header = Text(" " * (widest - cell_len(header.plain)) + header.plain)
            table.add_column(header, no_wrap=True)
            cells.append(words)
        for row in zip(*cells, strict=True):
            table.add_row(*(Text(word, justify="left") for word in row))
        return table


def draw(title: str, columns: Sequence[str], rows: Iterable[Sequence[str]], markdown: bool) -> Layout:
    """A table whose first column names the row; the others in order of weight."""
    return Layout(title, tuple(columns), [tuple(row) for row in rows], markdown)


def _stacked(widths: Sequence[int], page: int) -> list[list[int]]:
    """Columns of each table, so that none is wider than the page; the first column stands in each."""
    tables, used = [[0]], widths[0]
    for index, width in enumerate(widths[1:], start=1):
        if used + _GAP + width > page and len(tables[-1]) > 1:
            tables.append([0])
            used = widths[0]
        tables[-1].append(index)
        used += _GAP + width
    return tables


def _cut(text: str, width: int) -> str:
    return text if cell_len(text) <= width else set_cell_size(text, width - 1) + "…"


_NUMBER = re.compile(r"(\D?)(-?\d+)(\.\d*)?(e[+-]\d+)?( %)?")


def _aligned(cells: Sequence[str]) -> list[str]:
    """Numbers with their points under each other; a column of anything else as it stands."""
    found = [_NUMBER.fullmatch(cell) for cell in cells]
    plain = [match for match in found if match and not match[4]]
    if not plain or any(match is None and cell not in ("", "–") for match, cell in zip(found, cells, strict=True)):
        return list(cells)
    behind = max(len(match[3] or "") for match in plain)
    return [
        cell
        if match is None or match[4]
        else f"{match[1]}{match[2]}{(match[3] or '').ljust(behind)}{match[5] or ''}"
        for cell, match in zip(cells, found, strict=True)
    ]


def figure(value: float | None, digits: int = 3) -> str:
    """A rounded figure without trailing noise; a dash for none.

    >>> figure(0.123456), figure(148.3), figure(None), figure(2.2e20)
    ('0.123', '148', '–', '2.20e+20')
    """
    if value is None:
        return "–"
    if value and not 1e-3 <= abs(value) < 1e5:
        return f"{value:.{digits - 1}e}"
    return f"{value:.{digits}g}" if abs(value) < 10**digits else f"{value:.0f}"


def figure_within(value: float, low: float, high: float) -> str:
    """A figure no finer than its interval: to the first digit of half its width, to the second where that is a 1.

    >>> figure_within(0.05134, 0.031, 0.079), figure_within(0.05134, 0.049, 0.052), figure_within(61.7, 55, 70)
    ('0.05', '0.0513', '62')
    """
    half = 0.5 * (high - low)
    if not half > 0:
        return figure(value)
    place = math.floor(math.log10(half))
    place -= int(half / 10.0**place) == 1
    return f"{round(value, -place):.{max(-place, 0)}f}"


def span(ends: Sequence[float] | None, digits: int = 3) -> str:
    """An interval; a dash for none."""
    return "–" if ends is None else f"{figure(ends[0], digits)} … {figure(ends[1], digits)}"


def percent(share: float) -> str:
    """A share in whole per cent."""
    return f"{100 * share:.0f} %"


#: one plain character for each that a narrow screen may lack, so that columns stay in line
_PLAIN = str.maketrans(
    "…–—×±·µμΔδκλσρηθωΓΛγαβτχ≤≥≈→√∞°Ååöäüéíñ⁻⁺⁰¹²³⁴⁵⁶⁷⁸⁹₀₁₂₃₄₅₆₇₈₉",
    "~--x~.uuDdklsrhtwGLgabtx<>~>v@oAaoauein-+01234567890123456789",
)


def _plain(error: UnicodeError) -> tuple[str, int]:
    assert isinstance(error, UnicodeEncodeError)
    text = error.object[error.start : error.end].translate(_PLAIN)
    known = "".join(
        unicodedata.normalize("NFKD", each).encode("ascii", "ignore").decode()[:1] or "?" for each in text
    )
    return known, error.end


def _plain_where_needed() -> None:
    """What stdout's encoding lacks is said in plain characters."""
    codecs.register_error("plain", _plain)
    reconfigure = getattr(sys.stdout, "reconfigure", None)
    if reconfigure is not None and not (sys.stdout.encoding or "").lower().startswith("utf"):
        reconfigure(errors="plain")
