"""Asking for help, or naming the package, loads nothing heavy."""

import subprocess
import sys

import pytest

HEAVY = (
    "{'numpy', 'scipy', 'pandas', 'pymatgen', 'skopt', 'sklearn', 'matplotlib', 'pint', 'rich', 'joblib', 'jinja2'}"
)
COUNT = f"import sys; print(sorted({HEAVY} & {{name.split('.')[0] for name in sys.modules}}))"


def loaded_after(program: str) -> str:
    done = subprocess.run(
        [sys.executable, "-c", f"{program}\n{COUNT}"], capture_output=True, text=True, timeout=120, check=True
    )
    return done.stdout.splitlines()[-1]


@pytest.mark.parametrize(
    "arguments",
    [
        ["--help"],
        ["rank", "--help"],
        ["peak", "--help"],
        ["sheet", "--help"],
        ["candidates", "--help"],
        ["draw", "--help"],
        ["peek"],
        ["explain"],
        ["explain", "window-open"],
    ],
    ids=" ".join,
)
def test_help_is_thin(arguments):
    assert loaded_after(f"from legwright.show.cli import run; run({arguments})") == "[]"


def test_import_is_thin():
    assert loaded_after("import legwright; dir(legwright); legwright.__version__") == "[]"


def test_the_count_does_see_what_is_loaded():
    assert "'numpy'" in loaded_after("import legwright; legwright.physics")
