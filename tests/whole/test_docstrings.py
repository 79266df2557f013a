"""The examples in docstrings are true."""

import doctest
from importlib import import_module
from pkgutil import walk_packages

import pytest

import legwright

MODULES = sorted(module.name for module in walk_packages(legwright.__path__, "legwright.") if not module.ispkg)


@pytest.mark.parametrize("name", MODULES)
def test_docstring_examples(name):
    assert doctest.testmod(import_module(name), optionflags=doctest.ELLIPSIS).failed == 0


def test_there_are_examples():
    finder = doctest.DocTestFinder(exclude_empty=True)
    count = sum(len(test.examples) for name in MODULES for test in finder.find(import_module(name)))
    assert count > 40
