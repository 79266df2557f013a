"""The verb `why`."""

from __future__ import annotations

from pathlib import Path

import click

from legwright.base.errors import InputError
from legwright.show.options import Named, Positive, output, publish


@click.command("why")
@click.argument("candidate", type=Named())
@click.option("--temperature", type=Positive("K"), help="Kelvin; or give a brief.")
@click.option("--brief", type=click.Path(path_type=Path), help="Over the duty of this brief, at its best design.")
@click.option("--doping", type=Positive("CM3"), help="Active density per cm³.")
@click.option("--size", type=Positive("NM"), metavar="NM", help="Nanometres.")
@click.option("--shape", metavar="grain|wire|film", help="Default: grain, or the brief's.")
@output
def why_verb(
    candidate: str,
    temperature: float | None,
    brief: Path | None,
    doping: float | None,
    size: float | None,
    shape: str | None,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """What limits CANDIDATE at a design point or over a duty, and whether its size pays."""
    from legwright.base.units import NM, PER_CM3
    from legwright.candidate.library import load_candidate
    from legwright.decide.brief import load_brief
    from legwright.decide.why import design_of, why
    from legwright.show import records, tables

    if (temperature is None) == (brief is None):
        raise InputError("give either --temperature or --brief")
    one = load_candidate(candidate)
    job = None if brief is None else load_brief(brief)
    point = design_of(
        one,
        job,
        temperature,
        None if doping is None else doping * PER_CM3,
        None if size is None else size * NM,
        shape,
    )
    found = why(one, *point)
    content = records.why_record(found)
    under = records.notes(found.flags, [one])

    publish("why", {**content, **under}, content["free_paths"], tables.why, as_json, csv_file, markdown)
