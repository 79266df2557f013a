"""The verb `leg`."""

from __future__ import annotations

from pathlib import Path

import click

from legwright.base.errors import NothingFeasible
from legwright.show.options import Positive, output, publish


@click.command("leg")
@click.argument("candidate")
@click.argument("brief", type=click.Path(path_type=Path))
@click.option("--doping", type=Positive("CM3"), help="Active density per cm³; default: the brief's best.")
@click.option("--size", type=Positive("NM|bulk", bulk=True), help="nm, or bulk; default: the brief's best.")
@output
def leg_verb(
    candidate: str,
    brief: Path,
    doping: float | None,
    size: float | None,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """What a leg of CANDIDATE delivers in BRIEF, with the brief's contacts, exchangers and side loss."""
    from legwright.base.units import NM, PER_CM3
    from legwright.candidate.library import load_candidate
    from legwright.decide.brief import load_brief
    from legwright.decide.installed import deliver
    from legwright.show import layout, records, tables

    one, job = load_candidate(candidate), load_brief(brief)
    found = deliver(one, job, None if doping is None else doping * PER_CM3, None if size is None else size * NM)
    content = records.leg_record(found, job)
    under = records.notes(found.flags, [one])

    def table() -> None:
        out = layout.console(markdown)
        out.print(tables.leg_table(content, markdown))
        tables.footnotes(out, under["flag_meanings"], under["cautions"])

    publish("leg", {**content, **under}, [content], as_json, csv_file, table)
    if found.running is None:
        raise NothingFeasible(f"this leg cannot serve this brief: {found.refusal}")
