"""Screening: the same bytes however it is interrupted and shared out, and near to what ranking finds.

Run this file as a script to write the table of the whole proof anew (some ten minutes).
"""

from __future__ import annotations

import csv
import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest

from legwright.base.errors import InputError
from legwright.base.parts import Parts
from legwright.candidate.family import load_family
from legwright.candidate.library import library_names, load_candidate
from legwright.decide.brief import load_brief
from legwright.decide.rank import rank_one
from legwright.decide.screen import BLOCK, Screened, members, screen, screen_one

TABLE = Path(__file__).with_name("screen_trials.csv")
KILN = Path(__file__).resolve().parents[2] / "examples" / "kiln-flue.toml"
PROGRAM = [sys.executable, "-c", "from legwright.show.cli import main; main()", "screen", str(KILN)]
ALONE = {**os.environ, "OMP_NUM_THREADS": "1", "OPENBLAS_NUM_THREADS": "1"}
LINES = ("--family", "si-ge-n", "--family", "hf-zr-ti-ni-sn-n")
FEW, MANY = 100, 320


def command(into: Path, members: int, *more: str) -> list[str]:
    return [*PROGRAM, "--into", str(into), *LINES, "--members", str(members), *more]


def straight(into: Path, members: int, *more: str) -> bytes:
    subprocess.run(command(into, members, *more, "--json"), check=True, capture_output=True, env=ALONE)
    return into.read_bytes()


def killed(into: Path, members: int, moments: list[float]) -> tuple[int, bytes]:
    """How many kills struck a run at work, and the bytes in the end."""
    struck = 0
    for moment in moments:
        run = subprocess.Popen(
            command(into, members), stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL, env=ALONE
        )
        time.sleep(moment)
        struck += run.poll() is None
        run.send_signal(signal.SIGKILL)
        run.wait()
    return struck, straight(into, members)


def coarse_misses() -> list[float]:
    """Share by which the coarse map's best lies below the ranking's, each library candidate that can serve."""
    brief = load_brief(KILN)
    found = []
    for name in library_names():
        best = rank_one(brief, load_candidate(name)).score
        if best > 0:
            found.append(1 - screen_one(brief, name).score / best)
    return found


@pytest.mark.evidence
def test_it_ends_in_the_same_bytes_however_it_is_killed_and_shared_out(tmp_path):
    with TABLE.open(encoding="utf-8") as lines:
        rows = {row["what"]: row["figure"] for row in csv.DictReader(lines)}
    assert int(rows["kills that struck a run at work"]) >= 10
    for what in ("killed and resumed", "two workers", "Dask, two workers"):
        assert rows[f"{what}: bytes equal"] == "yes"
    assert float(rows["largest memory, MB"]) < 1000
    assert float(rows["coarse map below ranking, largest, per cent"]) < 1
    plain = straight(tmp_path / "plain.csv", FEW)
    _, resumed = killed(tmp_path / "killed.csv", FEW, [2.5, 3.5])
    assert resumed == plain
    assert straight(tmp_path / "two.csv", FEW, "--workers", "2") == plain
    assert sorted(path.name for path in tmp_path.iterdir()) == ["killed.csv", "plain.csv", "two.csv"]


def test_a_dask_cluster_gives_the_same_bytes(tmp_path):
    pytest.importorskip("distributed")
    names = members(load_family("si-ge-n"), 2 * BLOCK)
    brief = load_brief(KILN)
    plain, shared = tmp_path / "plain.csv", tmp_path / "dask.csv"
    screen(brief, names, plain)
    subprocess.run(
        [*PROGRAM, "--into", str(shared), "--family", "si-ge-n", "--members", str(2 * BLOCK), "--cluster", "local",
         "--workers", "2", "--json"], check=True, capture_output=True, env=ALONE,
    )  # fmt: skip
    assert shared.read_bytes() == plain.read_bytes()


def test_parquet_and_csv_hold_the_same_rows(tmp_path):
    parquet = pytest.importorskip("pyarrow.parquet")
    names = ["sige-n", "bisbte-p", "si-ge-n:0.25"]
    brief = load_brief(KILN)
    for suffix in ("csv", "parquet"):
        assert screen(brief, names, tmp_path / f"rows.{suffix}").complete
    table = parquet.read_table(tmp_path / "rows.parquet").to_pylist()
    with (tmp_path / "rows.csv").open(encoding="utf-8") as lines:
        rows = list(csv.DictReader(lines))
    assert [row["candidate"] for row in table] == names == [row["candidate"] for row in rows]
    assert [row["score"] for row in table] == [float(row["score"]) for row in rows]
    assert table[1]["flag"] == rows[1]["flag"] == "above-service-temperature"


def test_the_coarse_map_comes_near_the_ranking():
    """Measured over the library: the table's largest miss; here some of each kind."""
    brief = load_brief(KILN)
    for name in ("sige-n", "cosb3-n", "hfzrnisn-n"):
        best = rank_one(brief, load_candidate(name)).score
        assert screen_one(brief, name).score == pytest.approx(best, rel=0.01, abs=0)


def test_a_damaged_part_is_worked_out_again_and_another_question_is_refused(tmp_path, monkeypatch):
    names = members(load_family("si-ge-n"), 2 * BLOCK)
    brief = load_brief(KILN)
    into = tmp_path / "rows.csv"

    def stop(done: int, asked: int) -> None:
        if done >= BLOCK:
            raise KeyboardInterrupt

    ended = screen(brief, names, into, told=stop)
    assert not ended.complete
    assert ended.done == BLOCK
    assert ended.best
    assert not into.exists()
    with pytest.raises(InputError, match="another question"):
        screen(brief, names[:-1], into)
    part = tmp_path / ".rows.csv.parts" / "000000.json"
    sealed = json.loads(part.read_text(encoding="utf-8"))
    part.write_text(json.dumps({**sealed, "text": sealed["text"].replace("si-ge", "si-gE")}), encoding="utf-8")
    assert screen(brief, names, into).complete
    straight_on = tmp_path / "straight.csv"
    screen(brief, names, straight_on)
    assert into.read_bytes() == straight_on.read_bytes()
    assert sorted(path.name for path in tmp_path.iterdir()) == ["rows.csv", "straight.csv"]


def test_two_runs_at_once_are_refused(tmp_path):
    first, second = (Parts(tmp_path / "parts", "q") for _ in range(2))
    with first.held(), pytest.raises(InputError, match="another run"), second.held():
        raise AssertionError("two runs hold one folder")
    with second.held():
        assert (tmp_path / "parts" / "question").read_text(encoding="utf-8") == "q\n"


def test_members_are_spread_over_the_line_and_can_be_loaded():
    for name, ends in (("si-ge-n", 2), ("hf-zr-ti-ni-sn-n", 3)):
        names = members(load_family(name), 50)
        assert len(set(names)) == len(names) == 50
        assert all(len(one.split(":")[1].split(",")) == ends - 1 for one in names)
        for one in names[::10]:
            assert load_candidate(one).name.startswith(name)


def test_a_file_that_cannot_be_read_is_a_row_with_its_reason(tmp_path):
    (tmp_path / "bad-n.toml").write_text("x = 1\n", encoding="utf-8")
    row = screen_one(load_brief(KILN), str(tmp_path / "bad-n.toml"))
    assert isinstance(row, Screened)
    assert row.score == 0
    assert row.flag.startswith("unreadable: ")


def test_progress_off_a_terminal_is_sparse_and_on_stderr(tmp_path, capsys):
    from legwright.show.progress import progress

    with progress("screening") as told:
        for done in range(0, 1001):
            told(done, 1000)
    said = capsys.readouterr()
    assert said.out == ""
    lines = said.err.splitlines()
    assert 1 <= len(lines) <= 11
    assert lines[-1].startswith("screening: 1000 of 1000, ")


if __name__ == "__main__":
    import tempfile

    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        began = time.perf_counter()
        report = subprocess.run(
            [sys.executable, "-c", "import resource, sys; from legwright.show.cli import run; "
             "run(sys.argv[1:]); print(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1e3, file=sys.stderr)",
             *command(folder / "plain.csv", MANY)[3:]], check=True, capture_output=True, text=True, env=ALONE,
        )  # fmt: skip
        seconds = time.perf_counter() - began
        plain_bytes = (folder / "plain.csv").read_bytes()
        lucky = np.random.default_rng(11).uniform(2.5, 5.5, 12)
        kills, resumed_bytes = killed(folder / "killed.csv", MANY, list(map(float, lucky)))
        two = straight(folder / "two.csv", MANY, "--workers", "2")
        dask = straight(folder / "dask.csv", MANY, "--workers", "2", "--cluster", "local")
        misses = coarse_misses()
        screened = plain_bytes.count(b"\n") - 1
        with TABLE.open("w", encoding="utf-8", newline="") as stream:
            writer = csv.writer(stream, lineterminator="\n")
            writer.writerows(
                [
                    ["what", "figure"],
                    ["candidates screened", screened],
                    [
                        "candidates a second, one worker",
                        f"{screened / seconds:.0f}",
                    ],
                    ["largest memory, MB", f"{float(report.stderr.split()[-1]):.0f}"],
                    ["kills that struck a run at work", kills],
                    ["killed and resumed: bytes equal", "yes" if resumed_bytes == plain_bytes else "no"],
                    ["two workers: bytes equal", "yes" if two == plain_bytes else "no"],
                    ["Dask, two workers: bytes equal", "yes" if dask == plain_bytes else "no"],
                    ["coarse map below ranking, median, per cent", f"{100 * float(np.median(misses)):.3f}"],
                    ["coarse map below ranking, largest, per cent", f"{100 * max(misses):.3f}"],
                ]
            )
