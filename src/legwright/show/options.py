"""What the verbs share: their number type, their common options, and how a result leaves."""

from __future__ import annotations

import math
import sys
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click
from click.shell_completion import CompletionItem

from legwright.base.errors import InputError, nearest
from legwright.base.flags import MEANINGS

if TYPE_CHECKING:
    from legwright.show.layout import Screen
    from legwright.show.records import Record

    _Number = click.ParamType[float]
    _Text = click.ParamType[str]
else:
    _Number = _Text = click.ParamType


class Positive(_Number):
    """A finite number above zero, and where allowed a word that stands for coarse material."""

    def __init__(self, name: str, bulk: bool = False) -> None:
        self.name = name
        self.bulk = bulk

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> float:
        if isinstance(value, float):
            return value
        if self.bulk and value == "bulk":
            return math.inf
        try:
            number = float(value)
        except ValueError:
            number = math.nan
        if not (math.isfinite(number) and number > 0):
            word = " or the word bulk" if self.bulk else ""
            key = None if param is None else param.opts[0]
            message = f"value '{value}' is not allowed; a finite number above 0{word}"
            raise InputError(message, key=key, slug="out-of-range")
        return number


class Named(_Text):
    """A candidate by library name, family and shares, or path; the shell completes them."""

    name = "candidate"

    def shell_complete(self, ctx: click.Context, param: click.Parameter, incomplete: str) -> list[CompletionItem]:
        from legwright.base.files import datasets_folder

        known = [
            *sorted(path.stem for path in (datasets_folder() / "candidates").glob("*.toml")),
            *sorted(f"{path.stem}:" for path in (datasets_folder() / "families").glob("*.toml")),
        ]
        names = [CompletionItem(name) for name in known if name.startswith(incomplete)]
        return names or [CompletionItem(incomplete, type="file")]


_HUSHED = "legwright.hushed"


def _hush(ctx: click.Context, param: click.Parameter, slugs: tuple[str, ...]) -> None:
    for slug in slugs:
        if slug not in MEANINGS:
            raise InputError(f"no flag '{slug}'; {nearest(slug, MEANINGS)}", key="--hush", slug="unknown-name")
    ctx.meta[_HUSHED] = frozenset(slugs)


def hushed() -> frozenset[str]:
    """Flags whose meaning the user does not want to read again."""
    context = click.get_current_context(silent=True)
    return frozenset() if context is None else context.meta.get(_HUSHED, frozenset())


def output(command: Callable[..., Any]) -> Callable[..., Any]:
    """The options that every verb has."""
    for option in (
        click.option(
            "--hush",
            multiple=True,
            metavar="FLAG",
            envvar="LEGWRIGHT_HUSH",
            expose_value=False,
            callback=_hush,
            help="Do not say under tables what FLAG means; repeatable. The flag itself stays.",
        ),
        click.option("--markdown", is_flag=True, help="Print tables as Markdown."),
        click.option("--csv", "csv_file", type=click.Path(path_type=Path), help="Also write the rows to FILE."),
        click.option("--json", "as_json", is_flag=True, help="Print one JSON object and nothing else."),
    ):
        command = option(command)
    return command


shape_option = click.option("--shape", default="grain", show_default=True, metavar="grain|wire|film")


def publish(
    verb: str,
    content: Record,
    rows: list[Record],
    table: Callable[[Screen, Record], None],
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """Write the rows as CSV if asked for, then print the content: one JSON object, or what `table` makes of it."""
    from legwright.base.files import write_whole
    from legwright.show import records
    from legwright.show.plain import encodes

    if csv_file == Path():
        raise InputError("needs the name of a file", key="--csv")
    if csv_file is not None:
        write_whole(csv_file, records.as_csv(rows))
    if as_json:
        sys.stdout.write(records.as_json(verb, content, ascii_only=not encodes(sys.stdout)))
    else:
        from legwright.show.layout import Screen

        table(Screen(markdown, hushed()), content)
