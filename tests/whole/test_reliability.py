"""What befalls a tool in use: interrupts, two runs at once, full disks, hostile files; nothing lost or run."""

from __future__ import annotations

import json
import os
import resource
import signal
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest

PROGRAM = [sys.executable, "-c", "from legwright.show.cli import main; main()"]
ALONE = {**os.environ, "OMP_NUM_THREADS": "1", "OPENBLAS_NUM_THREADS": "1"}


def search(brief: Path, checkpoint: Path) -> subprocess.Popen[str]:
    arguments = ["search", "sige-n", str(brief), "--evaluations", "20", "--resume", str(checkpoint), "--json"]
    return subprocess.Popen(
        [*PROGRAM, *arguments], stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, env=ALONE
    )


def whole(checkpoint: Path) -> bool:
    return set(json.loads(checkpoint.read_text(encoding="utf-8"))) == {"search", "answers", "sha256"}


def test_interrupts_at_random_moments_lose_nothing(brief, tmp_path):
    """Sent SIGINT again and again, a search ends with 130, keeps its checkpoint, and in the end says the same."""
    path, checkpoint = brief(), tmp_path / "kept.json"
    straight, _ = search(path, tmp_path / "straight.json").communicate()
    moments = np.random.default_rng(5).uniform(0.3, 6.0, 4)
    for moment in moments:
        run = search(path, checkpoint)
        time.sleep(moment)
        run.send_signal(signal.SIGINT)
        out, err = run.communicate()
        assert run.returncode in (0, 130, -signal.SIGINT), (
            err
        )  # a shell shows the last, an exit cut short, as 130 too
        assert "Traceback" not in err
        assert not out or json.loads(out)["verb"] == "search"
        assert not checkpoint.exists() or whole(checkpoint)
    resumed, _ = search(path, checkpoint).communicate()
    assert resumed == straight


def test_two_runs_on_one_checkpoint_both_end_right(brief, tmp_path):
    path, checkpoint = brief(), tmp_path / "shared.json"
    both = [search(path, checkpoint), search(path, checkpoint)]
    said = [run.communicate() for run in both]
    assert [run.returncode for run in both] == [0, 0], said
    assert said[0][0] == said[1][0]
    assert whole(checkpoint)
    assert sorted(each.name for each in tmp_path.iterdir()) == ["brief.toml", "shared.json"]


@pytest.mark.parametrize("verb", ["candidates", "peak"])
def test_a_disk_that_fills_during_a_write_leaves_the_old_file(verb, tmp_path):
    """The kernel stops every file at 1000 bytes (RLIMIT_FSIZE), as a full disk would."""
    target = tmp_path / "rows.csv"
    target.write_text("old\n", encoding="utf-8")
    arguments = {
        "candidates": ["candidates", "--csv", str(target), "--json"],
        "peak": ["peak", "sige-n", "--temperature", "900", "--csv", str(target), "--json"],
    }[verb]

    def fill() -> None:
        signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
        resource.setrlimit(resource.RLIMIT_FSIZE, (1000, 1000))

    said = subprocess.run(
        [*PROGRAM, *arguments],
        capture_output=True,
        text=True,
        preexec_fn=fill,
        env={**ALONE, "PYTHONDONTWRITEBYTECODE": "1"},
        check=False,
    )
    assert said.returncode == 2, said.stderr
    assert said.stdout == ""
    assert "cannot be written" in said.stderr
    assert said.stderr.count("\n") == 1
    assert target.read_text(encoding="utf-8") == "old\n"
    assert [each.name for each in tmp_path.iterdir()] == ["rows.csv"]


@pytest.mark.parametrize("folder", ["/proc", "/sys", "closed"])
def test_a_folder_that_takes_no_file_is_refused(folder, legwright, tmp_path):
    if folder == "closed":
        if os.geteuid() == 0:
            pytest.skip("nothing is closed to the superuser")
        (tmp_path / folder).mkdir(mode=0o500)
    target = tmp_path / folder / "rows.csv"  # an absolute folder replaces tmp_path
    said = legwright("candidates", "--csv", target)
    assert said.code == 2
    assert said.out == ""
    assert "cannot be written" in said.err


HOSTILE = {
    "tables within tables": "[" + ".".join(["a"] * 50_000) + "]\n",
    "keys within keys": ".".join(["a"] * 50_000) + " = 1\n",
    "lists within lists": "title = " + "[" * 50_000 + "]" * 50_000 + "\n",
    "tables in line": "title = " + "{a=" * 50_000 + "1" + "}" * 50_000 + "\n",
    "a million rows": "title = 'x'\n" + "[[row]]\nx = 1\n" * 140_000,
    "an endless name": "title = '" + "x" * 1_900_000 + "'\n",
    "an endless key": "x" * 1_900_000 + " = 1\n",
    "an endless number": "title = " + "9" * 1_000_000 + "\n",
    "control characters": "title = 'a\x1b[2Jb'\n",
    "half a character": b"title = '\xc3'\n",
    "zeros": b"\x00" * 100_000,
}


@pytest.mark.parametrize("content", HOSTILE.values(), ids=HOSTILE.keys())
def test_hostile_toml_is_refused_soon_in_one_line(content, legwright, tmp_path):
    path = tmp_path / "brief.toml"
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    started = time.process_time()
    for arguments in (("rank", path), ("sheet", path, "--temperature", 300, "--doping", 1e20, "--size", 50)):
        said = legwright(*arguments)
        assert said.code == 2
        assert said.out == ""
        assert said.err.count("\n") == 1
        assert len(said.err) < 4000
        assert said.err.strip().isprintable()
    assert time.process_time() - started < 60  # some seconds at worst; a parser gone astray takes hours
    assert [each.name for each in tmp_path.iterdir()] == ["brief.toml"]


def test_a_million_rows_of_measurements_are_refused_soon(legwright, tmp_path):
    path = tmp_path / "long.csv"
    path.write_text("temperature [K],seebeck [uV/K]\n" + "300,-100\n" * 1_000_000, encoding="utf-8")
    said = legwright("fit", path, "--like", "sige-n")
    assert said.code == 2
    assert "larger than" in said.err
    path.write_text("temperature [K],seebeck [uV/K],note\n300,-100," + "x" * 200_000 + "\n", encoding="utf-8")
    said = legwright("fit", path, "--like", "sige-n")
    assert said.code == 2
    assert "field larger than" in said.err


@pytest.mark.parametrize("name", ["../secret.toml", "/proc/self/environ.toml", "../" * 60 + "etc/passwd.toml"])
def test_a_path_outside_the_folder_shows_nothing_of_what_stands_there(name, legwright, brief, tmp_path):
    inner = tmp_path / "inner"
    inner.mkdir()
    (tmp_path / "secret.toml").write_text("password = 'open sesame'\n", encoding="utf-8")
    said = legwright("rank", brief({"candidates.use": f'["{name}"]'}, "inner/brief.toml"))
    assert said.code == 2
    assert said.out == ""
    assert "sesame" not in said.err


def test_nothing_in_a_file_is_run(legwright, brief, tmp_path):
    """Units, formulas and names that other programs would evaluate."""
    trap = tmp_path / "ran"
    code = f"__import__('pathlib').Path('{trap}').touch()"
    text = Path(__file__).resolve().parents[2] / "examples" / "candidates" / "sige10-n.toml"
    for old, new in (('unit = "1/cm^3"', f'unit = "{code}"'), ('formula = "', f'formula = "{code}')):
        spoilt = text.read_text(encoding="utf-8")
        assert old in spoilt
        path = tmp_path / "mine-n.toml"
        path.write_text(spoilt.replace(old, new, 1), encoding="utf-8")
        assert legwright("sheet", path, "--temperature", 300, "--doping", 1e20, "--size", 50).code == 2
    assert legwright("rank", brief({"title": f'"{code}"'}), "--json").code == 0
    table = tmp_path / "mine.csv"
    table.write_text(f"temperature [{code}],seebeck [uV/K]\n300,-100\n", encoding="utf-8")
    assert legwright("fit", table, "--like", "sige-n").code == 2
    assert not trap.exists()
