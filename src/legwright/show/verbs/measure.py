"""The verb `measure`."""

from __future__ import annotations

from pathlib import Path

import click

from legwright.base.errors import InputError, NothingFeasible
from legwright.show.options import output, publish


@click.command("measure")
@click.argument("brief", type=click.Path(path_type=Path))
@click.option("--workers", type=click.IntRange(1, 64), default=1, show_default=True, help="Processes.")
@click.option("--draws", type=click.IntRange(16, 65536), default=1024, show_default=True, help="Joint draws.")
@click.option("--seed", type=click.IntRange(0), default=0, show_default=True, help="Of the draws.")
@output
def measure_verb(
    brief: Path, workers: int, draws: int, seed: int, as_json: bool, csv_file: Path | None, markdown: bool
) -> None:
    """What to measure next so that the choice for BRIEF gains most for the effort."""
    from legwright.decide.advise import advise
    from legwright.decide.brief import load_brief, partner_of
    from legwright.decide.confidence import confidences, draw_all
    from legwright.decide.rank import rank
    from legwright.show import records, tables

    job = load_brief(brief)
    if partner_of(job, brief):
        raise InputError("is not for advice on measurements: leave it out", file=brief, key="leg.partner")
    rows = rank(job, brief, workers)
    able = [row for row in rows if row.score > 0]
    if not able:
        raise NothingFeasible("no candidate can serve this brief; `legwright rank` says why")
    found = draw_all(job, able, draws, seed, workers)
    sure = confidences(found)
    likeliest = max(sure, key=lambda name: (sure[name].win_share, name))
    fitted = frozenset(row.candidate.name for row in able if row.candidate.data.fitted is not None)
    advice = advise(found, fitted, seed, (likeliest, *sure[likeliest].tied_with))
    content = {"title": job.title, **records.advice_record(advice, able[0].score_name)}

    publish("measure", content, content["rows"], tables.measure, as_json, csv_file, markdown)
