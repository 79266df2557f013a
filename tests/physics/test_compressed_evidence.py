"""Every library candidate as compressed maps, in three shapes at three temperatures, against the direct path.

Run this file as a script to write the whole table anew (a minute).
"""

from __future__ import annotations

import csv
import io
from itertools import product
from pathlib import Path

import numpy as np
import pytest

import legwright as lw
from legwright.candidate.library import library_names

TABLE = Path(__file__).with_name("compressed.csv")
SHAPES = ("grain", "wire", "film")
SIZES = (5e-9, 1e-5)
TOLERANCE = 1e-6
HEAD = [
    "candidate",
    "shape",
    "temperature [K]",
    "pieces in doping",
    "terms in doping",
    "terms in size",
    "estimated error",
    "worst of 40 200 points",
]
SLICE = (
    ("cosb3-n", "wire", 823.0),  # S changes sign
    ("ge-n", "film", 100.0),  # corners in doping, cold
    ("mg3sbbi-n", "grain", 300.0),  # barriers
    ("sige-p", "grain", 1273.0),
)
POSITIVE = (
    "electrical_conductivity",
    "electronic_thermal_conductivity",
    "lattice_thermal_conductivity",
    "mobility",
)


def temperatures(name: str) -> list[float]:
    """Cold, room and the highest of its service."""
    top = lw.load_candidate(name).data.service.highest_temperature.si
    return sorted({100.0, min(300.0, top), top})


def line(name: str, shape: str, temperature: float) -> list[str]:
    """One map over the whole range of doping, at random points between its nodes and of coarse material."""
    candidate = lw.load_candidate(name)
    limits = candidate.data.doping
    dopings = limits.lowest.si, limits.highest.si
    quick = lw.compress(candidate, temperature, dopings, SIZES, shape, TOLERANCE)
    rng = np.random.default_rng(20)
    doping, size = (np.exp(rng.uniform(*np.log(ends), 200)) for ends in (dopings, SIZES))
    size = np.append(size, np.inf)
    made = quick.evaluate(doping, size)
    asked = lw.evaluate(candidate, temperature, doping[:, None], size, shape)
    errors = [np.abs(getattr(made, each) / getattr(asked, each) - 1) for each in POSITIVE]
    unit = np.maximum(np.abs(asked.seebeck), 1e-6)  # V/K, as `compress` says
    errors.append(np.abs(made.seebeck - asked.seebeck) / unit)
    scale = asked.electrical_conductivity * asked.temperature / asked.thermal_conductivity
    errors.append(np.abs(made.zt - asked.zt) / (unit**2 * scale))
    pairs = np.abs(made.bipolar_thermal_conductivity - asked.bipolar_thermal_conductivity)
    errors.append(pairs / asked.electronic_thermal_conductivity)
    figures = [quick.edges.size - 1, *quick.terms]
    return [name, shape, f"{temperature:g}", *map(str, figures), f"{quick.error:.1e}", f"{np.max(errors):.1e}"]


def all_points() -> list[tuple[str, str, float]]:
    return [(name, shape, t) for name, shape in product(library_names(), SHAPES) for t in temperatures(name)]


@pytest.mark.evidence
def test_the_estimate_bounds_what_is_measured_and_the_tolerance_the_estimate():
    with TABLE.open(encoding="utf-8") as lines:
        head, *rows = csv.reader(lines)
    assert head == HEAD
    assert [tuple(row[:3]) for row in rows] == [(name, shape, f"{t:g}") for name, shape, t in all_points()]
    fresh = [line(*chosen) for chosen in SLICE]
    for row in (*rows, *fresh):
        # two digits each: the measured one may have been rounded up to the estimate
        assert 0 < float(row[-1]) <= float(row[-2]) <= TOLERANCE, row
    for row in fresh:
        kept = next(other for other in rows if other[:3] == row[:3])
        assert row[3] == kept[3]
        # a term more or less may fall on another machine's side of what is spared
        assert all(abs(int(a) - int(b)) <= int(row[3]) for a, b in zip(row[4:6], kept[4:6], strict=True)), row


if __name__ == "__main__":
    from joblib import Parallel, delayed

    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(HEAD)
    writer.writerows(Parallel(n_jobs=2)(delayed(line)(*point) for point in all_points()))
    TABLE.write_text(out.getvalue(), encoding="utf-8")
