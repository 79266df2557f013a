"""The verb `leg`."""

from __future__ import annotations

from pathlib import Path

import click

from legwright.base.errors import NothingFeasible
from legwright.show.options import Named, Positive, output, publish


@click.command("leg")
@click.argument("candidate", type=Named())
@click.argument("brief", type=click.Path(path_type=Path))
@click.option("--doping", type=Positive("CM3"), help="Active density per cm³; default: the brief's best.")
@click.option("--size", type=Positive("NM|bulk", bulk=True), help="nm, or bulk; default: the brief's best.")
@click.option(
    "--then",
    "then",
    multiple=True,
    type=Named(),
    metavar="CANDIDATE",
    help="The next segment towards the cold end.",
)
@click.option("--partner", type=Named(), metavar="CANDIDATE", help="The couple's other leg; default: the brief's.")
@output
def leg_verb(
    candidate: str,
    brief: Path,
    doping: float | None,
    size: float | None,
    then: tuple[str, ...],
    partner: str | None,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """What a leg of CANDIDATE delivers in BRIEF, with the brief's contacts, exchangers and side loss.

    With a partner also what the couple delivers, contacts and exchangers per area of both legs together. With
    --then a leg of several materials, hot to cold, each at its best design.
    """
    from legwright.base.units import NM, PER_CM3
    from legwright.candidate.library import load_candidate
    from legwright.decide.brief import load_brief, partner_of
    from legwright.decide.couple import designed, join
    from legwright.decide.installed import deliver
    from legwright.decide.service import service
    from legwright.show import records, tables

    one, job = load_candidate(candidate), load_brief(brief)
    doping, size = None if doping is None else doping * PER_CM3, None if size is None else size * NM
    other = partner_of(job, brief) if partner is None else load_candidate(partner)
    materials = [one, *map(load_candidate, then)]
    if then or other:
        design = designed(job, materials, doping, size)
        joined = join(job, [design, *([designed(job, [other])] if other else [])])
        _, doping, size = design[0]
    aged = None
    if then:
        content = records.segments_record(joined, materials[0], job)
    else:
        found = deliver(one, job, doping, size)
        content = records.leg_record(found, job)
        aged = service(found, job)
    if other:
        content |= records.couple_record(joined, other, job)
    if aged is not None:
        content["service"] = records.service_record(aged)
    under = records.notes(content["flags"], [*materials, *([other] if other else [])])

    publish("leg", {**content, **under}, [content], tables.leg, as_json, csv_file, markdown)
    if then or other:
        if joined.running is None:
            raise NothingFeasible("these legs cannot serve this brief; the flags say why")
    elif found.running is None:
        raise NothingFeasible(f"this leg cannot serve this brief: {found.refusal}")
