"""The verb `explain`: thin, since who asks has just met an error."""

from __future__ import annotations

import sys
import textwrap
from pathlib import Path
from typing import TYPE_CHECKING

import click
from click.shell_completion import CompletionItem

from legwright.base.errors import REFUSALS, InputError, nearest
from legwright.base.flags import MEANINGS, word
from legwright.show.options import output, publish
from legwright.show.plain import encodes, plain

if TYPE_CHECKING:
    from legwright.show.layout import Screen
    from legwright.show.records import Record

_KNOWN = {
    **{slug: ("flag", text) for slug, text in MEANINGS.items()},
    **{slug: ("refusal", text) for slug, text in REFUSALS.items()},
}


def _begun(_ctx: click.Context, _param: click.Parameter, start: str) -> list[CompletionItem]:
    return [CompletionItem(slug) for slug in _KNOWN if slug.startswith(start)]


@click.command("explain")
@click.argument("slug", required=False, shell_complete=_begun)
@output
def explain_verb(slug: str | None, as_json: bool, csv_file: Path | None, markdown: bool) -> None:
    """What a flag under a table, or the word in brackets behind a refusal, means; all of them without SLUG.

    A flag is known by the word that tables use, too.
    """
    slug = {word(flag): flag for flag in MEANINGS}.get(slug or "", slug)
    if slug is not None and slug not in _KNOWN:
        raise InputError(f"nothing is called '{slug}'; {nearest(slug, _KNOWN)}", slug="unknown-name")
    rows: list[Record] = [
        {"slug": each, "kind": kind, "meaning": text}
        for each, (kind, text) in _KNOWN.items()
        if slug in (None, each)
    ]
    if as_json or csv_file is not None or markdown:
        publish("explain", {"rows": rows}, rows, _told, as_json, csv_file, markdown)
        return
    told = (f"{row['slug']} ({row['kind']}): {row['meaning']}" for row in rows)
    text = "\n".join(textwrap.fill(each, 80, subsequent_indent="  ") for each in told)
    click.echo(text if encodes(sys.stdout) else plain(text))


def _told(out: Screen, content: Record) -> None:
    for row in content["rows"]:
        out.say(f"{row['slug']} ({row['kind']}): {row['meaning']}", len(row["slug"]))
