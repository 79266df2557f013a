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
    from legwright.show import records, tables

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

    publish("audit", content, rows, tables.audit, as_json, csv_file, markdown)
