"""The tables of published samples: every row says what, where from and how it is known."""

import numpy as np
import pytest

from legwright.base.files import datasets_folder
from legwright.candidate.family import family_names, family_of
from legwright.candidate.library import candidates_folder, library_names, load_candidate
from legwright.candidate.measurements import read_measurements
from legwright.candidate.sources import source_keys

FILES = sorted((datasets_folder() / "measurements").glob("*.csv"))
SHAPES = {"grains": {"grain"}, "wires": {"wire"}, "films": {"film"}, "bulk": {"grain"}}
BASES = {"abstract", "table", "handbook table", "from memory", "quoted in another paper"}
#: materials with a stated nanometre size or in a published table that no candidate describes
WITHOUT_CANDIDATE = {"bi-n", "crsi2-p", "fe2val-n", "batio3-n", "bi2te2se-n", "bi2se3-n"}


def test_there_are_tables_of_bulk_grains_wires_and_films():
    assert {path.stem for path in FILES} == {"bulk", "films", "grains", "wires"}


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_every_row_says_candidate_source_shape_size_basis_and_role(path):
    table, known = read_measurements(path), source_keys(candidates_folder())
    for i, row in enumerate(table.rows):
        where = f"{path.name}, row {row}"
        name = table.word("candidate")[i]
        family = family_of(name)
        assert name in library_names() or name in WITHOUT_CANDIDATE or (family and family[0] in family_names()), (
            where
        )
        assert table.word("sample")[i], where
        assert table.word("source")[i] in known, where
        assert table.word("basis")[i] in BASES, where
        assert table.word("shape")[i] in SHAPES[path.stem], where
        assert set(filter(None, table.word("role")[i].split(", "))) <= {"undoped", "unlike", "seen", "fitted"}, (
            where
        )
        assert np.isinf(table.of("size")[i]) == (path.stem == "bulk"), where
        assert table.word("note")[i] or "unlike" not in table.word("role")[i], where


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_seebeck_coefficients_have_the_sign_of_their_candidate(path):
    table = read_measurements(path)
    for name, thermopower in zip(table.word("candidate"), table.of("seebeck"), strict=True):
        if np.isfinite(thermopower):
            assert (thermopower < 0) == (load_candidate(name).data.carrier == "n"), (path.name, name)
