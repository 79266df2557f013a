"""The library of candidates: finding, reading, listing."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache, cached_property
from html import escape
from pathlib import Path

from pydantic import BaseModel

from legwright.base.errors import InputError, nearest
from legwright.base.files import datasets_folder, read_toml
from legwright.base.reading import read_as
from legwright.candidate.composition import Disorder, disorder
from legwright.candidate.model import CandidateFile, numbers
from legwright.candidate.sources import source_keys


@dataclass(frozen=True, eq=False)
class Candidate:
    """A material under consideration: its name, its file and what the file says.

    `relatives`: for a member of a family, the candidates whose anchors fix its prefactors, each with its weight.
    """

    name: str
    path: Path
    data: CandidateFile
    relatives: tuple[tuple[Candidate, float], ...] = ()

    @cached_property
    def disorder(self) -> Disorder:
        """Mean mass and disorder from the formula's sublattices."""
        return disorder(self.data.site)

    @cached_property
    def elements(self) -> tuple[str, ...]:
        """Elements of formula and dopant, sorted."""
        inside = {element for site in self.data.site for element in site.occupants}
        return tuple(sorted(inside | {self.data.doping.dopant}))

    @cached_property
    def basis_counts(self) -> dict[str, int]:
        """How many of the file's numbers are measured, published, calibrated, practice, from memory."""
        counts: dict[str, int] = {}
        for _, number in numbers(self.data):
            counts[number.basis] = counts.get(number.basis, 0) + 1
        return counts

    def _repr_html_(self) -> str:
        """For notebooks: what it is, and where its numbers came from."""
        data = self.data
        rows = {
            "title": data.title,
            "formula": data.formula,
            "carrier": data.carrier,
            "direction": data.direction,
            "highest temperature [K]": f"{data.service.highest_temperature.si:g}",
            **{f"numbers {basis}": str(count) for basis, count in sorted(self.basis_counts.items())},
        }
        cells = "".join(f'<tr><th scope="row">{escape(k)}</th><td>{escape(v)}</td></tr>' for k, v in rows.items())
        return f"<table><caption>{escape(self.name)}</caption><tbody>{cells}</tbody></table>"


def candidates_folder() -> Path:
    """Where the library's candidate files lie."""
    return datasets_folder() / "candidates"


@cache
def library_names() -> tuple[str, ...]:
    """Names of all library candidates, sorted."""
    return tuple(sorted(path.stem for path in candidates_folder().glob("*.toml")))


def load_candidate(name_or_path: str | Path) -> Candidate:
    """The candidate of that library name, in that file, or at a composition of a family ('si-ge-n:0.3').

    Raises InputError, naming file, key, value and what is allowed, when it cannot be used.

    >>> load_candidate("si-n").data.carrier
    'n'
    """
    from legwright.candidate import family

    text = str(name_or_path)
    if composed := family.family_of(text):
        name, shares = composed
        return family.member(family.load_family(name), shares)
    if path := named_file(text, library_names(), candidates_folder()):
        return _read(path, text, stamp(path), stamp(path.parent / "sources.bib"))
    if text in family.family_names():
        raise InputError(f"'{text}' is a family: give a composition, such as '{text}:0.2'", slug="unknown-name")
    raise InputError(f"no candidate '{text}' in the library; {nearest(text, library_names())}", slug="unknown-name")


def named_file(text: str, names: tuple[str, ...], folder: Path) -> Path | None:
    """The library file of that name in `folder`, or the file at that path; None where it is neither."""
    if text in names:
        return folder / f"{text}.toml"
    return Path(text) if "/" in text or text.endswith(".toml") or stamp(Path(text)) else None


def stamp(path: Path) -> tuple[int, int] | None:
    """What changes when a file is edited: time of change and size; None where there is no file."""
    try:
        found = path.stat()
    except (OSError, ValueError):
        return None
    return found.st_mtime_ns, found.st_size


@cache
def _read(path: Path, shown: str, *_stamps: tuple[int, int] | None) -> Candidate:
    data = read_as(CandidateFile, read_toml(path, shown), shown)
    check_sources(data, path, shown)
    candidate = Candidate(path.stem, path.resolve(), data)
    try:
        _ = candidate.disorder
    except InputError as error:
        raise InputError(str(error), file=shown, key="site", slug=error.slug) from error
    return candidate


def check_sources(data: BaseModel, path: Path, shown: str) -> None:
    """InputError for a number whose source stands in no bibliography that the file may cite."""
    known = source_keys(path.parent)
    for key, number in numbers(data):
        if number.source not in known:
            raise InputError(
                f"source '{number.source}' is in neither the library's sources.bib nor one beside the file; "
                f"{nearest(number.source, known)}",
                file=shown,
                key=key,
                slug="unknown-name",
            )
