"""A parsed table becomes a checked object, or one sentence about its first fault."""

from typing import Literal

import pytest
from pydantic import Field, model_validator

from legwright.base.errors import InputError
from legwright.base.reading import Table, read_as


class Part(Table):
    """An inner table."""

    weight_kg: float = Field(gt=0)
    colour: Literal["red", "green"] = "red"


class Machine(Table):
    """An outer one."""

    name: str
    part: tuple[Part, ...]
    spare: Part | None = None

    @model_validator(mode="after")
    def _named(self) -> "Machine":
        if self.name == "nameless":
            raise ValueError("name must not be 'nameless'")
        return self


def data(**changes: object) -> dict[str, object]:
    return {"name": "press", "part": [{"weight_kg": 2.0}, {"weight_kg": 3.0}], **changes}


def refusal(**changes: object) -> str:
    with pytest.raises(InputError) as caught:
        read_as(Machine, data(**changes), "machine.toml")
    return str(caught.value)


def test_arrays_become_tuples_and_whole_numbers_floats():
    made = read_as(Machine, data(part=[{"weight_kg": 2}]), "machine.toml")
    assert made.part == (Part(weight_kg=2.0),)
    assert isinstance(made.part[0].weight_kg, float)


def test_the_object_is_frozen():
    made = read_as(Machine, data(), "machine.toml")
    with pytest.raises(ValueError, match="frozen"):
        made.name = "other"


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"nam": "x"}, "machine.toml: nam: unknown key; did you mean 'name'? (allowed: name, part, spare)"),
        ({"spare": {"weight": 1.0}}, "machine.toml: spare.weight: unknown key; did you mean 'weight_kg'?"),
        ({"part": [{"weight_kg": 1.0}, {}]}, "machine.toml: part[2].weight_kg: is missing"),
        ({"part": [{"weight_kg": 1.0, "wieght_kg": 1.0}]}, "machine.toml: part[1].wieght_kg: unknown key; did you"),
        ({"part": [{"weight_kg": "1.0"}]}, "machine.toml: part[1].weight_kg: value '1.0': "),
        ({"part": [{"weight_kg": True}]}, "machine.toml: part[1].weight_kg: value True: "),
        ({"part": [{"weight_kg": -1.0}]}, "machine.toml: part[1].weight_kg: value -1.0: "),
        (
            {"part": [{"weight_kg": float("nan")}]},
            "machine.toml: part[1].weight_kg: value nan is not a finite number",
        ),
        (
            {"part": [{"weight_kg": float("inf")}]},
            "machine.toml: part[1].weight_kg: value inf is not a finite number",
        ),
        (
            {"spare": {"weight_kg": 1.0, "colour": "gren"}},
            "spare.colour: value 'gren' is not allowed; did you mean",
        ),
        ({"name": "nameless"}, "machine.toml: name must not be 'nameless'"),
    ],
)
def test_the_sentence(changes, message):
    assert message in refusal(**changes)
    assert "\n" not in refusal(**changes)


def test_an_unknown_key_is_told_first():
    assert "unknown key" in refusal(name=3, nmae="press")
