"""Finding and reading candidates."""

from pathlib import Path

import numpy as np
import pytest

import legwright as lw
from legwright.base.errors import InputError
from legwright.candidate.hazards import ELEMENTS, PROCESS, cautions
from legwright.candidate.library import candidates_folder, library_names, load_candidate

DEMO = Path(__file__).resolve().parents[2] / "examples" / "candidates" / "sige10-n.toml"


def test_names_are_stems_of_formula_and_carrier():
    for name in library_names():
        formula, _, carrier = name.rpartition("-")
        assert formula.isalnum()
        assert carrier == load_candidate(name).data.carrier


@pytest.mark.parametrize("name", library_names())
def test_every_library_candidate_loads_and_gives_a_figure_of_merit(name):
    candidate = load_candidate(name)
    data = candidate.data
    assert candidate.name == name
    assert data.service.data_from.si < data.service.data_to.si
    assert {band.side for band in data.band} == {"conduction", "valence"}, "minority carriers have a band"
    middle = np.sqrt(data.doping.lowest.si * data.doping.highest.si)
    made = lw.evaluate(candidate, data.service.data_to.si, middle, [1e-7, np.inf])
    assert np.all(made.zt > 0)
    # no bulk leg material that anyone has made is better: a file with a slipped unit is
    assert np.all(made.zt < 3)


@pytest.mark.parametrize("name", library_names())
def test_formula_agrees_with_the_sublattices(name):
    """The written formula, read by pymatgen, has the composition that the sites add up to."""
    from pymatgen.core import Composition

    data = load_candidate(name).data
    sites: dict[str, float] = {}
    for site in data.site:
        for element, share in site.occupants.items():
            sites[element] = sites.get(element, 0.0) + site.count * share
    written = Composition(data.formula).fractional_composition
    assert written.almost_equals(Composition(sites).fractional_composition, rtol=1e-9, atol=1e-9)


def test_a_name_and_the_path_of_its_file_are_one_material():
    by_path = load_candidate(candidates_folder() / "si-n.toml")
    assert by_path.data == load_candidate("si-n").data
    assert by_path.name == "si-n"


def test_elements_count_the_dopant():
    assert load_candidate("sige-n").elements == ("Ge", "P", "Si")


def test_an_unknown_name_offers_the_nearest():
    with pytest.raises(InputError, match="did you mean 'bisbte-p'"):
        load_candidate("bisbte-n")


def test_cautions_name_what_is_inside_once_and_the_processes_always():
    said = cautions([load_candidate("pbte-n"), load_candidate("pbte-p")])
    assert [text for text in said if text.startswith("Lead")] == [f"L{ELEMENTS['Pb'][1:]}."]
    assert any(text.startswith("Tellurium") for text in said)
    assert not any(text.startswith("Selenium") for text in said)
    assert said[-len(PROCESS) :] == PROCESS
    assert "local codes" in said[-1]


@pytest.mark.parametrize("element", ["Pb", "Te", "Se", "Tl", "Sb"])
def test_the_poisons_of_the_trade_are_listed(element):
    assert element in ELEMENTS


def test_own_file_cites_the_bibliography_beside_it_and_the_library(tmp_path):
    text = DEMO.read_text(encoding="utf-8")
    (tmp_path / "mine.toml").write_text(text, encoding="utf-8")
    with pytest.raises(InputError, match=r"mine\.toml: .*source 'workshop-notes' is in neither"):
        load_candidate(tmp_path / "mine.toml")
    (tmp_path / "more").mkdir()
    (tmp_path / "more" / "mine.toml").write_text(text, encoding="utf-8")
    (tmp_path / "more" / "sources.bib").write_text("@misc{workshop-notes,\n  title = {Notes}\n}\n")
    assert load_candidate(tmp_path / "more" / "mine.toml").name == "mine"
