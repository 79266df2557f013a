"""README.md says what the program does and how to start it, and what it says works."""

import re
from pathlib import Path

import pytest

from legwright.show.cli import _cli
from legwright.show.tables import SCORE_TITLES

ROOT = Path(__file__).resolve().parents[2]
README = (ROOT / "README.md").read_text(encoding="utf-8")
START = README.split("\n## Start\n")[1].split("\n## ")[0]


def test_the_job_is_the_first_thing_said():
    title, _, rest = README.partition("\n")
    first = rest.strip().split("\n\n")[0]
    assert title == "# legwright"
    assert re.match(r"\w", first), "a paragraph of prose, not a heading, list or picture"
    for word in ("thermoelectric", "leg", "size", "doping", "rank"):
        assert word in first


def test_start_has_the_two_commands_and_no_other_block():
    assert re.findall(r"^```(\w*)$", START, re.MULTILINE) == ["sh", "", "sh", ""]


@pytest.mark.parametrize("block", re.findall(r"```sh\n(.*?)```", START, re.DOTALL))
def test_start_block_is_complete_and_names_files_that_exist(block):
    lines = block.strip().splitlines()
    assert lines[0] == "python3 -m venv .venv"
    assert re.match(r"\.venv/bin/pip install ('\.\[test\]'|\.)$", lines[1])
    assert all(line.startswith((".venv/bin/", "python3 ")) for line in lines)
    for path in re.findall(r"(?<!\.venv)\b(?:examples|tests|datasets)/[\w./-]+", block):
        assert (ROOT / path).exists(), path


def test_start_blocks_rank_the_kiln_and_run_the_tests():
    first, second = re.findall(r"```sh\n(.*?)```", START, re.DOTALL)
    assert first.strip().endswith("legwright rank examples/kiln-flue.toml")
    assert second.strip().endswith("python -m pytest")


@pytest.mark.parametrize("document", ["README.md", "DEVELOPERS.md"])
def test_paths_named_in_the_documents_exist(document):
    text = (ROOT / document).read_text(encoding="utf-8")
    named = re.findall(r"`((?:src|tests|examples|datasets|\.ci)(?:/[\w.-]+)+/?)`", text)
    assert named, "no path found: the pattern of this test no longer fits the text"
    for path in named:
        assert (ROOT / path).exists(), path


def test_the_python_of_the_readme_runs(capsys):
    (block,) = re.findall(r"```python\n(.*?)```", README, re.DOTALL)
    names: dict[str, object] = {}
    exec(compile(block, "README.md", "exec"), names)
    assert names["made"].zt.size > 1
    assert "zT" in capsys.readouterr().out


def test_every_verb_is_in_the_readme():
    for verb in _cli.commands:
        assert f"`legwright {verb} " in README, verb


def test_every_column_of_the_ranking_is_explained():
    meanings = README.split("## What the table means")[1].split("\n## ")[0]
    scores = [title for title, _ in SCORE_TITLES.values()]
    for word in ("size", "window", "doping", "zT mean", "zT peak", "gain over coarse", "flags", *scores):
        assert word in meanings, word
