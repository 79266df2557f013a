"""Ten thousand spoilt briefs, candidate files and measurement tables: a result or a clear refusal, nothing else.

Each trial has a number that fixes what is spoilt. Run this file as a script to write the whole table anew (about a
quarter of an hour on two cores).
"""

from __future__ import annotations

import contextlib
import copy
import csv
import io
import json
import os
import subprocess
import sys
import tempfile
from collections import Counter
from datetime import date
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import tomli
import tomli_w
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from legwright.base.files import datasets_folder
from legwright.show.cli import run

TABLE = Path(__file__).with_name("fuzz.csv")
#: of a whole run: briefs, candidate files, tables of measurements; and how many of each as commands of their own
TRIALS = {"brief": 5000, "candidate": 3000, "measurements": 2000}
COMMANDS = {"brief": 20, "candidate": 15, "measurements": 15}
#: every so many trials CI repeats one
STRIDE = 100
ENDS = {0: "answered", 2: "refused", 3: "nothing feasible"}

BRIEF: dict[str, Any] = {
    "title": "Spoilt rig",
    "duty": {"kind": "generator", "hot_K": 700.0, "cold_K": 400.0, "maximise": "efficiency"},
    "size": {"shape": "grain", "min_nm": 20.0, "max_nm": 2000.0},
    "doping": {"min_per_cm3": 1e19, "max_per_cm3": 3e20},
    "candidates": {"use": ["sige-n"], "carrier": "either"},
    "avoid": {
        "elements": ["Tl"],
        "hazardous": False,
        "cost_above_USD_per_kg": 5000.0,
        "supply_concentration_above": 9000.0,
    },
    "leg": {
        "length_mm": 2.0,
        "contact_uohm_cm2": 1.0,
        "hot_exchanger_K_cm2_per_W": 0.5,
        "cold_exchanger_K_cm2_per_W": 0.5,
    },
}
MEASURED = """temperature [K],resistivity [mohm cm],seebeck [uV/K],thermal_conductivity [W/m/K]
300,1.0,-115,4.6
500,1.3,-150,4.3
700,1.7,-185,4.1
"""
SPOILS: list[Any] = [
    True, "", "text", "7", "nan", "K; import os", "furlong", "a" * 20_000, "\x00", "µ°\u202e", "../../etc/passwd",
    [], [1, 2], ["x"], [[[]]], {}, {"value": 1}, {"a": {"b": {"c": 1}}}, float("nan"), float("inf"), float("-inf"),
    0, -1, -0.0, 7, 1e-300, 1e-30, 1e-9, 1e-3, 1e3, 1e9, 1e30, 1e300, 2**63, 10**40, date(2031, 2, 3),
]  # fmt: skip
FACTORS = (-1.0, 1e-9, 1e-6, 1e-3, 1e-2, 0.1, 0.5, 2.0, 10.0, 100.0, 1e3, 1e6, 1e9)
CELLS = ("", "nan", "inf", "-1", "0", "1e308", "1e-308", "text", '"', ";", "12,5", "300 K", "²", "=1+1", "\x00")


def leaves(table: Any, path: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
    """Where values and tables of a parsed file stand, deepest too."""
    inside = table.items() if isinstance(table, dict) else enumerate(table) if isinstance(table, list) else ()
    return [each for key, value in inside for each in [(*path, key), *leaves(value, (*path, key))]]


def spoil(table: dict[str, Any], luck: np.random.Generator) -> dict[str, Any]:
    """One to three of its places changed in type, unit, size, name, or gone."""
    spoilt = copy.deepcopy(table)
    for _ in range(int(luck.choice([1, 1, 1, 2, 3]))):
        places = leaves(spoilt)
        *way, last = places[int(luck.integers(len(places)))]
        home = spoilt
        for step in way:
            home = home[step]
        kind = int(luck.integers(4))
        if kind == 0:
            del home[last]
        elif kind == 1 and isinstance(home, dict):
            home[f"{last}{luck.choice(['', 's', '_K', ' '])}x"] = home.pop(last)
        elif kind == 2 and isinstance(home[last], float | int):
            home[last] = home[last] * float(luck.choice(FACTORS))
        else:
            home[last] = copy.deepcopy(SPOILS[int(luck.integers(len(SPOILS)))])
    return spoilt


def spoil_lines(text: str, luck: np.random.Generator) -> str:
    """A table with cells spoilt, lines doubled, lost or mixed, or a header changed."""
    cells = [line.split(",") for line in text.strip().splitlines()]
    for _ in range(int(luck.choice([1, 1, 2]))):
        row = int(luck.integers(len(cells)))
        column = int(luck.integers(len(cells[row]))) if cells[row] else 0
        kind = int(luck.integers(6))
        if kind == 0 and len(cells) > 1:
            del cells[row]
        elif kind == 1:
            cells.insert(row, list(cells[row]))
        elif kind == 2:
            cells[row] = cells[row][::-1]
        elif kind == 3 and cells[row]:
            cells[row].pop()
        elif kind == 4 and cells[row] and row:
            with contextlib.suppress(ValueError):
                cells[row][column] = repr(float(cells[row][column]) * float(luck.choice(FACTORS)))
        elif cells[row]:
            cells[row][column] = CELLS[int(luck.integers(len(CELLS)))]
    return "\n".join(",".join(line) for line in cells) + "\n"


def case(kind: str, number: int, folder: Path) -> list[str]:
    """The command of a trial, its spoilt file written to the folder."""
    luck = np.random.default_rng([number, *kind.encode()])
    if kind == "brief":
        path = folder / "brief.toml"
        path.write_bytes(as_toml(spoil(BRIEF, luck)))
        return ["rank", str(path), "--json", "--csv", str(folder / "rows.csv")]
    if kind == "candidate":
        files = sorted((datasets_folder() / "candidates").glob("*.toml"))
        path = folder / "mine-n.toml"
        path.write_bytes(as_toml(spoil(tomli.loads(files[number % len(files)].read_text("utf-8")), luck)))
        point = ["--temperature", "400", "--doping", "2e19", "--size", "100"]
        return ["sheet", str(path), *point, "--json", "--csv", str(folder / "rows.csv")]
    path = folder / "mine.csv"
    path.write_text(spoil_lines(MEASURED, luck), encoding="utf-8")
    return ["fit", str(path), "--like", "sige-n", "--into", str(folder / "made-n.toml"), "--json"]


def as_toml(table: dict[str, Any]) -> bytes:
    """TOML, or where TOML has no way to say it, what a careless editor would leave."""
    try:
        return tomli_w.dumps(table).encode()
    except (TypeError, ValueError, UnicodeEncodeError):
        return repr(table).encode("utf-8", "replace")


def verdict(code: int, out: str, err: str, folder: Path, before: set[str], arguments: list[str]) -> str:
    """How a trial ended; AssertionError where it is neither a result nor a clear refusal."""
    told = f"{arguments} → {code}\n{err[:600]}"
    assert code in ENDS, told
    assert "Traceback" not in err, told
    made = {path.name for path in folder.iterdir()} - before
    if code == 2:
        assert out == "", told
        assert err.startswith("legwright: "), told
        assert err.count("\n") == 1, told
        assert not made, told
    else:
        json.loads(out, parse_constant=lambda word: pytest.fail(f"{word} is not JSON"))
        assert made <= {"rows.csv", "made-n.toml"}, told
    return ENDS[code]


def trial(kind: str, number: int) -> str:
    """One trial in this process."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        arguments = case(kind, number, folder)
        before = {path.name for path in folder.iterdir()}
        out, err = io.StringIO(), io.StringIO()
        with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
            code = run(arguments)
        return verdict(code, out.getvalue(), err.getvalue(), folder, before, arguments)


def command(kind: str, number: int) -> str:
    """One trial as a command of its own."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        arguments = case(kind, number, folder)
        before = {path.name for path in folder.iterdir()}
        program = [sys.executable, "-c", "from legwright.show.cli import main; main()", *arguments]
        said = subprocess.run(
            program, capture_output=True, text=True, encoding="utf-8", env=os.environ, check=False
        )
        return verdict(said.returncode, said.stdout, said.stderr, folder, before, arguments)


@pytest.mark.evidence
@pytest.mark.parametrize("kind", TRIALS)
def test_spoilt_files_end_in_a_result_or_a_clear_refusal(kind):
    with TABLE.open(encoding="utf-8") as lines:
        row = next(row for row in csv.DictReader(lines) if row["kind"] == kind)
    assert int(row["in one process"]) == TRIALS[kind]
    assert int(row["as commands"]) == COMMANDS[kind]
    assert int(row["refused"]) > TRIALS[kind] / 2  # most spoilt files are no good, and are told so
    assert int(row["answered"]) > 0
    for number in range(0, TRIALS[kind], STRIDE):
        assert trial(kind, number)
    assert command(kind, 1)


JUNK = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=30),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=10), inner, max_size=4),
    max_leaves=12,
)


@settings(max_examples=150, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow])
@given(text=st.text(max_size=300) | JUNK.map(str) | st.dictionaries(st.sampled_from(sorted(BRIEF)), JUNK).map(str))
def test_junk_is_refused(text):
    with tempfile.TemporaryDirectory() as name:
        path = Path(name) / "junk.toml"
        path.write_bytes(text.encode("utf-8", "surrogatepass"))
        for arguments in (["rank", str(path)], ["fit", str(path), "--like", "sige-n"]):
            out, err = io.StringIO(), io.StringIO()
            with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
                assert run(arguments) == 2
            assert verdict(2, out.getvalue(), err.getvalue(), Path(name), {"junk.toml"}, arguments)


@settings(max_examples=150, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow])
@given(section=st.sampled_from(sorted(BRIEF)), value=JUNK)
def test_a_brief_with_junk_for_a_table_is_refused_or_served(section, value):
    with tempfile.TemporaryDirectory() as name:
        path = Path(name) / "brief.toml"
        path.write_bytes(as_toml({**BRIEF, section: value}))
        out, err = io.StringIO(), io.StringIO()
        with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
            code = run(["rank", str(path), "--json"])
        assert verdict(code, out.getvalue(), err.getvalue(), Path(name), {"brief.toml"}, ["rank", section])


if __name__ == "__main__":
    from joblib import Parallel, delayed

    with TABLE.open("w", encoding="utf-8", newline="") as stream:
        writer = csv.writer(stream, lineterminator="\n")
        writer.writerow(["kind", "in one process", "as commands", *ENDS.values()])
        for each, count in TRIALS.items():
            ended = Counter(Parallel(n_jobs=2)(delayed(trial)(each, number) for number in range(count)))
            ended.update(command(each, number) for number in range(COMMANDS[each]))
            writer.writerow([each, count, COMMANDS[each], *(ended[end] for end in ENDS.values())])
