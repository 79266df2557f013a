"""Flags: what a reader must know before leaning on a figure. One slug, one paragraph each."""

from __future__ import annotations

from collections.abc import Iterable

MEANINGS: dict[str, str] = {
    "above-service-temperature": (
        "The hot side is above the highest service temperature in the candidate's file; the leg would "
        'sublime, oxidise, melt or lose its dopant. Score 0, unless the brief says beyond_service = "flag".'
    ),
    "volatile-near-service-limit": (
        "The hot side is within 50 K or a tenth of the highest service temperature, or above it, and the candidate "
        "holds elements that evaporate there (P, S, Zn, As, Se, Cd, Sb, Te, Mg, Hg, Tl, Pb): toxic or flammable "
        "deposits gather on colder parts and in the vacuum or gas system. Sealing, extraction and cleaning are "
        "matters for local codes and licensed practice."
    ),
    "duty-out-of-reach": "No current lets this leg serve the duty (a cooler cannot span the asked difference).",
    "no-doping-range": "The brief's doping range and the candidate's own do not overlap. Score 0.",
    "avoided-element": "The candidate contains an element that the brief avoids. Score 0.",
    "hazardous-element": (
        "The candidate contains an element on the list of hazards, and the brief avoids those. Score 0."
    ),
    "too-costly": "The elements of a kilogram cost more than the brief allows (prices of 2013). Score 0.",
    "supply-too-concentrated": (
        "The production of its elements is in fewer hands than the brief allows, or is not known. Score 0."
    ),
    "window-open": (
        "The score is still within 5 % of its best at a limit of the size range, so that end of the window "
        "is the limit, not a loss of performance."
    ),
    "size-at-limit": (
        "The best size is a limit of the size range: the brief's, or the smallest that can be made. "
        "Beyond it the model still gains."
    ),
    "doping-at-limit": "The best doping is a limit of the doping range; solubility or the brief stops it.",
    "no-gain-reference": "Coarse-grained material scores 0 under this duty, so the gain is undefined.",
    "below-smallest-makeable-size": (
        "The size is below the smallest that the candidate's file says can be made; nobody is known to make it."
    ),
    "doping-outside-known-range": (
        "The doping lies outside the range in which the candidate's file says it has been made active."
    ),
    "dopant-beyond-solubility": (
        "Where the leg is hot enough for its dopant to move (above half the temperature of its highest solubility; "
        "common practice), the doping is more than the crystal holds there in balance: it was frozen in and will "
        "precipitate in long service, and conductivity falls with it."
    ),
    "thin-wire-subbands": (
        "The wire is so thin that the first subbands of its carriers lie more than k_B T apart: walls that scatter "
        "bulk carriers no longer describe it."
    ),
    "temperature-outside-data": (
        "Part of the temperature range lies outside the span over which the candidate's parameters were checked."
    ),
    "lattice-below-amorphous-minimum": (
        "The computed lattice conductivity is below the amorphous minimum (Cahill, Watson & Pohl 1992): "
        "the particle picture of phonons no longer holds and the true value is likely higher."
    ),
    "sintered-boundaries": (
        "Sintered bodies of this alloy have behaved as if the boundary length were about a tenth of the grain "
        "(subgrains, defects): real lattice conductivity may be lower, and mobility too, than at the stated grain."
    ),
    "porous": (
        "The figures are for a body with the porosity in the candidate's file, which lowers both conductivities."
    ),
    "mixed-minority-carriers": (
        "Minority carriers carry more than a tenth of the electronic heat at the hot end (bipolar conduction)."
    ),
    "score-of-couple": (
        "The score is that of the couple with the brief's partner, both at their best areas; size, doping, window, "
        "zT and gain are the leg's own, from its score alone."
    ),
    "legs-unlike": (
        "Somewhere in the span the compatibility factors of the two legs differ by more than a factor of two: they "
        "want unlike current densities, which only unlike cross-sections give (see the area ratio)."
    ),
    "segments-fight": (
        "Where two segments meet their compatibility factors differ by more than a factor of two: one current does "
        "not suit both, and the leg loses against the sum of its parts (Snyder & Ursell 2003; the factor is common "
        "practice)."
    ),
    "segment-unused": "The best leg leaves less than a hundredth of its length to one of its segments.",
    "expansion-mismatch": (
        "Legs or segments differ in thermal expansion from each other, or from every listed strap, by more than "
        "0.2 % between 300 K and their hottest joint: more than brittle semiconductors bear without a compliant "
        "layer (common practice)."
    ),
    "from-memory": "More than half of the numbers in this candidate's file were taken from memory, not read.",
    "sure-from-memory": (
        "It wins nearly every draw, but more than half of the numbers behind it were taken from memory: the draws "
        "do not know how wrong a memory can be. Check its anchors before you lean on it."
    ),
    "direction": "The figures hold for the one crystal direction or texture named in the candidate's file.",
}

#: what a table calls a flag whose slug is too long for one; the others by their slug with spaces
_SHORT = {
    "above-service-temperature": "too hot",
    "volatile-near-service-limit": "volatile",
    "duty-out-of-reach": "out of reach",
    "no-doping-range": "no doping",
    "hazardous-element": "hazardous",
    "supply-too-concentrated": "few suppliers",
    "no-gain-reference": "gain undefined",
    "below-smallest-makeable-size": "too fine to make",
    "doping-outside-known-range": "doping unknown",
    "dopant-beyond-solubility": "beyond solubility",
    "thin-wire-subbands": "subbands",
    "temperature-outside-data": "beyond data",
    "lattice-below-amorphous-minimum": "below amorphous",
    "sintered-boundaries": "sintered",
    "mixed-minority-carriers": "bipolar",
}


def word(flag: str) -> str:
    """The flag as a table shows it.

    >>> word("window-open"), word("above-service-temperature")
    ('window open', 'too hot')
    """
    return _SHORT.get(flag, flag.replace("-", " "))


def ordered(flags: Iterable[str]) -> tuple[str, ...]:
    """Flags without repeats, in the order of MEANINGS; an unknown slug is a KeyError (our fault)."""
    present = set(flags)
    unknown = present - MEANINGS.keys()
    if unknown:
        raise KeyError(f"flag without a meaning: {sorted(unknown)}")
    return tuple(slug for slug in MEANINGS if slug in present)
