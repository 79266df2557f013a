"""Tables of measurements: what is read, and how a faulty one is met."""

from __future__ import annotations

import math

import numpy as np
import pytest

from legwright.base.errors import InputError
from legwright.candidate.measurements import read_measurements

GOOD = """sample,temperature [K],resistivity [mohm cm],electrical_conductivity [S/cm],\
seebeck [uV/K],thermal_conductivity [W/m/K],size [nm]
A,300,1.0,,-200,1.5,bulk
A,400,,800,-220,1.4,20
"""


@pytest.fixture
def table(tmp_path):
    def write(text: str):
        path = tmp_path / "mine.csv"
        path.write_text(text, encoding="utf-8")
        return path

    return write


def test_units_of_the_header_are_taken_to_si(table):
    read = read_measurements(table(GOOD), "n")
    assert read.conductivity == pytest.approx([1e5, 8e4], rel=1e-12)
    assert read.of("seebeck") == pytest.approx([-2e-4, -2.2e-4], rel=1e-12)
    assert read.of("size")[0] == math.inf
    assert read.of("size")[1] == pytest.approx(2e-8, rel=1e-12)
    assert np.all(np.isnan(read.of("zt")))
    assert read.word("sample") == ("A", "A")
    assert read.word("note") == ("", "")
    assert read.rows == (2, 3)


FAULTS = {
    "no unit": ("seebeck [uV/K]", "seebeck", "says no unit"),
    "another unit": ("seebeck [uV/K]", "seebeck [W/m/K]", "not a unit that converts"),
    "celsius in the header": ("temperature [K]", "temperature [degC]", "add 273.15"),
    "unknown column": ("seebeck [uV/K]", "seebek [uV/K]", "did you mean 'seebeck'"),
    "a gap filled with zero": ("-220", "0", "row 3: the Seebeck coefficient is 0"),
    "not a number": ("-220", "n.a.", "row 3: 'seebeck' is 'n.a.', not a number"),
    "wrong sign": ("-220", "220", "row 3: the Seebeck coefficient has the wrong sign"),
    "no such Seebeck coefficient": ("-220", "-2.2e5", "row 3.*are two columns swapped"),
    "celsius as kelvin": ("A,300", "A,-20", "row 2.*Celsius"),
    "a gap": ("A,400,,800,-220,1.4,20", "A,400,,,,,20", "row 3: gives nothing measured"),
    "no temperature": ("A,400", "A,", "row 3: has no temperature"),
    "a row twice": ("A,400,,800,-220,1.4,20", "A,300,1.0,,-200,1.5,bulk", "row 3: repeats row 2"),
    "a quantity twice": ("A,400,,800", "A,400,1.25,800", None),
    "a comma": ("-220", "-220,0", "row 3: 8 cells under 7 headers"),
    "a conductivity that heat forbids": ("A,300,1.0", "A,300,0.01", "row 2: thermal conductivity 1.5"),
    "swapped columns": (
        "seebeck [uV/K],thermal_conductivity [W/m/K]",
        "thermal_conductivity [W/m/K],seebeck [uV/K]",
        "row 2: 'thermal_conductivity' = -200 is not what a solid has",
    ),
}


@pytest.mark.parametrize(("old", "new", "message"), FAULTS.values(), ids=FAULTS.keys())
def test_a_faulty_table_is_refused_with_row_and_cause(old, new, message, table):
    assert old in GOOD
    path = table(GOOD.replace(old, new, 1))
    if message is None:  # two columns of one row that are different quantities for the reader: σ and ρ both allowed
        assert len(read_measurements(path, "n")) == 2
        return
    with pytest.raises(InputError, match=message) as caught:
        read_measurements(path, "n")
    assert "mine.csv" in str(caught.value)


def test_even_steps_from_room_temperature_in_celsius_are_noticed(table):
    rows = "".join(f"{t},-{100 + t / 10}\n" for t in range(25, 425, 25))
    with pytest.raises(InputError, match="degrees Celsius given as kelvin"):
        read_measurements(table("temperature [K],seebeck [uV/K]\n" + rows), "n")


@pytest.mark.parametrize(
    ("first", "last", "celsius"),
    [(25, 400, True), (50, 500, True), (50, 300, False), (100, 400, False), (300, 800, False)],
)
def test_a_cryostat_s_steps_are_not_taken_for_celsius(first, last, celsius, table):
    rows = "".join(f"{t},-{100 + t / 10}\n" for t in range(first, last + 1, 25))
    path = table("temperature [K],seebeck [uV/K]\n" + rows)
    if celsius:
        with pytest.raises(InputError, match="degrees Celsius given as kelvin"):
            read_measurements(path, "n")
    else:
        assert len(read_measurements(path, "n")) == len(rows.splitlines())


def test_one_quantity_in_two_columns_must_not_be_filled_twice(table):
    text = "temperature [K],resistivity [mohm cm],resistivity [ohm m]\n300,1.0,1e-5\n"
    with pytest.raises(InputError, match=r"row 2: 'resistivity' is given twice"):
        read_measurements(table(text))


@pytest.mark.parametrize("text", ["", "temperature [K],seebeck [uV/K]\n", "seebeck [uV/K]\n100\n", "a;b\n1;2\n"])
def test_what_is_no_table_is_refused(text, table):
    with pytest.raises(InputError, match=r"mine\.csv"):
        read_measurements(table(text))
