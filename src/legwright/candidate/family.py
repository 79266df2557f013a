"""Alloy lines: a candidate at any composition, between library candidates that lie on the line."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from functools import cache, lru_cache
from itertools import combinations
from pathlib import Path
from typing import Annotated, Any, Literal

from pydantic import Field, model_validator

from legwright.base.errors import InputError, nearest
from legwright.base.files import datasets_folder, read_toml
from legwright.base.reading import Table, read_as
from legwright.base.units import si_factor
from legwright.candidate.library import Candidate, check_sources, load_candidate, named_file, stamp
from legwright.candidate.model import CandidateFile, Length, numbers
from legwright.candidate.number import Measure

Share = Annotated[float, Field(ge=0, le=1)]
Shares = tuple[float, ...]

#: shares that differ by less are the same composition
_SAME = 1e-9


class End(Table):
    """One end of the line: occupants by sublattice, and the largest share of it that is still the family."""

    name: str
    occupants: tuple[dict[str, Share], ...]
    most: Share = 1.0


class Node(Table):
    """A library candidate that lies on the line, and its share of each end."""

    candidate: str
    shares: tuple[Share, ...]


class Bowing(Table):
    """b in P = Σ c_i P_i − b c_i c_j of one pair of ends."""

    between: tuple[str, str]
    by: Measure


class Varies(Table):
    """How a number of the file runs from end to end, where that is known apart from the nodes."""

    key: str
    ends: tuple[Measure, ...] = ()
    bowing: tuple[Bowing, ...] = ()


class FamilyFile(Table):
    """A whole family file."""

    schema_: Literal[1] = Field(alias="schema")
    title: str
    end: tuple[End, ...] = Field(min_length=2)
    node: tuple[Node, ...] = Field(min_length=1)
    varies: tuple[Varies, ...] = ()
    sizes: dict[str, Length] = Field(default_factory=dict)

    @model_validator(mode="after")
    def _consistent(self) -> FamilyFile:
        names = [end.name for end in self.end]
        for node in self.node:
            if len(node.shares) != len(names) or abs(sum(node.shares) - 1) > _SAME:
                raise ValueError(f"shares of '{node.candidate}' must be {len(names)} that add up to 1")
        for one in self.varies:
            if one.ends and len(one.ends) != len(names):
                raise ValueError(f"varies '{one.key}': one number for each of {', '.join(names)}")
            for bow in one.bowing:
                if set(bow.between) - set(names) or bow.between[0] == bow.between[1]:
                    raise ValueError(f"varies '{one.key}': bowing is between two of {', '.join(names)}")
        return self


@dataclass(frozen=True, eq=False)
class Family:
    """An alloy line by name, its file, and the candidates at its nodes."""

    name: str
    path: Path
    data: FamilyFile
    nodes: tuple[Candidate, ...]

    @property
    def ends(self) -> tuple[str, ...]:
        """Names of the ends; a composition is a share of each."""
        return tuple(end.name for end in self.data.end)

    @property
    def carrier(self) -> str:
        """That of its nodes."""
        return self.nodes[0].data.carrier


def families_folder() -> Path:
    """Where the library's family files lie."""
    return datasets_folder() / "families"


@cache
def family_names() -> tuple[str, ...]:
    """Names of all library families, sorted."""
    return tuple(sorted(path.stem for path in families_folder().glob("*.toml")))


def load_family(name_or_path: str | Path) -> Family:
    """The family of that library name, or in that file.

    Raises InputError, naming file, key, value and what is allowed, when it cannot be used.

    >>> load_family("si-ge-n").ends
    ('Si', 'Ge')
    """
    text = str(name_or_path)
    path = named_file(text, family_names(), families_folder())
    if path is None:
        raise InputError(f"no family '{text}' in the library; {nearest(text, family_names())}", slug="unknown-name")
    return _read(path, text, stamp(path))


@cache
def _read(path: Path, shown: str, _stamp: object) -> Family:
    data = read_as(FamilyFile, read_toml(path, shown), shown)
    nodes = []
    for index, node in enumerate(data.node, start=1):
        try:
            nodes.append(load_candidate(node.candidate))
        except InputError as error:
            raise InputError(str(error), file=shown, key=f"node[{index}].candidate", slug=error.slug) from error
    check_sources(data, path, shown)
    first = nodes[0]
    for other in nodes[1:]:
        if _skeleton(other) != _skeleton(first):
            raise InputError(
                f"'{other.name}' and '{first.name}' differ in carrier or bands: not one line",
                file=shown,
                key="node",
                slug="bad-field",
            )
    family = Family(path.stem, path.resolve(), data, tuple(nodes))
    known = {key: number for node in nodes for key, number in _scalars(node.data)}
    for index, one in enumerate(data.varies, start=1):
        if one.key not in known:
            raise InputError(
                f"no number '{one.key}'; {nearest(one.key, known)}",
                file=shown,
                key=f"varies[{index}].key",
                slug="bad-field",
            )
        for number in (*one.ends, *(bow.by for bow in one.bowing)):
            try:
                si_factor(number.unit, known[one.key].si_unit)
            except InputError as error:
                raise InputError(str(error), file=shown, key=f"varies[{index}]", slug=error.slug) from error
    for one_node, place in zip(nodes, data.node, strict=True):
        if not _same_occupants(one_node, _occupants(family, place.shares)):
            raise InputError(
                f"the shares of '{one_node.name}' do not give its composition",
                file=shown,
                key="node",
                slug="bad-field",
            )
    return family


def family_of(name: str) -> tuple[str, Shares] | None:
    """'NAME:x' or 'NAME:x,y' as the family's name and the shares of all its ends but the first; else None."""
    family, colon, written = name.rpartition(":")
    if not colon or not family:
        return None
    try:
        return family, tuple(float(part) for part in written.split(","))
    except ValueError:
        return None


@lru_cache(maxsize=4096)
def member(family: Family, rest: Shares) -> Candidate:
    """The candidate at a composition: `rest` are the shares of all ends but the first (a binary line: one x).

    A number P of the member is P(c) + Σ_k w_k [P_k − P(c_k)] over the nodes k, P(c) = Σ c_i P_i − Σ b_ij c_i c_j
    by the family's ends and bowing (by ratios where the ends are given and positive): at a node it is the node's
    own. w runs linearly between the nodes of a binary line; among more ends it falls with the squared distance
    (Shepard 1968). Masses, mass and size disorder and the x(1−x) of alloy scattering follow the composition
    itself; prefactors that anchors fixed are the nodes', weighed alike.
    Sources: Vegard, Zeitschrift für Physik 5, 17 (1921) for the rule, bowing as published for each line; Shepard,
    Proceedings of the 23rd ACM National Conference, 517 (1968).
    Raises InputError for shares that are outside 0 … 1, add up to more than 1, or pass an end's `most`.

    >>> member(load_family("si-ge-n"), (0.3,)).data.formula
    'Si0.7Ge0.3'
    """
    shares = _all_shares(family, rest)
    weights = _weights(family, shares)
    occupants = _occupants(family, shares)
    heaviest = family.nodes[max(range(len(weights)), key=weights.__getitem__)]
    raw = heaviest.data.model_dump(by_alias=True, exclude_none=True)
    raw |= {"title": f"{family.data.title}, {heaviest.data.title.partition(',')[0]} line", "anchor": ()}
    raw["formula"] = _formula(occupants, [site.count for site in heaviest.data.site])
    for site, there in zip(raw["site"], occupants, strict=True):
        site["occupants"] = there
        site["sizes"] = _sizes(family, there)
    for key, number in _interpolated(family, shares, weights).items():
        _put(raw, key, number)
    _mind_the_mix(family, raw, shares, occupants)
    name = f"{family.name}:{','.join(f'{x:g}' for x in rest)}"
    data = read_as(CandidateFile, raw, name)
    return Candidate(name, family.path, data, tuple(zip(family.nodes, weights, strict=True)))


def _all_shares(family: Family, rest: Shares) -> Shares:
    ends = family.data.end
    if len(rest) != len(ends) - 1:
        wanted = ", ".join(end.name for end in ends[1:])
        raise InputError(f"composition of '{family.name}': give the share of {wanted}")
    shares = (1 - sum(rest), *rest)
    for end, share in zip(ends, shares, strict=True):
        if not -_SAME <= share <= end.most + _SAME:
            raise InputError(
                f"composition of '{family.name}': {end.name} {share:g} is not within 0 … {end.most:g}",
                slug="out-of-range",
            )
    return tuple(min(max(share, 0.0), 1.0) for share in shares)


def _weights(family: Family, shares: Shares) -> Shares:
    places = [node.shares for node in family.data.node]
    apart = [sum((a - b) ** 2 for a, b in zip(shares, place, strict=True)) for place in places]
    here = min(range(len(apart)), key=apart.__getitem__)
    if apart[here] < _SAME**2:
        return tuple(float(k == here) for k in range(len(places)))
    if len(shares) > 2:
        near = [1 / square for square in apart]
        return tuple(one / sum(near) for one in near)
    x, line = shares[1], sorted((place[1], k) for k, place in enumerate(places))
    below = [k for y, k in line if y <= x] or [line[0][1]]
    above = [k for y, k in line if y >= x] or [line[-1][1]]
    low, high = below[-1], above[0]
    if low == high:
        return tuple(float(k == low) for k in range(len(places)))
    up = (x - places[low][1]) / (places[high][1] - places[low][1])
    return tuple(1 - up if k == low else up if k == high else 0.0 for k in range(len(places)))


def _occupants(family: Family, shares: Shares) -> list[dict[str, float]]:
    """Element shares of each sublattice; elements that are not there are left out."""
    made: list[dict[str, float]] = []
    for place in range(len(family.data.end[0].occupants)):
        there: dict[str, float] = {}
        for share, end in zip(shares, family.data.end, strict=True):
            for element, part in end.occupants[place].items():
                there[element] = there.get(element, 0.0) + share * part
        made.append({element: part for element, part in there.items() if part > _SAME})
    return made


def _formula(occupants: list[dict[str, float]], counts: list[float]) -> str:
    amounts = [
        (element, share * count)
        for there, count in zip(occupants, counts, strict=True)
        for element, share in there.items()
    ]
    return "".join(element + ("" if abs(n - 1) < 1e-6 else f"{n:.4g}") for element, n in amounts)


def _sizes(family: Family, there: dict[str, float]) -> dict[str, Any]:
    known = dict(family.data.sizes)
    for node in family.nodes:
        for site in node.data.site:
            known = {**site.sizes, **known}
    if len(there) < 2 or not set(there) <= set(known):
        return {}
    return {element: known[element].model_dump(exclude_none=True) for element in there}


#: tables of a file whose numbers run along the line; anchors, contacts and records of wear belong to their sample
_RUNNING = ("cell.", "band[", "scattering.", "lattice.", "doping.", "service.highest", "service.data", "making.")


def _scalars(data: CandidateFile) -> Iterable[tuple[str, Measure]]:
    return ((key, number) for key, number in numbers(data) if key.startswith(_RUNNING))


def _interpolated(family: Family, shares: Shares, weights: Shares) -> dict[str, dict[str, Any]]:
    """Every running number of the member, as a file states it; where a node lacks one the others serve."""
    by_key: dict[str, list[tuple[float, Shares, Measure]]] = {}
    for node, weight, place in zip(family.nodes, weights, family.data.node, strict=True):
        for key, number in _scalars(node.data):
            by_key.setdefault(key, []).append((weight, place.shares, number))
    rules = {one.key: one for one in family.data.varies}
    made = {}
    for key, found in by_key.items():
        total = sum(weight for weight, _, _ in found)
        even = [(weight / total if total else 1 / len(found), place, number) for weight, place, number in found]
        made[key] = _between(even, rules.get(key), family.ends, shares)
    return made


def _between(
    nodes: list[tuple[float, Shares, Measure]], rule: Varies | None, ends: tuple[str, ...], shares: Shares
) -> dict[str, Any]:
    """One number of the member; `nodes` are (weight, shares, number), weights adding up to 1."""
    _, _, first = max(nodes, key=lambda node: node[0])
    run = _run(rule, ends, first.si_unit)
    by_ratio = rule is not None and bool(rule.ends) and first.spread_unit is None
    value = 0.0
    for weight, place, number in nodes:
        here = number.si * run(shares) / run(place) if by_ratio else number.si + run(shares) - run(place)
        value += weight * here
    scale = si_factor(first.unit, first.si_unit)
    stated = first.model_dump(exclude_none=True)
    if abs(value - first.si) <= 1e-12 * abs(first.si):
        return stated
    stated["value"] = value / scale
    if first.spread_unit is None:
        stated["spread"] = sum(weight * number.relative_spread for weight, _, number in nodes)
    stated |= {"basis": "published model", "note": "between the nodes of its alloy line"}
    return stated


def _run(rule: Varies | None, ends: tuple[str, ...], si_unit: str) -> Callable[[Shares], float]:
    """P(c) of a rule in SI, 0 without one."""
    if rule is None:
        return lambda shares: 0.0
    values = [number.value * si_factor(number.unit, si_unit) for number in rule.ends] or [0.0] * len(ends)
    bow = {frozenset(one.between): one.by.value * si_factor(one.by.unit, si_unit) for one in rule.bowing}

    def run(shares: Shares) -> float:
        straight = sum(share * value for share, value in zip(shares, values, strict=True))
        bent = sum(
            bow.get(frozenset((ends[i], ends[j])), 0.0) * shares[i] * shares[j]
            for i, j in combinations(range(len(ends)), 2)
        )
        return straight - bent

    return run


def _put(raw: dict[str, Any], key: str, number: dict[str, Any]) -> None:
    """Sets the number at a key such as 'band[2].edge'."""
    *tables, last = key.split(".")
    place: Any = raw
    for table in tables:
        name, _, index = table.partition("[")
        place = place.setdefault(name, {}) if not index else place[name][int(index[:-1]) - 1]
    place[last] = number


def _mind_the_mix(family: Family, raw: dict[str, Any], shares: Shares, occupants: list[dict[str, float]]) -> None:
    """Carrier alloy scattering by the composition itself, and a host that is still there for the dopant."""
    scattering = raw["scattering"]
    mixed = sum(a * b for a, b in combinations(shares, 2))
    if "alloy_fraction" in scattering:
        fraction = shares[1] if len(shares) == 2 else 0.5
        scattering["alloy_fraction"] |= {"value": fraction, "unit": "1", "note": "the composition"}
        for band in raw["band"]:
            if len(shares) > 2 and "alloy_potential" in band:  # x(1−x) of three ends: carried by the potential
                potential = band["alloy_potential"]
                potential["value"] = potential["value"] * (mixed / 0.25) ** 0.5
    raw["lattice"].pop("optical_share", None)  # comes with the nodes' prefactors
    doping = raw["doping"]
    there = {element for site in occupants for element in site}
    if doping["replaces"] not in there:
        site = next(s for s in (e.occupants for e in family.data.end) if any(doping["replaces"] in o for o in s))
        index = next(i for i, o in enumerate(site) if doping["replaces"] in o)
        doping["replaces"] = max(occupants[index], key=occupants[index].__getitem__)


def _skeleton(candidate: Candidate) -> tuple[object, ...]:
    return candidate.data.carrier, tuple((band.label, band.side) for band in candidate.data.band)


def _same_occupants(node: Candidate, made: list[dict[str, float]]) -> bool:
    stated = [site.occupants for site in node.data.site]
    return len(stated) == len(made) and all(
        set(a) == set(b) and all(abs(a[e] - b[e]) < 1e-6 for e in a) for a, b in zip(stated, made, strict=True)
    )
