"""The verb `search`."""

from __future__ import annotations

from pathlib import Path

import click

from legwright.show.options import Named, output, publish


@click.command("search")
@click.argument("subject", type=Named())
@click.argument("brief", type=click.Path(path_type=Path))
@click.option("--evaluations", type=click.IntRange(12, 2000), default=48, show_default=True, help="Costly answers.")
@click.option("--seed", type=click.IntRange(0), default=0, show_default=True, help="Of the random numbers.")
@click.option("--resume", type=click.Path(path_type=Path), help="Checkpoint: kept up to date, and replayed.")
@output
def search_verb(
    subject: str,
    brief: Path,
    evaluations: int,
    seed: int,
    resume: Path | None,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> int:
    """The best size, doping and, for a family, composition of SUBJECT (candidate or family) for BRIEF."""
    from legwright.candidate.family import family_names, load_family
    from legwright.candidate.library import load_candidate
    from legwright.decide.brief import load_brief
    from legwright.decide.search import search
    from legwright.show import records, tables

    one = load_family(subject) if subject in family_names() else load_candidate(subject)
    found = search(one, load_brief(brief), evaluations, seed, resume)
    content = records.search_record(found)
    under = records.notes(found.flags, [found.candidate])

    publish("search", {**content, **under}, [content], tables.search, as_json, csv_file, markdown)
    return 0 if found.complete else 130
