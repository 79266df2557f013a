"""Cost, supply and density from the formula."""

from __future__ import annotations

import csv
from pathlib import Path

import pytest
from pymatgen.analysis import cost
from pymatgen.core.periodic_table import Element

from legwright.candidate.library import library_names, load_candidate
from legwright.candidate.supply import cost_per_kg, hazardous_elements, mass_density, supply_concentration


def test_density_is_that_of_the_handbook():
    """Silicon 2.329, germanium-poor alloy 3.00, PbTe 8.24 (X-ray): Levinshtein 1996, Dismukes 1964, from memory."""
    for name, density in (("si-n", 2329), ("sige-n", 3000), ("pbte-n", 8240)):
        assert mass_density(load_candidate(name)) == pytest.approx(
            density, rel=0.005, abs=0
        )  # cell to 0.3 per cent


def test_cost_is_the_mass_weighed_price_of_the_elements():
    """Against the price table itself, read here as plain text."""
    table = Path(cost.__file__).with_name("costdb_elements.csv")
    with table.open(encoding="utf-8") as lines:
        price = {row[0]: float(row[1]) for row in csv.reader(lines, quotechar="|") if row}
    for name in library_names():
        candidate = load_candidate(name)
        mass: dict[str, float] = {}
        for site in candidate.data.site:
            for element, share in site.occupants.items():
                weight = site.count * share * float(Element(element).atomic_mass)
                mass[element] = mass.get(element, 0.0) + weight
        by_hand = sum(m * price[e] for e, m in mass.items()) / sum(mass.values())
        assert cost_per_kg(candidate) == pytest.approx(by_hand, rel=1e-6, abs=0)  # the tables' atomic masses


def test_supply_lies_between_many_hands_and_one():
    for name in library_names():
        found = supply_concentration(load_candidate(name))
        assert found is None or 0 < found <= 10_000
    # silicon and germanium: 4700 and 5300 (Gaultois et al. 2013)
    assert supply_concentration(load_candidate("si-n")) == 4700
    assert 4700 < supply_concentration(load_candidate("sige-n")) < 5300


def test_hazards_count_the_dopant():
    assert hazardous_elements(load_candidate("si-n")) == ("P",)
    assert hazardous_elements(load_candidate("si-p")) == ()
    assert set(hazardous_elements(load_candidate("pbte-n"))) == {"Pb", "Te"}
