"""The committed table of where each candidate's numbers came from.

Run this file as a script to write it anew after an intended change.
"""

from __future__ import annotations

import csv
import io
from pathlib import Path
from typing import get_args

from legwright.candidate.library import library_names, load_candidate
from legwright.candidate.number import Basis

TABLE = Path(__file__).with_name("basis.csv")


def as_text() -> str:
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    kinds = get_args(Basis)
    writer.writerow(["candidate", "numbers", *(f"{kind} [%]" for kind in kinds)])
    whole = dict.fromkeys(kinds, 0)
    for name in library_names():
        counts = load_candidate(name).basis_counts
        total = sum(counts.values())
        writer.writerow([name, total, *(f"{100 * counts.get(kind, 0) / total:.0f}" for kind in kinds)])
        whole = {kind: whole[kind] + counts.get(kind, 0) for kind in kinds}
    total = sum(whole.values())
    writer.writerow(["all", total, *(f"{100 * whole[kind] / total:.0f}" for kind in kinds)])
    return out.getvalue()


def test_the_committed_table_is_the_library():
    assert TABLE.read_text(encoding="utf-8") == as_text()


def test_there_are_thirty_candidates_of_both_kinds_and_six_families():
    from legwright.candidate.family import family_names

    assert len(library_names()) >= 30
    carriers = [load_candidate(name).data.carrier for name in library_names()]
    assert min(carriers.count("n"), carriers.count("p")) >= 12
    assert len(family_names()) >= 6


if __name__ == "__main__":
    TABLE.write_text(as_text(), encoding="utf-8")
