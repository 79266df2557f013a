"""The verb `screen`."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from legwright.base.errors import InputError, NothingFeasible
from legwright.show.options import output, publish

if TYPE_CHECKING:
    from legwright.show.records import Record


@click.command("screen")
@click.argument("brief", type=click.Path(path_type=Path))
@click.option("--into", type=click.Path(path_type=Path), required=True, help="CSV or Parquet file of all rows.")
@click.option("--family", "families", multiple=True, help="Alloy line to screen; repeatable. Default: all of them.")
@click.option(
    "--members", type=click.IntRange(2, 10_000_000), default=200, show_default=True, help="Of each alloy line."
)
@click.option(
    "--folder", type=click.Path(path_type=Path), help="Screen the candidate files of this folder instead."
)
@click.option("--workers", type=click.IntRange(1, 64), default=1, show_default=True, help="Processes.")
@click.option("--cluster", metavar="ADDRESS|local", help="Work on this Dask cluster, or on local Dask workers.")
@output
def screen_verb(
    brief: Path,
    into: Path,
    families: tuple[str, ...],
    members: int,
    folder: Path | None,
    workers: int,
    cluster: str | None,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> int:
    """Score very many compositions or candidate files for BRIEF, each on a coarse map; a killed run goes on."""
    from dataclasses import asdict

    from legwright.candidate.family import family_names, load_family
    from legwright.decide.brief import load_brief
    from legwright.decide.screen import members as members_of
    from legwright.decide.screen import screen
    from legwright.show import tables
    from legwright.show.progress import progress

    job = load_brief(brief)
    if folder is not None:
        if families:
            raise InputError("give either a folder or alloy lines", key="--folder")
        names = [str(path) for path in sorted(folder.glob("*.toml"))]
    else:
        lines = [load_family(name) for name in families or family_names()]
        names = [
            name
            for line in lines
            if job.candidates.carrier in ("either", line.carrier)
            for name in members_of(line, members)
        ]
    if not names:
        raise InputError("there is nothing to screen", key="--folder" if folder else "candidates.carrier")
    with progress("screening") as told:
        found = screen(job, names, into, workers, cluster, told)
    rows: list[Record] = [asdict(row) for row in found.best]
    content: Record = {
        "title": job.title,
        "asked": found.asked,
        "done": found.done,
        "complete": found.complete,
        "file": str(found.into) if found.complete else None,
        "rows": rows,
    }

    publish("screen", content, rows, tables.screen, as_json, csv_file, markdown)
    if found.complete and not found.best:
        raise NothingFeasible("none of these can serve this brief; the file's flags say why")
    return 0 if found.complete else 130
