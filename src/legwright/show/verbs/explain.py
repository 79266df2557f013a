"""The verb `explain`."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from legwright.base.errors import REFUSALS, InputError, nearest
from legwright.base.flags import MEANINGS
from legwright.show.options import output, publish

if TYPE_CHECKING:
    from legwright.show.records import Record


@click.command("explain")
@click.argument("slug", required=False)
@output
def explain_verb(slug: str | None, as_json: bool, csv_file: Path | None, markdown: bool) -> None:
    """What a flag under a table, or the word in brackets behind a refusal, means; all of them without SLUG."""
    known = {**{each: ("flag", text) for each, text in MEANINGS.items()}}
    known |= {each: ("refusal", text) for each, text in REFUSALS.items()}
    if slug is not None and slug not in known:
        raise InputError(f"nothing is called '{slug}'; {nearest(slug, known)}", slug="unknown-name")
    rows: list[Record] = [
        {"slug": each, "kind": kind, "meaning": text}
        for each, (kind, text) in known.items()
        if slug in (None, each)
    ]

    def table() -> None:
        from legwright.show import layout

        out = layout.console(markdown)
        for row in rows:
            out.print(f"{row['slug']} ({row['kind']}): {row['meaning']}", markup=False)

    publish("explain", {"rows": rows}, rows, as_json, csv_file, table)
