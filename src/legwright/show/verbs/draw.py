"""The verb `draw`."""

from __future__ import annotations

from pathlib import Path

import click

from legwright.base.errors import InputError, nearest
from legwright.show.options import Positive, output, publish

KINDS = ("size", "temperature", "map", "paths", "shares", "sensitivity", "ranking")


@click.command("draw")
@click.argument("kind", metavar="|".join(KINDS))
@click.argument("subject")
@click.option(
    "--into", type=click.Path(path_type=Path), required=True, metavar="FILE", help="Ends in .svg or .png."
)
@click.option("--temperature", type=Positive("K"), help="Kelvin, for zT there; or give a brief.")
@click.option("--brief", type=click.Path(path_type=Path), help="For the score of this brief, at its best design.")
@click.option("--doping", type=Positive("CM3"), help="Active density per cm³; default: the best.")
@click.option("--size", type=Positive("NM", bulk=True), metavar="NM|bulk", help="Nanometres; default: the best.")
@click.option("--shape", metavar="grain|wire|film", help="Default: grain, or the brief's.")
@click.option("--draws", type=click.IntRange(0, 65536), default=128, show_default=True, help="For bands; 0: none.")
@click.option("--seed", type=click.IntRange(0), default=0, show_default=True, help="Of the draws.")
@output
def draw_verb(
    kind: str,
    subject: str,
    into: Path,
    temperature: float | None,
    brief: Path | None,
    doping: float | None,
    size: float | None,
    shape: str | None,
    draws: int,
    seed: int,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """A figure of SUBJECT: a candidate, or for `ranking` a brief."""
    if kind not in KINDS:
        raise InputError(f"no figure '{kind}'; {nearest(kind, KINDS)}", slug="unknown-name")
    from legwright.base.files import write_whole
    from legwright.base.units import NM, PER_CM3
    from legwright.show import drawings, figures

    suffix = drawings.file_suffix(into)
    asked = drawings.Asked(
        temperature,
        brief,
        None if doping is None else doping * PER_CM3,
        None if size is None else size * NM,
        shape,
    )
    record = drawings.gather(kind, subject, asked, draws, seed)
    drawn = figures.picture(record)
    write_whole(into, figures.as_svg(drawn, kind) if suffix == ".svg" else figures.as_png(drawn))

    content = {"file": str(into), "title": drawn.title, "says": drawn.says, **record}
    publish(
        "draw", content, drawings.flat_rows(record), lambda out, _: out.say(drawn.alt), as_json, csv_file, markdown
    )
