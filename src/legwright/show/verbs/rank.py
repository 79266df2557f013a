"""The verb `rank`."""

from __future__ import annotations

import shlex
from collections.abc import Sequence
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

import click

from legwright.base.errors import InputError, NothingFeasible
from legwright.show.options import output, publish

if TYPE_CHECKING:
    from legwright.decide.brief import Brief
    from legwright.decide.rank import Row
    from legwright.show.records import Record


@click.command("rank")
@click.argument("brief", type=click.Path(path_type=Path))
@click.option("--workers", type=click.IntRange(1, 64), default=1, show_default=True, help="Processes.")
@click.option(
    "--draws", type=click.IntRange(0, 65536), default=0, show_default=True, help="For confidence; 0: none."
)
@click.option("--seed", type=click.IntRange(0), default=0, show_default=True, help="Of the draws.")
@click.option(
    "--trade-offs", is_flag=True, help="Also print the fronts of score against cost, supply, hazard, size."
)
@click.option(
    "--page", type=click.Path(path_type=Path), metavar="FILE", help="Also write one page for the meeting."
)
@output
def rank_verb(
    brief: Path,
    workers: int,
    draws: int,
    seed: int,
    trade_offs: bool,
    page: Path | None,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """Rank the candidates of BRIEF, each at its best size and doping."""
    from legwright.decide.brief import load_brief, partner_of
    from legwright.decide.confidence import confidences, draw_all, with_cautions
    from legwright.decide.couple import rank_with
    from legwright.decide.rank import rank
    from legwright.decide.tradeoffs import trade_offs as fronts_of
    from legwright.show import records, tables

    job = load_brief(brief)
    partner = partner_of(job, brief)
    if partner and draws:
        raise InputError("gives intervals to legs alone: leave it out, or the partner", key="--draws")
    found = rank_with(job, brief, partner, workers) if partner else rank(job, brief, workers)
    sure = confidences(draw_all(job, found, draws, seed, workers)) if draws else None
    found = with_cautions(found, sure or {})
    rows = [records.rank_record(row, sure) for row in found]
    under = records.notes((f for row in found for f in row.flags), (row.candidate for row in found if row.score))
    fronts = {axis: list(names) for axis, names in fronts_of(found).items()}
    duty = {"kind": job.duty.kind, "hot_K": job.duty.hot_K, "cold_K": job.duty.cold_K}
    content = {
        "title": job.title,
        "duty": duty,
        "partner": partner.name if partner else None,
        "rows": rows,
        "trade_offs": fronts,
        **under,
    }

    if page is not None:
        _write_page(page, brief, job, found, rows, under, draws, seed)
    publish("rank", content, rows, partial(tables.rank, trade_offs=trade_offs), as_json, csv_file, markdown)
    if not any(row["score"] for row in rows):
        raise NothingFeasible("no candidate can serve this brief; the flags say why")


def _write_page(
    page: Path,
    brief: Path,
    job: Brief,
    found: Sequence[Row],
    rows: Sequence[Record],
    under: Record,
    draws: int,
    seed: int,
) -> None:
    from legwright.base.files import write_whole
    from legwright.show.page import meeting_page

    sure = ["--draws", str(draws), "--seed", str(seed)] if draws else []
    command = shlex.join(["legwright", "rank", str(brief), *sure, "--page", str(page)])
    write_whole(page, meeting_page(job, brief.read_text(encoding="utf-8-sig"), found, rows, under, command, seed))
