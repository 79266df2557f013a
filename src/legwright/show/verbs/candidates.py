"""The verb `candidates`."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from legwright.show.options import output, publish

if TYPE_CHECKING:
    from legwright.show.records import Record


@click.command("candidates")
@click.argument("name", required=False)
@output
def candidates_verb(name: str | None, as_json: bool, csv_file: Path | None, markdown: bool) -> None:
    """What is in the library; with NAME, every number of that candidate and its source."""
    from legwright.candidate.family import family_names, load_family
    from legwright.candidate.library import library_names, load_candidate
    from legwright.show import layout, records, tables

    if name is None:
        rows = [records.candidate_record(load_candidate(each)) for each in library_names()]
        lines = [records.family_record(load_family(each)) for each in family_names()]
        content: Record = {"candidates": rows, "families": lines}

        def table() -> None:
            out = layout.console(markdown)
            out.print(tables.library_table(rows, markdown))
            out.print(tables.make_up_table(rows, markdown))
            out.print(tables.families_table(lines, markdown))
    else:
        one = load_candidate(name)
        rows = records.number_records(one)
        content = {**records.candidate_record(one), "values": rows, "sources": records.citations(one)}

        def table() -> None:
            out = layout.console(markdown)
            out.print(tables.numbers_table(f"{one.name}: {one.data.title}, {one.data.direction}", rows, markdown))
            for key, text in content["sources"].items():
                out.print(f"{key}: {text}", markup=False)

    publish("candidates", content, rows, as_json, csv_file, table)
