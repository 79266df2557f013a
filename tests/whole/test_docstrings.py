"""Public formulas say what a user needs, and the examples in docstrings are true."""

from __future__ import annotations

import doctest
import inspect
import re
from importlib import import_module
from pkgutil import walk_packages
from types import FunctionType

import pytest

import legwright

MODULES = sorted(module.name for module in walk_packages(legwright.__path__, "legwright.") if not module.ispkg)
FORMULAS = {
    f"{module.removeprefix('legwright.')}.{name}": function
    for module in MODULES
    if module.startswith(("legwright.physics.", "legwright.leg."))
    for name, function in vars(import_module(module)).items()
    if isinstance(function, FunctionType) and function.__module__ == module and not name.startswith("_")
}

#: a paper or book with its year, another docstring that has it, or none needed
SOURCE = re.compile(r"\(?(18|19|20)\d\d\)?|[Ss]ources? (as|of|in)|sources as there|[Bb]y definition|CODATA")
UNIT = re.compile(
    r"\b(m|K|J|kg|Pa|eV|S|W|V|rad/s|nm)\b|1/m|m²|m³|1/s|Ω|dimensionless|0 … 1|per cent|fraction|as `\w+`|[Uu]nits|η"
)


@pytest.mark.parametrize("name", MODULES)
def test_docstring_examples(name):
    assert doctest.testmod(import_module(name), optionflags=doctest.ELLIPSIS).failed == 0


def lacks(function: FunctionType) -> list[str]:
    """What a formula's docstring does not say."""
    text = inspect.getdoc(function) or ""
    words, _, example = text.partition(">>>")
    code = inspect.getsource(function).split('"""', 2)[-1]
    missing = [] if example else ["an example"]
    if not SOURCE.search(words):
        missing.append("a source")
    if not UNIT.search(words):
        missing.append("units")
    if re.search(r"\braise \w", code) and "Error" not in words:
        missing.append("the error that it raises")
    return missing


@pytest.mark.parametrize("name", FORMULAS)
def test_a_public_formula_says_what_a_user_needs(name):
    assert lacks(FORMULAS[name]) == []


def test_a_silent_docstring_is_caught():
    def half(x: float) -> float:
        """Half of x.

        >>> half(2.0)
        1.0
        """
        if x < 0:
            raise ValueError("below 0")
        return x / 2

    assert lacks(half) == ["a source", "units", "the error that it raises"]


def test_there_are_examples():
    finder = doctest.DocTestFinder(exclude_empty=True)
    count = sum(len(test.examples) for name in MODULES for test in finder.find(import_module(name)))
    assert count > 300
    assert len(FORMULAS) > 90
