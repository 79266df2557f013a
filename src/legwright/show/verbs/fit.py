"""The verb `fit`."""

from __future__ import annotations

from pathlib import Path

import click

from legwright.base.errors import InputError
from legwright.show.options import Named, output, publish


@click.command("fit")
@click.argument("measurements", type=click.Path(path_type=Path))
@click.option(
    "--like", type=Named(), metavar="CANDIDATE", required=True, help="Candidate to start from: name or file."
)
@click.option("--into", type=click.Path(path_type=Path), help="Write the calibrated candidate to this TOML file.")
@output
def fit_verb(
    measurements: Path, like: str, into: Path | None, as_json: bool, csv_file: Path | None, markdown: bool
) -> None:
    """Calibrate a candidate to the table MEASUREMENTS (CSV with the unit in each header)."""
    from legwright.base.files import write_whole
    from legwright.candidate.library import load_candidate
    from legwright.candidate.measurements import read_measurements
    from legwright.decide.fit import candidate_text, fit
    from legwright.show import records, tables

    if into is not None and into.suffix != ".toml":
        raise InputError(f"value '{into}' is not allowed; a name that ends in .toml", key="--into")
    start = load_candidate(like)
    found = fit(read_measurements(measurements, start.data.carrier), start)
    content = records.fit_record(found, into)
    if into is not None:
        write_whole(into, candidate_text(found))

    publish("fit", content, content["parameters"], tables.fit, as_json, csv_file, markdown)
