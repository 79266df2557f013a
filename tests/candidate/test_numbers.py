"""Every number of the library says its unit, spread, source and basis, and they hold water."""

from pathlib import Path
from typing import Any, get_args

import bibtexparser
import pytest
import tomli

from legwright.base.files import datasets_folder
from legwright.base.units import si_factor
from legwright.candidate.family import families_folder, family_names, load_family
from legwright.candidate.library import candidates_folder, library_names, load_candidate
from legwright.candidate.model import numbers
from legwright.candidate.number import Basis
from legwright.candidate.priors import load_priors
from legwright.candidate.sources import bibliography, source_keys

DEMO = Path(__file__).resolve().parents[2] / "examples" / "candidates"
FILES = [
    *sorted(candidates_folder().glob("*.toml")),
    *sorted(DEMO.glob("*.toml")),
    *sorted(families_folder().glob("*.toml")),
    datasets_folder() / "priors.toml",
]

#: what may stand as a bare figure: how the file is written, and the chemical formula
BARE = {"schema", "count", "occupants", "shares", "most"}


def walk(value: Any, key: str = "") -> list[tuple[str, Any]]:
    """Each number of a parsed file with its key: tables that hold a value, and bare figures."""
    if isinstance(value, dict) and "value" in value:
        return [(key, value)]
    if isinstance(value, dict):
        return [
            found for name, inner in value.items() if name not in BARE for found in walk(inner, f"{key}.{name}")
        ]
    if isinstance(value, list):
        return [found for i, inner in enumerate(value) for found in walk(inner, f"{key}[{i + 1}]")]
    return [(key, value)] if isinstance(value, int | float) and not isinstance(value, bool) else []


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_no_number_without_its_origin(path):
    """Reads the file by itself, not through the program's own objects."""
    found = walk(tomli.loads(path.read_text(encoding="utf-8")))
    assert found
    for key, number in found:
        assert isinstance(number, dict), f"{key}: a bare figure"
        assert number.keys() >= {"value", "unit", "spread", "source", "basis"}, key
        assert number["spread"] >= 0, key
        assert number["basis"] in get_args(Basis), key
        assert number["unit"], f"{key}: a pure number has unit '1'"


@pytest.mark.parametrize("name", library_names())
def test_the_program_sees_all_the_numbers_of_the_file(name):
    seen = {key for key, _ in numbers(load_candidate(name).data)}
    text = (candidates_folder() / f"{name}.toml").read_text(encoding="utf-8")
    written = {key.lstrip(".") for key, _ in walk(tomli.loads(text))}
    assert seen == written


@pytest.mark.parametrize("name", library_names())
def test_units_convert_and_signed_numbers_have_an_absolute_spread(name):
    for key, number in numbers(load_candidate(name).data):
        by_hand = number.value * si_factor(number.unit, number.si_unit)
        assert number.si == pytest.approx(by_hand, rel=1e-15, abs=0), key
        if number.value <= 0:
            assert number.spread_unit is not None, f"{key}: a share of zero or of a negative number says nothing"
        if number.spread_unit is not None:
            assert si_factor(number.spread_unit, number.si_unit) > 0, key


def test_every_cited_source_is_in_the_bibliography():
    entries = bibliography(candidates_folder())
    cited = {n.source for name in library_names() for _, n in numbers(load_candidate(name).data)}
    cited |= {number.source for _, number in numbers(load_priors())}
    cited |= {number.source for name in family_names() for _, number in numbers(load_family(name).data)}
    assert cited <= entries.keys()


def test_the_bibliography_parses_and_its_entries_are_whole():
    text = (datasets_folder() / "sources.bib").read_text(encoding="utf-8")
    entries = bibtexparser.loads(text).entries
    keys = [entry["ID"] for entry in entries]
    assert len(keys) == len(set(keys)), "a key twice"
    assert set(keys) == source_keys(candidates_folder()), "the quick reader of keys and the parser agree"
    for entry in entries:
        needed = {
            "article": {"author", "title", "journal", "volume", "year"},
            "book": {"title", "publisher", "year"},
        }
        missing = needed.get(entry["ENTRYTYPE"], {"title"}) - entry.keys()
        assert not missing, f"{entry['ID']}: {missing}"
        if entry["ENTRYTYPE"] == "article":
            assert 1900 <= int(entry["year"]) <= 2030


def test_one_line_a_source():
    entries = bibliography(DEMO)
    assert set(entries) == source_keys(DEMO)
    assert not [key for key, text in entries.items() if "\n" in text or not text]
    assert "Physical Review 131" in entries["abeles1963"]
    assert "(1963)" in entries["abeles1963"]


def test_priors_are_those_of_the_grain_law():
    """c = 1 ± 30 %, s = 0.5 with the spread of a uniform prior over 0 to 1, 1/√12; reflection 0.3 ± 0.2."""
    priors = load_priors()
    assert priors.grain_law.exponent.value == 0.5
    assert priors.grain_law.exponent.spread == pytest.approx(12**-0.5, abs=0.005)  # written with two digits
    assert (priors.grain_law.prefactor.value, priors.grain_law.prefactor.spread) == (1.0, 0.3)
    assert (priors.reflection.electrons.value, priors.reflection.electrons.spread) == (0.3, 0.2)


@pytest.mark.parametrize("name", library_names())
def test_a_choice_of_the_library_says_how_it_was_made(name):
    """Where no publication stands behind a number, a note does."""
    silent = [key for key, n in numbers(load_candidate(name).data) if n.source == "this-library" and not n.note]
    assert not silent
