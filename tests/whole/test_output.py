"""What the verbs print: strict JSON with the agreed keys, CSV, Markdown, plain tables."""

import csv
import os
import re
import subprocess
import sys
from importlib.metadata import version
from pathlib import Path

import pytest

import legwright as lw

SHEET = ("sheet", "sige-n", "--temperature", "700", "--doping", "1e20", "--size", "50")
PEAK = ("peak", "sige-n", "--temperature", "700", "--doping", "1e20")
WHY = ("why", *SHEET[1:])
VERBS = {
    "sheet": SHEET,
    "peak": PEAK,
    "why": WHY,
    "candidates": ("candidates",),
    "one candidate": ("candidates", "si-n"),
}

SHEET_FLOATS = {
    "temperature_K",
    "doping_per_cm3",
    "size_nm",
    "electrical_conductivity_S_per_m",
    "seebeck_uV_per_K",
    "electronic_thermal_conductivity_W_per_mK",
    "bipolar_thermal_conductivity_W_per_mK",
    "lattice_thermal_conductivity_W_per_mK",
    "thermal_conductivity_W_per_mK",
    "lorenz_number_W_ohm_per_K2",
    "power_factor_W_per_mK2",
    "zt",
    "mobility_cm2_per_Vs",
}

#: a few sums and products of doubles: rounding only
ROUNDING = 1e-12


@pytest.mark.parametrize("arguments", VERBS.values(), ids=VERBS.keys())
def test_json_is_strict_and_alone_on_stdout(arguments, legwright):
    said = legwright(*arguments, "--json")
    assert said.code == 0
    assert said.err == ""
    assert said.out.endswith("}\n")
    whole = said.json
    assert list(whole)[:3] == ["schema", "legwright", "verb"]
    assert whole["schema"] == 1
    assert whole["legwright"] == lw.__version__
    assert whole["verb"] == arguments[0]


def test_the_version_is_one_and_the_same():
    assert version("legwright") == lw.__version__


def test_sheet_has_every_agreed_key_and_its_parts_add_up(legwright):
    made = legwright(*SHEET, "--json").json
    assert not [key for key in SHEET_FLOATS if not isinstance(made.get(key), float)]
    assert made["shape"] == "grain"
    assert isinstance(made["flags"], list)
    assert (made["temperature_K"], made["doping_per_cm3"]) == (700.0, 1e20)
    assert made["size_nm"] == pytest.approx(50, rel=ROUNDING, abs=0)
    electronic = made["electronic_thermal_conductivity_W_per_mK"]
    whole = made["thermal_conductivity_W_per_mK"]
    sigma, seebeck = made["electrical_conductivity_S_per_m"], made["seebeck_uV_per_K"] * 1e-6
    assert seebeck < 0, "n-type"
    assert whole == pytest.approx(electronic + made["lattice_thermal_conductivity_W_per_mK"], rel=ROUNDING, abs=0)
    assert made["power_factor_W_per_mK2"] == pytest.approx(seebeck**2 * sigma, rel=ROUNDING, abs=0)
    assert made["zt"] == pytest.approx(made["power_factor_W_per_mK2"] * 700 / whole, rel=ROUNDING, abs=0)
    assert made["lorenz_number_W_ohm_per_K2"] == pytest.approx(electronic / sigma / 700, rel=ROUNDING, abs=0)


def test_sheet_is_what_python_gives(legwright):
    """The command line and the Python way differ in units only."""
    made = legwright(*SHEET, "--json").json
    same = lw.evaluate(lw.load_candidate("sige-n"), 700.0, 1e26, 50e-9)
    assert made["zt"] == pytest.approx(float(same.zt), rel=ROUNDING, abs=0)
    assert made["seebeck_uV_per_K"] == pytest.approx(float(same.seebeck) * 1e6, rel=ROUNDING, abs=0)


def test_sheet_of_coarse_material_has_no_size(legwright):
    said = legwright(*SHEET[:-1], "bulk", "--json")
    assert said.json["size_nm"] is None


@pytest.mark.parametrize("shape", ["grain", "wire", "film"])
def test_peak_has_every_agreed_key_and_is_the_top_of_its_curve(shape, legwright):
    made = legwright(*PEAK, "--shape", shape, "--json").json
    for key in ("temperature_K", "doping_per_cm3", "size_nm", "zt"):
        assert isinstance(made[key], float)
    curve = {point["size_nm"]: point["zt"] for point in made["curve"]}
    assert list(curve) == sorted(curve)
    assert made["zt"] >= max(curve.values()) * (1 - ROUNDING)
    low, high = made["window_nm"]
    assert low <= made["size_nm"] <= high
    inside = [zt for size, zt in curve.items() if low <= size <= high]
    assert min(inside) >= 0.95 * made["zt"] * (1 - ROUNDING), "the window is where 95 % of the peak is kept"


def test_peak_without_a_doping_is_at_least_as_good_as_with_one(legwright):
    free = legwright(*PEAK[:4], "--json").json
    fixed = legwright(*PEAK, "--json").json
    # the best doping is found on a logarithmic grid whose last step is 1e-4 of a decade or finer: flat top
    assert free["zt"] >= fixed["zt"] * (1 - 1e-6)


def test_candidates_lists_the_library(legwright):
    rows = legwright("candidates", "--json").json["candidates"]
    names = [row["candidate"] for row in rows]
    assert names == sorted(names)
    agreed = {"si-n", "sige-n", "sige-p", "bisbte-p", "bitese-n", "pbte-n", "pbte-p", "mg2sisn-n"}
    assert agreed <= set(names)
    for row in rows:
        assert sum(row["numbers_by_basis"].values()) == row["numbers"]


def test_one_candidate_names_the_source_of_every_number(legwright):
    whole = legwright("candidates", "si-n", "--json").json
    assert {value["source"] for value in whole["values"]} == set(whole["sources"])
    assert all(value["basis"] and value["unit"] for value in whole["values"])


def test_csv_holds_the_rows(legwright, brief, tmp_path):
    target = tmp_path / "rows.csv"
    said = legwright("rank", brief(), "--json", "--csv", target)
    assert said.code == 0
    (row,) = list(csv.DictReader(target.open(encoding="utf-8")))
    (same,) = said.json["rows"]
    assert list(row) == list(same)
    assert float(row["score"]) == same["score"]
    assert [float(end) for end in row["window_nm"].split()] == same["window_nm"]
    assert not [path for path in tmp_path.iterdir() if path.name not in ("rows.csv", "brief.toml")]


def test_csv_of_a_peak_is_its_curve(legwright, tmp_path):
    said = legwright(*PEAK, "--csv", tmp_path / "curve.csv")
    assert said.code == 0
    rows = list(csv.DictReader((tmp_path / "curve.csv").open(encoding="utf-8")))
    assert list(rows[0]) == ["size_nm", "zt"]
    assert len(rows) > 100


def test_table_shows_the_ranking_flags_and_cautions(legwright, brief):
    said = legwright("rank", brief())
    assert said.code == 0
    assert said.err == ""
    assert "Test rig: generator leg, 400 to 700 K, grain size" in said.out
    for word in ("1. sige-n", "Si0.8Ge0.2", "efficiency", "window", "doping", "zT mean", "zT peak", "gain"):
        assert word in said.out
    assert re.search(r"^sintered \(sintered-boundaries\): Sintered bodies", said.out, re.MULTILINE)
    assert "Cautions: " in said.out
    assert "local codes" in said.out


@pytest.mark.parametrize("arguments", VERBS.values(), ids=VERBS.keys())
def test_markdown_is_a_table(arguments, legwright):
    said = legwright(*arguments, "--markdown")
    assert said.code == 0
    lines = [line.strip() for line in said.out.splitlines()]
    rules = [i for i, line in enumerate(lines) if re.fullmatch(r"\|([-:]+\|)+", line)]
    assert len(rules) == (3 if arguments[0] == "why" or arguments == VERBS["candidates"] else 1)
    starts = [rule - 1 for rule in rules]
    for start, stop in zip(starts, [*starts[1:], len(lines)], strict=True):
        table = [line for line in lines[start:stop] if line.startswith("|")]
        assert len(table) > 2
        assert {line.count("|") for line in table} == {table[1].count("|")}


def shown_on_a_terminal(tmp_path: Path, **extra: str) -> str:
    """Standard output of `candidates` as a terminal would get it, in an environment of its own."""
    kept = {key: os.environ[key] for key in ("PATH", "PYTHONPATH", "SYSTEMROOT") if key in os.environ}
    done = subprocess.run(
        [sys.executable, "-c", "from legwright.show.cli import main; main()", *SHEET],
        capture_output=True,
        encoding="utf-8",
        cwd=tmp_path,
        env={**kept, "TERM": "xterm-256color", "PYTHONIOENCODING": "utf-8", **extra},
        timeout=120,
        check=True,
    )
    return done.stdout


def test_no_colour_codes_when_asked_and_no_codes_at_all_off_a_terminal(tmp_path):
    colour = re.compile(r"\x1b\[(?:\d+;)*(?:3[0-8]|4[0-8]|9[0-7]|10[0-7])[;m]")
    on_terminal = shown_on_a_terminal(tmp_path, FORCE_COLOR="1")
    assert "\x1b[" in on_terminal, "else this test would see nothing"
    assert not colour.search(shown_on_a_terminal(tmp_path, FORCE_COLOR="1", NO_COLOR="1"))
    assert "\x1b" not in shown_on_a_terminal(tmp_path)


def test_the_console_script_says_the_same(legwright, tmp_path):
    command = Path(sys.executable).with_name("legwright")
    done = subprocess.run(
        [command, *SHEET, "--json"], capture_output=True, encoding="utf-8", cwd=tmp_path, timeout=120, check=True
    )
    assert done.stdout == legwright(*SHEET, "--json").out
    assert done.stderr == ""


def test_the_console_script_leaves_with_the_exit_code(tmp_path):
    command = Path(sys.executable).with_name("legwright")
    done = subprocess.run(
        [command, "peek"], capture_output=True, encoding="utf-8", cwd=tmp_path, timeout=120, check=False
    )
    assert done.returncode == 2
    assert "did you mean 'peak'?" in done.stderr


def test_a_reader_that_stops_early_is_no_fault(tmp_path):
    """`legwright candidates --json | head -1` ends quietly."""
    program = [sys.executable, "-c", "from legwright.show.cli import main; main()", "candidates", "si-n", "--json"]
    with subprocess.Popen(program, stdout=subprocess.PIPE, stderr=subprocess.PIPE, cwd=tmp_path) as running:
        assert running.stdout is not None
        assert running.stderr is not None
        running.stdout.close()
        said = running.stderr.read()
    assert b"Traceback" not in said
    assert b"fault" not in said


@pytest.mark.parametrize("verb", ["", "rank", "peak", "sheet", "why", "candidates"])
def test_help_names_every_option(verb, legwright):
    said = legwright(*([verb] if verb else []), "--help")
    assert said.code == 0
    assert said.err == ""
    assert "Usage: legwright" in said.out
    for option in ("--json", "--csv", "--markdown") if verb else ("rank", "peak", "sheet", "why", "candidates"):
        assert option in said.out


def test_why_over_a_brief_looks_at_its_best_design(legwright, brief):
    path = brief()
    ranked = {row["candidate"]: row for row in legwright("rank", path, "--json").json["rows"]}
    found = legwright("why", "sige-n", "--brief", path, "--json").json
    assert found["size_nm"] == ranked["sige-n"]["size_nm"]
    assert found["doping_per_cm3"] == ranked["sige-n"]["doping_per_cm3"]
    assert (found["temperatures_K"][0], found["temperatures_K"][-1]) == (400, 700)
    for shares in ("electrical_resistance_shares", "thermal_resistance_shares"):
        assert sum(found[shares].values()) == pytest.approx(1, abs=1e-12)


@pytest.mark.parametrize(
    ("words", "said"),
    [
        ((), "--temperature or --brief"),
        (("--temperature", "300"), "--doping and --size"),
        (("--temperature", "300", "--doping", "1e20", "--size", "bulk"), "'bulk'"),
    ],
)
def test_why_without_a_point_is_refused(words, said, legwright):
    answer = legwright("why", "si-n", *words, "--json")
    assert (answer.code, answer.out, answer.err.count("\n")) == (2, "", 1)
    assert said in answer.err


AUDIT = {
    *("material", "quantity", "size_nm", "temperature_K", "measured", "predicted", "low", "high"),
    *("inside", "fitted", "source"),
}


def test_audit_has_every_agreed_key_and_its_totals_count_its_samples(legwright, tmp_path):
    said = legwright("audit", "--json", "--csv", tmp_path / "audit.csv")
    assert said.code == 0
    samples, totals = said.json["samples"], said.json["totals"]
    assert all(row.keys() >= AUDIT for row in samples)
    assert all(row["inside"] == (row["low"] <= row["measured"] <= row["high"]) for row in samples)
    whole = [t["values"] for t in totals if (t["material"], t["half"], t["quantity"]) == ("all", "both", "any")]
    assert sum(whole) == len(samples)
    assert len((tmp_path / "audit.csv").read_text(encoding="utf-8").splitlines()) == len(samples) + 1


def test_the_audit_lists_each_miss_by_name(legwright):
    samples = legwright("audit", "--json").json["samples"]
    shown = legwright("audit", "--markdown").out
    missed = {row["sample"] for row in samples if not row["inside"] and not row["fitted"]}
    assert missed
    assert all(f"| {name} " in shown for name in missed)
