"""The verb `brief`."""

from __future__ import annotations

from importlib import resources
from pathlib import Path

import click

from legwright.base.errors import InputError
from legwright.base.files import write_whole

_DUTIES = {
    "generator": {"hot": "673", "cold": "373", "maximise": "efficiency", "ambient": "373"},
    "cooler": {"hot": "308", "cold": "268", "maximise": "cop", "ambient": "308"},
}


@click.command("brief")
@click.argument("kind", type=click.Choice(list(_DUTIES)))
@click.option("--into", type=click.Path(path_type=Path), help="Write it to this file; default: print it.")
def brief_verb(kind: str, into: Path | None) -> None:
    """A brief to fill in, with every field, its unit and what is taken when it is left out."""
    text = resources.files("legwright.show").joinpath("template.toml").read_text(encoding="utf-8")
    for name, value in {"kind": kind, **_DUTIES[kind]}.items():
        text = text.replace("{" + name + "}", value)
    if into is None:
        click.echo(text, nl=False)
    elif into.exists():
        raise InputError("exists; name another file", file=into, key="--into", slug="cannot-write")
    else:
        write_whole(into, text)
