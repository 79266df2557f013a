"""Public formulas say what a user needs, and the examples in docstrings are true."""

from __future__ import annotations

import ast
import dataclasses
import doctest
import inspect
import re
import textwrap
from functools import cache
from importlib import import_module
from pkgutil import walk_packages
from types import FunctionType, ModuleType

import pytest

import legwright

MODULES = sorted(module.name for module in walk_packages(legwright.__path__, "legwright.") if not module.ispkg)
ROOMS = ("legwright.physics.", "legwright.leg.", "legwright.candidate.composition")


def made_in(module: str) -> dict[str, object]:
    """What a module defines itself and shows, by name."""
    own = {name: one for name, one in vars(import_module(module)).items() if not name.startswith("_")}
    return {name: one for name, one in own.items() if getattr(one, "__module__", None) == module}


def a_function(one: object) -> bool:
    """Also behind a cache."""
    return callable(one) and isinstance(inspect.unwrap(one), FunctionType)


PUBLIC = {
    f"{module.removeprefix('legwright.')}.{name}": one
    for module in MODULES
    if module.startswith(ROOMS)
    for name, one in made_in(module).items()
}
FORMULAS = {name: one for name, one in PUBLIC.items() if a_function(one)}
RECORDS = {name: one for name, one in PUBLIC.items() if inspect.isclass(one) and dataclasses.is_dataclass(one)}
BY_LAST_NAME = {name.rpartition(".")[2]: one for name, one in FORMULAS.items()}

#: a paper, book or standard with its year, or what needs none
SOURCE = re.compile(r"\bSources?\b.*\b(18|19|20)\d\d\b|[Bb]y definition|CODATA", re.DOTALL)
_UNIT = r"(?:1/)?\(?(?:rad|kg|Pa|K|J|W|V|S|A|C|H|Ω|m|s)(?:[²³]|\b)|1/[ms][²³]?"
#: set off as the house does it: "…, J:", "(m, > 0)", "in kg"; or a plain number, said to be one
UNITS = re.compile(rf"(?:[(,;]|\bin)\s*(?:{_UNIT})(?!\s*[=_])|dimensionless|0 … 1|per cent|k_B T\)|\bSI\b")
SHAPES = re.compile(r"broadcast|\bshapes?\b|\bax[ei]s\b|\bone of each\b|\(\.\.\., ")
NUMBERS = re.compile(r"Array|float")


@pytest.mark.parametrize("name", MODULES)
def test_docstring_examples(name):
    assert doctest.testmod(import_module(name), optionflags=doctest.ELLIPSIS).failed == 0


def words(one: object) -> str:
    """The docstring before its example."""
    return (inspect.getdoc(one) or "").partition(">>>")[0]


def told(one: object, *topics: str, before: tuple[object, ...] = ()) -> str:
    """A docstring, and those to which it sends the reader for any of the topics: "sources as `held_back`"."""
    text = words(one)
    said = [text]
    for clause, name in re.findall(r"([^.;:]*?)\bas\s+`(?:\w+\.)?(\w+)`", text):
        there = BY_LAST_NAME.get(name)
        if there is not None and there not in before and any(re.search(topic, clause) for topic in topics):
            said.append(told(there, *topics, before=(*before, one)))
    return "\n".join(said)


@cache
def tree(function: FunctionType) -> ast.AST:
    return ast.parse(textwrap.dedent(inspect.getsource(function)))


def uses(function: FunctionType) -> set[object]:
    """Functions of the house that the body names, called or handed on."""
    around = inspect.unwrap(function).__globals__
    found = set()
    for node in ast.walk(tree(function)):
        one = around.get(node.id) if isinstance(node, ast.Name) else None
        if isinstance(node, ast.Attribute) and isinstance(node.value, ast.Name):
            module = around.get(node.value.id)
            one = getattr(module, node.attr, None) if isinstance(module, ModuleType) else None
        if a_function(one) and one.__module__.startswith(("legwright.", function.__module__)):
            found.add(one)
    return found


def raises(function: FunctionType, near: bool = False, before: tuple[object, ...] = ()) -> set[str]:
    """Errors that a call can end in: of its body and all that it uses; `near`: of its private helpers alone."""
    nodes = list(ast.walk(tree(function)))
    made = [node.exc.func for node in nodes if isinstance(node, ast.Raise) and isinstance(node.exc, ast.Call)]
    own = {name.id for name in made if isinstance(name, ast.Name)}
    caught = [node.type for node in nodes if isinstance(node, ast.ExceptHandler) and node.type]
    stopped = {name.id for kinds in caught for name in ast.walk(kinds) if isinstance(name, ast.Name)}
    for one in uses(function) - {function, *before}:
        if one.__name__.startswith("_") or not near:
            own |= raises(one, near, (*before, function)) - stopped
    return own


def numbers(function: FunctionType) -> list[str]:
    """Arguments that are numbers, or arrays of them."""
    return [name for name, kind in inspect.get_annotations(function).items() if NUMBERS.search(str(kind))]


def unnamed(names: list[str], text: str) -> list[str]:
    return [name for name in names if not re.search(rf"(?<!\w){name}(?!\w)", text)]


def lacks(function: FunctionType) -> list[str]:
    """What a formula's docstring does not say.

    A function that cannot raise says so by its silence; one that can names each error of its own, and at least
    one of those that come from the functions it calls.
    """
    arguments = [name for name in numbers(inspect.unwrap(function)) if name != "return"]
    explained = told(function, "[Aa]rguments", "[Uu]nits")
    missing = [f"what {name} is" for name in unnamed(arguments, explained)]
    if not any(example.want for example in doctest.DocTestParser().get_examples(inspect.getdoc(function) or "")):
        missing.append("an example")
    if not SOURCE.search(told(function, "[Ss]ources?")):
        missing.append("a source")
    if not UNITS.search(explained):
        missing.append("units")
    if arguments and not SHAPES.search(told(function, "[Aa]rguments", "[Ss]hapes")):
        missing.append("shapes")
    errors = set(re.findall(r"\w+Error", told(function, "[Ee]rrors?", "Error")))
    missing += [f"its {error}" for error in sorted(raises(function, near=True) - errors)]
    if raises(function) and not errors:
        missing.append("an error of what it calls")
    return missing


@pytest.mark.parametrize("name", FORMULAS)
def test_a_public_formula_says_what_a_user_needs(name):
    assert lacks(FORMULAS[name]) == []


@pytest.mark.parametrize("name", RECORDS)
def test_a_public_record_names_its_fields_and_their_units(name):
    record = RECORDS[name]
    assert unnamed([field.name for field in dataclasses.fields(record)], words(record)) == []
    assert UNITS.search(words(record))


def _checked(x: float) -> float:
    if x < 0:
        raise ValueError("below 0")
    return x


def whole(x: float) -> float:
    """x itself (m), any shape; ValueError below 0. By definition.

    >>> whole(1.0)
    1.0
    """
    return _checked(x)


def silent(x: float, factor: float) -> float:
    """Half of x.

    >>> y = silent(2.0, 1.0)
    """
    if x < 0:
        raise KeyError("below 0")
    return whole(x) / 2 * factor


@pytest.mark.parametrize(
    ("said", "left_out"),
    [
        ("x itself", "what x is"),
        (">>> whole(1.0)\n    1.0\n", "an example"),
        ("By definition.", "a source"),
        ("(m)", "units"),
        (", any shape", "shapes"),
        ("; ValueError below 0", "its ValueError"),
    ],
)
def test_each_part_left_out_is_caught(said, left_out, monkeypatch):
    """Taken out of a docstring that has it all, it is missed."""
    assert lacks(whole) == []
    assert said in whole.__doc__
    monkeypatch.setattr(whole, "__doc__", whole.__doc__.replace(said, ""))
    assert left_out in lacks(whole)


def test_a_silent_docstring_is_caught():
    missing = [
        "what factor is",
        "an example",
        "a source",
        "units",
        "shapes",
        "its KeyError",
        "an error of what it calls",
    ]
    assert lacks(silent) == missing


def test_errors_are_found_through_helpers_caches_and_callees_unless_caught():
    physics = "physics."
    assert raises(FORMULAS[physics + "boundaries.wire_suppression"], near=True) == {"ValueError"}  # in _suppression
    assert "InputError" in raises(FORMULAS[physics + "crystal.crystal"], near=True)  # behind a cache
    assert "ValueError" in raises(FORMULAS[physics + "carriers.held_back"])  # called by another name
    assert raises(FORMULAS[physics + "bands.kane_gamma"]) == set()
    assert "AssertionError" in raises(FORMULAS["leg.installed.best_running"])


def test_there_are_examples():
    finder = doctest.DocTestFinder(exclude_empty=True)
    count = sum(len(test.examples) for name in MODULES for test in finder.find(import_module(name)))
    assert count > 300
    assert len(FORMULAS) > 100
    assert len(RECORDS) > 20
