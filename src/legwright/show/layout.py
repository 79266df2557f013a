"""How a table stands on a screen: the most important columns first, figures under their points, no folded row.

A table is a list of columns and a list of records. A column names its title, unit, key and how its values are
written; one whose key no record has is left out. What does not fit beside the rest stands in a second table with
the same first column, and what does not fit there either is named under it.
"""

from __future__ import annotations

import math
import os
import textwrap
from collections.abc import Callable, Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import IO, Any

from rich.cells import cell_len, set_cell_size
from rich.console import Console
from rich.text import Text

from legwright.show.plain import encodes, plain

Record = Mapping[str, Any]
Show = Callable[[Sequence[Any]], list[str]]

#: columns of a screen that nobody named, and of prose that is still read with ease
OFF_TERMINAL, READABLE = 120, 100
NONE, CUT, GAP = "–", "…", "  "
#: tables that stand over each other; what matters so little opens none
_STACKED, SPARE = 2, 4


def figure(value: float | None, figures: int = 3) -> str:
    """A value to so many significant figures; a dash for none.

    >>> figure(0.123456), figure(148.3), figure(36786.0, 2), figure(None), figure(2.2e20), figure(0.0)
    ('0.123', '148', '37000', '–', '2.20e20', '0')
    """
    if value is None:
        return NONE
    if not value or not math.isfinite(value):
        return f"{value:g}"
    mantissa, exponent = f"{value:.{figures - 1}e}".split("e")
    power = int(exponent)
    if not -4 < power < 5:
        return f"{mantissa}e{power}"
    return f"{float(f'{mantissa}e{power}'):.{max(figures - 1 - power, 0)}f}"


def span(ends: Sequence[float | None] | None, figures: int = 3) -> str:
    """An interval in a sentence.

    >>> span((15.0, 21.234), 2)
    '15 … 21'
    """
    return NONE if ends is None else " … ".join(figure(end, figures) for end in ends)


def decimals_of(half_width: float) -> int:
    """Decimals that end at the first figure of an uncertainty.

    >>> decimals_of(0.0105), decimals_of(0.0095), decimals_of(30.0)
    (2, 3, -1)
    """
    return -math.floor(math.log10(half_width))


def _to(value: float, decimals: int) -> str:
    if value and not 1e-3 <= abs(value) < 1e5:
        return figure(value, max(decimals - decimals_of(abs(value)) + 1, 1))
    return f"{round(value, decimals):.{max(decimals, 0)}f}"


def on_point(texts: Iterable[str]) -> list[str]:
    """The same texts padded so that their decimal points stand in one column.

    >>> on_point(["1.25", "10", "–"])
    [' 1.25', '10   ', ' –   ']
    """
    parts = [text.partition(".") for text in texts]
    left = max((len(whole) for whole, _, _ in parts), default=0)
    right = max((len(point + rest) for _, point, rest in parts), default=0)
    return [whole.rjust(left) + (point + rest).ljust(right) for whole, point, rest in parts]


def words(values: Sequence[Any]) -> list[str]:
    """Texts, and lists of texts, as they are."""
    return [
        NONE if v is None else ", ".join(map(str, v)) if isinstance(v, list | tuple) else str(v) for v in values
    ]


def counts(values: Sequence[int]) -> list[str]:
    """Whole numbers, every digit."""
    return on_point(map(str, values))


def given(values: Sequence[float]) -> list[str]:
    """Values as a file gave them."""
    return on_point(f"{value:g}".replace("e-0", "e-").replace("e+", "e") for value in values)


def figures(count: int = 3) -> Show:
    """Each value to so many figures of its own."""
    return lambda values: on_point(figure(value, count) for value in values)


def numbers(count: int = 3) -> Show:
    """All values to the same decimals, those that give the largest so many figures; each its own where that hides
    one."""

    def show(values: Sequence[float | None]) -> list[str]:
        sizes = [abs(value) for value in values if value]
        if not sizes:
            return figures(count)(values)
        decimals = decimals_of(max(sizes)) + count - 1
        if not 1e-3 <= max(sizes) < 1e5 or decimals < 0 or min(sizes) < 0.5 * 10.0**-decimals:
            return figures(count)(values)
        return on_point(NONE if value is None else _to(value, decimals) if value else "0" for value in values)

    return show


def shares(decimals: int = 0) -> Show:
    """Shares in per cent; the column's unit says so."""
    return lambda values: on_point(NONE if value is None else f"{100 * value:.{decimals}f}" for value in values)


def spans(count: int = 3) -> Show:
    """Intervals, their marks under each other."""
    return _both(lambda value: (figure(value[0], count), figure(value[1], count)))


def scores(values: Sequence[tuple[float, float | None, float | None]]) -> list[str]:
    """Values with the ends of their intervals, to the first figure of half the interval; three figures without."""
    if all(low is None or high is None or low >= high for _, low, high in values):
        return numbers(3)([value for value, _, _ in values])
    return on_point(
        figure(value, 2)
        if low is None or high is None or low >= high
        else _to(value, decimals_of((high - low) / 2))
        for value, low, high in values
    )


def _ends(value: tuple[float | None, float | None]) -> tuple[str, str]:
    low, high = value
    if low is None or high is None or low >= high:
        return figure(low, 2), figure(high, 2)
    decimals = decimals_of((high - low) / 2) + 1
    return _to(low, decimals), _to(high, decimals)


def _both(texts: Callable[[Any], tuple[str, str]]) -> Show:
    def show(values: Sequence[Any]) -> list[str]:
        known = [None if value is None or None in value else texts(value) for value in values]
        left = max((len(ends[0]) for ends in known if ends), default=1)
        right = max((len(ends[1]) for ends in known if ends), default=0)
        none = NONE.rjust(left) + " " * (right + 3 * (right > 0))
        return [f"{ends[0]:>{left}} … {ends[1]:<{right}}" if ends else none for ends in known]

    return show


#: intervals of scores, one figure finer than the score
intervals: Show = _both(_ends)


@dataclass(frozen=True)
class Column:
    """What a column says, and how much it matters: 0 first, SPARE least; equals as they are listed.

    `least`: characters to which a long text may be cut, with a mark; 0: never.
    """

    title: str
    value: str | Callable[[Record], Any]
    unit: str = ""
    show: Show = words
    matters: int = 0
    least: int = 0

    def texts(self, rows: Sequence[Record]) -> list[str]:
        """The cells, each as wide as the widest."""
        value = self.value
        found = [row.get(value) if isinstance(value, str) else value(row) for row in rows]
        return self.show(found)

    @property
    def known(self) -> str:
        """Title and unit on one line."""
        return f"{self.title} [{self.unit}]" if self.unit else self.title

    def is_in(self, rows: Sequence[Record]) -> bool:
        """Whether any record has it."""
        return not isinstance(self.value, str) or any(self.value in row for row in rows)


@dataclass
class _Block:
    """A column in text: the head's lines, the cells, and how wide it must and may be."""

    column: Column
    head: list[str]
    cells: list[str]

    @property
    def widest(self) -> int:
        return max(map(cell_len, [*self.head, *self.cells]))

    @property
    def narrowest(self) -> int:
        return (
            min(self.widest, max(self.column.least, *map(cell_len, self.head)))
            if self.column.least
            else self.widest
        )

    def line(self, text: str, width: int, cut: str) -> str:
        if cell_len(text) > width:
            return set_cell_size(text, width - len(cut)) + cut
        return set_cell_size(text, width) if self.column.show is words else " " * (width - cell_len(text)) + text


class Screen:
    """Where tables and sentences go: stdout as it is, or Markdown."""

    def __init__(
        self,
        markdown: bool = False,
        hushed: Collection[str] = (),
        file: IO[str] | None = None,
        width: int | None = None,
    ) -> None:
        console = Console(highlight=False, file=file, width=width, soft_wrap=markdown)
        if width is None and not console.is_terminal:
            columns = os.environ.get("COLUMNS", "")
            console.width = int(columns) if columns.isdecimal() and int(columns) else OFF_TERMINAL
        self.console, self.markdown, self.hushed = console, markdown, hushed
        self._plain, self._begun = not encodes(console.file), False

    def text(self, text: str) -> str:
        """What this screen can show of a text."""
        return plain(text) if self._plain else text

    def table(self, title: str, columns: Sequence[Column], rows: Sequence[Record], keys: int = 1) -> None:
        """The rows under a title; nothing where there are none. The first `keys` columns tell rows apart."""
        if not rows:
            return
        blocks = [self._block(column, rows) for column in columns if column.is_in(rows)]
        self.gap()
        if self.markdown:
            self.say(title, len(title))
            self._markdown(blocks)
            return
        self.say(title, len(title))
        first, rest = blocks[:keys], blocks[keys:]
        for place in range(_STACKED):
            if place:
                self.gap()
            chosen = _fitting(first, rest, self.console.width)
            self._draw([*first, *chosen], keys)
            rest = [block for block in rest if block not in chosen]
            if all(block.column.matters >= SPARE for block in rest):
                break
        if rest:
            left = ", ".join(block.column.title.replace("\n", " ") for block in rest)
            self.gap()
            self.say(f"Not shown at this width, but on wider screens and in --json: {left}.")

    def pairs(self, title: str, rows: Iterable[tuple[str, str, str]]) -> None:
        """What, how much, in which unit."""
        lines = [{"what": f"{what} [{unit}]" if unit else what, "value": value} for what, value, unit in rows]
        self.table(title, [Column("property", "what"), Column("value", "value", show=on_point)], lines)

    def say(self, text: str, bold: int = 0) -> None:
        """A paragraph, wrapped where it stays readable; so many of its characters bold."""
        head, rest = self.text(text[:bold]), self.text(text[bold:])
        if self.markdown:
            self._print(f"**{head}**{rest}\n" if head else f"{rest}\n")
            return
        width, indent = min(self.console.width, READABLE), "  " if head and rest else ""
        lines = textwrap.wrap(head + rest, width, subsequent_indent=indent, break_on_hyphens=False)
        self._print(_bold("\n".join(lines), len(head)))

    def gap(self) -> None:
        """An empty line, but not at the top."""
        if self._begun:
            self.console.print()

    def _print(self, text: str | Text) -> None:
        self._begun = True
        self.console.print(text, markup=False, no_wrap=True, overflow="ignore", crop=False)

    def _block(self, column: Column, rows: Sequence[Record]) -> _Block:
        *above, last = column.title.split("\n")
        unit = [f"[{column.unit}]"] if column.unit else []
        head = [*above, " ".join([last, *unit])] if above else [last, *unit]
        return _Block(column, [*map(self.text, head)], [*map(self.text, column.texts(rows))])

    def _draw(self, blocks: Sequence[_Block], keys: int) -> None:
        widths = _widths(blocks, keys, self.console.width)
        height, cut = max(len(block.head) for block in blocks), self.text(CUT)

        def line(texts: Iterable[str]) -> str:
            cells = zip(blocks, texts, widths, strict=True)
            return GAP.join(block.line(text, width, cut) for block, text, width in cells).rstrip()

        heads = [[""] * (height - len(block.head)) + block.head for block in blocks]
        for texts in zip(*heads, strict=True):
            self._print(_bold(line(texts)))
        self._print(Text(self.text("─") * (sum(widths) + len(GAP) * (len(widths) - 1)), "dim"))
        for texts in zip(*(block.cells for block in blocks), strict=True):
            self._print(Text(line(texts)))

    def _markdown(self, blocks: Sequence[_Block]) -> None:
        def line(texts: Iterable[str]) -> str:
            return f"| {' | '.join(' '.join(text.split()).replace('|', chr(92) + '|') for text in texts)} |"

        self._print(line(self.text(block.column.known.replace("\n", " ")) for block in blocks))
        self._print("|" + "|".join(":--" if block.column.show is words else "--:" for block in blocks) + "|")
        for texts in zip(*(block.cells for block in blocks), strict=True):
            self._print(line(texts))


def _bold(text: str, end: int | None = None) -> Text:
    shown = Text(text)
    shown.stylize("bold", 0, end)
    return shown


def _fitting(first: Sequence[_Block], rest: Sequence[_Block], room: int) -> list[_Block]:
    """Of the rest, the most important that fit beside the first, in their listed order."""
    free = room + len(GAP) - sum(_keys_widths(first, rest, room)) - len(GAP) * len(first)
    chosen: list[_Block] = []
    for block in sorted(rest, key=lambda one: one.column.matters):
        if block.narrowest + len(GAP) <= free:
            free -= block.narrowest + len(GAP)
            chosen.append(block)
    return [block for block in rest if block in chosen]


def _keys_widths(keys: Sequence[_Block], rest: Sequence[_Block], room: int) -> list[int]:
    """All of the first columns, unless the very first is so long that it would drive the others out."""
    widths = [block.widest for block in keys]
    if sum(widths) + sum(block.narrowest for block in rest) + len(GAP) * (len(keys) + len(rest) - 1) > room:
        widths[0] = min(widths[0], 2 * room // 5)
    return widths


def _widths(blocks: Sequence[_Block], keys: int, room: int) -> list[int]:
    """Each as wide as it must be; those that were cut share what is left, from the first on."""
    widths = _keys_widths(blocks[:keys], blocks[keys:], room) + [block.narrowest for block in blocks[keys:]]
    free = room - sum(widths) - len(GAP) * (len(blocks) - 1)
    for index, block in enumerate(blocks):
        more = min(free, block.widest - widths[index])
        widths[index] += more
        free -= more
    return widths
