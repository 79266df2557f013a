"""What can hurt the people who make or handle a leg: short, and never in place of local codes."""

from __future__ import annotations

from collections.abc import Iterable

from legwright.candidate.library import Candidate

ELEMENTS: dict[str, str] = {
    "Pb": "lead: toxic and cumulative; no dust or fume, blood-lead monitoring where codes ask for it",
    "Te": "tellurium: toxic dust and fume; hydrogen telluride forms with acids",
    "Se": "selenium: toxic dust and fume; hydrogen selenide forms with acids",
    "Tl": "thallium: highly toxic, also through the skin",
    "Sb": "antimony: toxic dust and oxide fume; stibine forms with acids",
    "As": "arsenic: toxic and carcinogenic; arsine forms with acids",
    "Cd": "cadmium: toxic and carcinogenic dust and fume",
    "Hg": "mercury: toxic vapour",
    "Co": "cobalt: harmful dust, sensitising",
    "Ni": "nickel: sensitising, carcinogenic dust",
    "Mg": "magnesium: its powder burns and reacts with water; no water on such a fire",
    "P": "phosphorus: flammable; phosphine forms from phosphides with moisture",
}
#: elements that leave hot legs as vapour, by themselves or as compounds, well below the melting point
VOLATILE = frozenset({"P", "S", "Zn", "As", "Se", "Cd", "Sb", "Te", "Mg", "Hg", "Tl", "Pb"})
#: near the highest service temperature: within this many kelvin or this share of it (common practice)
_NEAR_K, _NEAR_SHARE = 50.0, 0.1
PROCESS = (
    "Fine and nano-powders: explosion and inhalation hazard; enclosed, inerted, earthed handling.",
    "Hot presses and furnaces: high force, heat and inert gas; hot surfaces of a working leg burn.",
    "Toxicity, pressure and fire are matters for local codes and licensed practice; this list is a reminder.",
)


def evaporates(candidate: Candidate, hottest: float) -> bool:
    """Whether a leg that reaches `hottest` (K) is near its service limit and holds elements that evaporate."""
    limit = candidate.data.service.highest_temperature.si
    near = hottest >= limit - max(_NEAR_K, _NEAR_SHARE * limit)
    return near and not VOLATILE.isdisjoint(candidate.elements)


def cautions(candidates: Iterable[Candidate]) -> tuple[str, ...]:
    """The cautions that these candidates call for, each once."""
    present = {element for candidate in candidates for element in candidate.elements}
    by_element = tuple(f"{text[0].upper()}{text[1:]}." for e, text in ELEMENTS.items() if e in present)
    return by_element + PROCESS
