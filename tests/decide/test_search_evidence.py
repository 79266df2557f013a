"""Six candidates, two briefs, five seeds: how near the search lands to the best of a dense map.

Run this file as a script to write the whole table anew (some minutes).
"""

from __future__ import annotations

import csv
import io
from itertools import product
from pathlib import Path

import pytest

from legwright.candidate.library import load_candidate
from legwright.decide.brief import Brief
from legwright.decide.search import search

TABLE = Path(__file__).with_name("search_trials.csv")
NAMES = ("bisbte-p", "cosb3-n", "hfzrnisn-n", "mg2sisn-n", "pbte-p", "sige-n")
BRIEFS = {
    "grains, efficiency": ("efficiency", 480.0, 320.0, "grain", 20.0, 5000.0),
    "wires, power": ("power", 490.0, 350.0, "wire", 20.0, 2000.0),
}
SEEDS, EVALUATIONS = range(5), 48
SLICE = (("cosb3-n", "grains, efficiency", 0), ("pbte-p", "wires, power", 3))


def brief_of(name: str) -> Brief:
    maximise, hot, cold, shape, low, high = BRIEFS[name]
    return Brief.model_validate(
        {
            "title": name,
            "duty": {"kind": "generator", "hot_K": hot, "cold_K": cold, "maximise": maximise},
            "size": {"shape": shape, "min_nm": low, "max_nm": high},
        }
    )


def line(name: str, brief: str, seed: int) -> list[str]:
    """How far below the dense map's best: before and after the polish (per cent; negative: above it)."""
    found = search(load_candidate(name), brief_of(brief), EVALUATIONS, seed)
    before = 100 * (1 - found.before_polish / found.map_score)
    after = 100 * (1 - found.score / found.map_score)
    return [name, brief, str(seed), str(found.evaluations), f"{before:.3f}", f"{after:.4f}"]


@pytest.mark.evidence
def test_it_lands_within_half_a_per_cent_and_after_the_polish_within_a_hundredth():
    with TABLE.open(encoding="utf-8") as lines:
        rows = list(csv.reader(lines))[1:]
    assert len(rows) == len(NAMES) * len(BRIEFS) * len(SEEDS)
    for row in rows:
        assert int(row[3]) <= 60
        assert float(row[4]) <= 0.5, row
        assert float(row[5]) <= 0.01, row
    for chosen in SLICE:
        kept = next(row for row in rows if tuple(row[:3]) == tuple(map(str, chosen)))
        fresh = line(*chosen)
        assert fresh[:4] == kept[:4]
        # the process of another machine's linear algebra may ask for other points
        assert float(fresh[4]) <= 0.5
        assert float(fresh[5]) <= 0.01


if __name__ == "__main__":
    from joblib import Parallel, delayed

    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(["candidate", "brief", "seed", "evaluations", "below map [%]", "after polish [%]"])
    writer.writerows(Parallel(n_jobs=2)(delayed(line)(*point) for point in product(NAMES, BRIEFS, SEEDS)))
    TABLE.write_text(out.getvalue(), encoding="utf-8")
