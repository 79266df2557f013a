"""The verb `peak`."""

from __future__ import annotations

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
    from legwright.show import layout, records, tables

    one = load_candidate(candidate)
    found = peak(one, temperature, None if doping is None else doping * PER_CM3, shape)
    content = records.peak_record(found)
    under = records.notes(found.flags, [one])

    def table() -> None:
        out = layout.console(markdown)
        low, high = content["window_nm"]
        pairs = [
            (f"{shape} size at the peak [nm]", layout.figure(content["size_nm"])),
            ("zT at the peak", layout.figure(content["zt"])),
            ("sizes that keep 95 % of it [nm]", f"{layout.figure(low)} … {layout.figure(high)}"),
            ("zT of coarse material, same doping", layout.figure(content["zt_coarse"])),
            ("doping [cm⁻³]" + ("" if doping else ", the best"), layout.figure(content["doping_per_cm3"])),
        ]
        out.print(tables.pairs_table(f"{one.name} at {temperature:g} K", pairs, markdown))
        tables.footnotes(out, under["flag_meanings"], under["cautions"])

    publish("peak", {**content, **under}, content["curve"], as_json, csv_file, table)
