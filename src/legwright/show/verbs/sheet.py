"""The verb `sheet`."""

from __future__ import annotations

from pathlib import Path

import click

from legwright.show.options import Named, Positive, output, publish, shape_option


@click.command("sheet")
@click.argument("candidate", type=Named())
@click.option("--temperature", type=Positive("K"), required=True, help="Kelvin.")
@click.option("--doping", type=Positive("CM3"), required=True, help="Active density per cm³.")
@click.option("--size", type=Positive("NM", bulk=True), required=True, metavar="NM|bulk", help="Nanometres.")
@shape_option
@output
def sheet_verb(
    candidate: str,
    temperature: float,
    doping: float,
    size: float,
    shape: str,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """Every property of CANDIDATE at one design point, with its parts."""
    from legwright.base.flags import ordered
    from legwright.base.units import NM, PER_CM3
    from legwright.candidate.library import load_candidate
    from legwright.decide.warnings import point_flags
    from legwright.physics.properties import evaluate
    from legwright.show import records, tables

    one = load_candidate(candidate)
    made = evaluate(one, temperature, doping * PER_CM3, size * NM, shape)
    content = records.sheet_record(one, made, ordered(point_flags(one, made, shape)))
    under = records.notes(content["flags"], [one])

    publish("sheet", {**content, **under}, [content], tables.sheet, as_json, csv_file, markdown)
