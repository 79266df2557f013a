"""The verb `candidates`."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from legwright.show.options import Named, output, publish

if TYPE_CHECKING:
    from legwright.show.records import Record


@click.command("candidates")
@click.argument("name", required=False, type=Named())
@output
def candidates_verb(name: str | None, as_json: bool, csv_file: Path | None, markdown: bool) -> None:
    """What is in the library; with NAME, every number of that candidate and its source."""
    from legwright.candidate.family import family_names, load_family
    from legwright.candidate.library import library_names, load_candidate
    from legwright.show import records, tables

    if name is None:
        rows = [records.candidate_record(load_candidate(each)) for each in library_names()]
        lines = [records.family_record(load_family(each)) for each in family_names()]
        content: Record = {"candidates": rows, "families": lines}
        draw = tables.library
    else:
        one = load_candidate(name)
        rows = records.number_records(one)
        content = {**records.candidate_record(one), "values": rows, "sources": records.citations(one)}
        draw = tables.one_candidate

    publish("candidates", content, rows, draw, as_json, csv_file, markdown)
