"""What a formula costs, how few hands its elements come from, and how much it weighs: from element tables."""

from __future__ import annotations

import warnings
from functools import cache
from typing import Any

from legwright.candidate.hazards import ELEMENTS
from legwright.candidate.library import Candidate


@cache
def cost_per_kg(candidate: Candidate) -> float:
    """Price of the elements of a kilogram of material, US dollars: Σ (mass share × price of the element).

    Element prices as pymatgen ships them, most of them of 2013: good for an order, not for a quotation. Work, shape
    and loss are not in it.

    >>> from legwright.candidate.library import load_candidate
    >>> cost_per_kg(load_candidate("sige-n")) > 10 * cost_per_kg(load_candidate("si-n"))
    True
    """
    from pymatgen.analysis.cost import CostAnalyzer, CostDBElements

    with warnings.catch_warnings():  # the element tables warn of noble gases, which no candidate holds
        warnings.simplefilter("ignore")
        prices: Any = CostDBElements
        analyzer: Any = CostAnalyzer(prices())
        return float(analyzer.get_cost_per_kg(_composition(candidate)))


@cache
def supply_concentration(candidate: Candidate) -> float | None:
    """Herfindahl–Hirschman index of the elements' production by country, weighed by mass: 0 to 10 000 (one source).

    Above 2500 a supply counts as concentrated. None where an element is not in the table.
    Source: Gaultois et al., Chemistry of Materials 25, 2911 (2013), as pymatgen ships it.

    >>> from legwright.candidate.library import load_candidate
    >>> supply_concentration(load_candidate("si-n"))
    4700.0
    """
    from pymatgen.analysis.hhi import HHIModel

    table: Any = HHIModel
    found = table().get_hhi_production(_composition(candidate))
    return None if found is None else float(found)


def mass_density(candidate: Candidate) -> float:
    """ρ = M̄/V of mean atomic mass and room per atom, kg/m³: dense material.

    >>> from legwright.candidate.library import load_candidate
    >>> round(mass_density(load_candidate("si-n")))
    2330
    """
    return candidate.disorder.mean_mass / candidate.data.cell.volume_per_atom.si


def hazardous_elements(candidate: Candidate) -> tuple[str, ...]:
    """Those of its elements, dopant included, that stand on the list of hazards."""
    return tuple(element for element in candidate.elements if element in ELEMENTS)


def _composition(candidate: Candidate) -> Any:
    from pymatgen.core.composition import Composition

    amounts: dict[str, float] = {}
    for site in candidate.data.site:
        for element, share in site.occupants.items():
            amounts[element] = amounts.get(element, 0.0) + site.count * share
    return Composition(amounts)
