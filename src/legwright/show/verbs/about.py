"""The verb `about`."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from legwright.show.options import output, publish

if TYPE_CHECKING:
    from legwright.show.records import Record


@click.command("about")
@output
def about_verb(as_json: bool, csv_file: Path | None, markdown: bool) -> None:
    """Versions of the program, of what it leans on, and of its data sets: for a report, or a question to others."""
    from legwright.show import tables
    from legwright.show.surroundings import surroundings

    content: Record = surroundings()
    rows = [*content["packages"], *content["data_sets"]]

    publish("about", content, rows, tables.about, as_json, csv_file, markdown)
