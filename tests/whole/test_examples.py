"""Everything under examples/ runs as it stands."""

import subprocess
import sys
from pathlib import Path

import pytest

from legwright.base.flags import MEANINGS
from legwright.candidate.library import library_names

ROOT = Path(__file__).resolve().parents[2]
BRIEFS = sorted((ROOT / "examples").glob("*.toml"))
SCRIPTS = sorted((ROOT / "examples").glob("*.py"))
OWN = sorted((ROOT / "examples" / "candidates").glob("*.toml"))

#: sizes are found on logarithmic axes: exp(ln x) gives x back to a few units in the last place
ROUND_TRIP = 1e-12

#: contract: each key of a row of `rank`, and what it holds where the candidate can serve
ROW = {
    "rank": int,
    "candidate": str,
    "formula": str,
    "carrier": str,
    "shape": str,
    "size_nm": float,
    "window_nm": list,
    "doping_per_cm3": float,
    "score": float,
    "score_name": str,
    "zt_mean": float,
    "zt_peak": float,
    "gain_over_bulk": float,
    "flags": list,
}


def test_there_are_briefs_scripts_and_a_candidate_of_ones_own():
    assert len(BRIEFS) >= 3
    assert len(SCRIPTS) >= 2
    assert OWN


@pytest.mark.parametrize("path", BRIEFS, ids=lambda path: path.stem)
def test_brief_is_ranked(path, legwright):
    said = legwright("rank", path, "--json")
    assert said.code == 0
    assert said.err == ""
    whole = said.json
    assert whole["schema"] == 1
    assert whole["verb"] == "rank"
    rows = whole["rows"]
    assert [row["rank"] for row in rows] == list(range(1, len(rows) + 1))
    assert [row["score"] for row in rows] == sorted((row["score"] for row in rows), reverse=True)
    assert set(whole["flag_meanings"]) == {flag for row in rows for flag in row["flags"]}
    assert whole["cautions"]
    for row in rows:
        assert set(row["flags"]) <= set(MEANINGS)
        assert row["carrier"] in ("n", "p")
        if row["score"] == 0:
            assert row["flags"], "score 0 without a reason"
            continue
        if row["gain_over_bulk"] is None:
            assert "no-gain-reference" in row["flags"]
            row["gain_over_bulk"] = 1.0
        wrong = [key for key, kind in ROW.items() if not isinstance(row[key], kind)]
        assert not wrong
        low, high = row["window_nm"]
        assert low * (1 - ROUND_TRIP) <= row["size_nm"] <= high * (1 + ROUND_TRIP)
        assert 0 < row["zt_mean"] <= row["zt_peak"]
        assert row["gain_over_bulk"] > 0


@pytest.mark.parametrize("path", BRIEFS, ids=lambda path: path.stem)
def test_brief_says_that_its_scenario_is_invented(path):
    assert path.read_text(encoding="utf-8").startswith("# Invented scenario")


def script(path: Path, *arguments: str, folder: Path) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, path, *arguments], capture_output=True, text=True, cwd=folder, timeout=120, check=False
    )


@pytest.mark.parametrize("path", SCRIPTS, ids=lambda path: path.stem)
def test_script_prints_a_table_from_any_folder(path, tmp_path):
    done = script(path, folder=tmp_path)
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    lines = done.stdout.splitlines()
    assert len(lines) > 5
    assert "zT" in lines[1]
    numbers = [[float(cell) for cell in line.split()[-4:]] for line in lines[2:]]
    assert all(0 < row[-1] < 3 for row in numbers), "the last column is zT"
    assert not list(tmp_path.iterdir()), "a script that only prints leaves no file"


def test_script_takes_another_candidate(tmp_path):
    done = script(ROOT / "examples" / "size_sweep.py", "bitese-n", "300", folder=tmp_path)
    assert done.returncode == 0, done.stderr
    assert done.stdout.startswith("bitese-n at 300 K")


def test_the_walk_draws_what_it_ranked(tmp_path):
    done = script(ROOT / "examples" / "walk.py", str(tmp_path), folder=tmp_path)
    assert done.returncode == 0, done.stderr
    best = done.stdout.split()[0]
    for name in ("ranking", "size"):
        assert best in (tmp_path / f"{name}.svg").read_text(encoding="utf-8")
    assert f"The first: 1. {best}" in done.stdout
    assert f"{best}: power against grain size" in done.stdout


@pytest.mark.parametrize("path", OWN, ids=lambda path: path.stem)
def test_own_candidate_reads_as_demo_data_and_cites_the_file_beside_it(path, legwright):
    said = legwright("candidates", path, "--json")
    assert said.code == 0
    whole = said.json
    assert "invented demo data" in whole["title"]
    assert path.stem not in library_names()
    beside = [value for value in whole["values"] if value["source"] == "workshop-notes"]
    assert beside
    assert all(value["basis"] == "common practice" for value in beside)
    assert "Invented demo data" in whole["sources"]["workshop-notes"]
    assert len(whole["sources"]) > 1, "library sources are citable too"


def test_candidate_path_is_looked_up_beside_the_brief_from_any_folder(legwright, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    said = legwright("rank", ROOT / "examples" / "enamel-furnace.toml", "--json")
    assert {"sige10-n", "sige-n", "sige-p"} == {row["candidate"] for row in said.json["rows"]}
