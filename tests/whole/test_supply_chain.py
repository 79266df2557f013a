"""What the program leans on: bounds on both sides, and licences that are known and free."""

from __future__ import annotations

import csv
import re
import tomllib
from importlib import metadata
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
PROJECT = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
LICENCES = Path(__file__).with_name("licences.csv")
EXTRAS = [name for name in PROJECT["optional-dependencies"] if name != "test"]
SHIPPED = [*PROJECT["dependencies"], *(each for name in EXTRAS for each in PROJECT["optional-dependencies"][name])]


def name_of(requirement: str) -> str:
    return re.match(r"[\w-]+", requirement).group().lower()


@pytest.mark.parametrize("requirement", SHIPPED)
def test_a_dependency_has_a_lower_and_an_upper_bound(requirement):
    assert re.fullmatch(r"[\w-]+(\[[\w,]+\])?>=[\d.]+,<[\d.]+", requirement)


def licence_of(name: str) -> str:
    """As the installed package states it: an SPDX expression, else its classifiers, else its own first words."""
    about = metadata.metadata(name)
    classifiers = [line.split(" :: ")[-1] for line in about.get_all("Classifier", []) if line.startswith("License")]
    stated = about.get("License-Expression") or "; ".join(classifiers) or (about.get("License") or "").strip()
    return stated.splitlines()[0][:80] if stated else ""


def test_the_list_of_licences_is_whole_and_true():
    """Several packages state theirs in other words from one version to the next: the kind must stay."""
    with LICENCES.open(encoding="utf-8") as lines:
        listed = {row["package"]: row["licence"] for row in csv.DictReader(lines)}
    assert set(listed) == {name_of(each) for each in SHIPPED}
    for name, licence in listed.items():
        try:
            stated = licence_of(name)
        except metadata.PackageNotFoundError:
            continue  # of an extra that is not installed here
        kind = re.match(r"MIT|BSD|Apache|LGPL|PSF|Python|Public", licence).group()
        assert kind.lower() in stated.lower() or (kind == "Python" and "psf" in stated.lower()), (name, stated)


def test_none_asks_for_the_source_of_what_uses_it():
    with LICENCES.open(encoding="utf-8") as lines:
        assert not [row for row in csv.DictReader(lines) if re.match(r"A?GPL", row["licence"])]


if __name__ == "__main__":
    with LICENCES.open("w", encoding="utf-8", newline="") as stream:
        writer = csv.writer(stream, lineterminator="\n")
        writer.writerow(["package", "licence"])
        for each in SHIPPED:
            writer.writerow([name_of(each), licence_of(name_of(each))])
