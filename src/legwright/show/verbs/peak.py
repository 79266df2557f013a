"""The verb `peak`."""

from __future__ import annotations

from functools import partial
from pathlib import Path

import click

from legwright.show.options import Named, Positive, output, publish, shape_option


@click.command("peak")
@click.argument("candidate", type=Named())
@click.option("--temperature", type=Positive("K"), required=True, help="Kelvin.")
@click.option("--doping", type=Positive("CM3"), help="Active density per cm³; default: the best.")
@shape_option
@output
def peak_verb(
    candidate: str,
    temperature: float,
    doping: float | None,
    shape: str,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """At which size the zT of CANDIDATE peaks, and how wide the window is."""
    from legwright.base.units import PER_CM3
    from legwright.candidate.library import load_candidate
    from legwright.decide.peak import peak
    from legwright.show import records, tables

    one = load_candidate(candidate)
    found = peak(one, temperature, None if doping is None else doping * PER_CM3, shape)
    content = records.peak_record(found, shape)
    under = records.notes(found.flags, [one])

    publish(
        "peak",
        {**content, **under},
        content["curve"],
        partial(tables.peak, best_doping=doping is None),
        as_json,
        csv_file,
        markdown,
    )
