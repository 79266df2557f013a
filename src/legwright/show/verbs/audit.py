"""The verb `audit`."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from legwright.show.options import output, publish

if TYPE_CHECKING:
    from legwright.show.records import Record


@click.command("audit")
@output
def audit_verb(as_json: bool, csv_file: Path | None, markdown: bool) -> None:
    """The library against published samples and devices: how far off, how often inside its own intervals."""
    from legwright.decide.audit import audit, totals
    from legwright.decide.devices import audit_devices
    from legwright.show import layout, records, tables

    found = audit()
    rows = [records.verdict_record(one) for one in found.verdicts]
    sums = [records.total_record(one) for one in totals(found.verdicts)]
    devices = [records.device_record(one) for one in audit_devices()]
    content: Record = {
        "samples": rows,
        "totals": sums,
        "devices": devices,
        "without_candidate": found.without_candidate,
    }

    def table() -> None:
        out = layout.console(markdown)
        out.print(tables.totals_table(sums, markdown))
        out.print(tables.misses_table(rows, markdown))
        out.print(tables.AUDIT_WORDS, markup=False)
        out.print(tables.devices_table(devices, markdown))
        out.print(tables.DEVICE_WORDS, markup=False)
        waiting = ", ".join(f"{name} ({count})" for name, count in found.without_candidate.items())
        out.print(f"Published values without a candidate: {waiting or 'none'}.", markup=False)

    publish("audit", content, rows, as_json, csv_file, table)
