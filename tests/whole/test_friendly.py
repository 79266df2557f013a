"""What helps a user along: a brief to fill in, what a word in brackets means, names that the shell completes."""

from __future__ import annotations

import ast
import os
import subprocess
import sys
from pathlib import Path

import pytest
import tomli

import legwright
from legwright.base.errors import REFUSALS
from legwright.base.flags import MEANINGS, word
from legwright.decide.brief import Brief, load_brief

SOURCES = sorted(Path(legwright.__file__).parent.rglob("*.py"))


@pytest.mark.parametrize("kind", ["generator", "cooler"])
def test_the_brief_to_fill_in_is_a_brief_and_names_every_field(kind, legwright, tmp_path):
    into = tmp_path / "mine.toml"
    assert legwright("brief", kind, "--into", into).code == 0
    assert load_brief(into).duty.kind == kind
    text = into.read_text(encoding="utf-8")
    assert legwright("brief", kind).out == text
    for table, field in Brief.model_fields.items():
        assert f"[{table}]" in text or f"{table} =" in text
        inner = next(
            (
                a
                for a in (field.annotation, *getattr(field.annotation, "__args__", ()))
                if hasattr(a, "model_fields")
            ),
            None,
        )
        for name in inner.model_fields if inner else ():
            assert f"{name} =" in text, name


def test_the_defaults_that_it_names_are_the_defaults(legwright):
    """Uncommenting what says its default leaves the brief as it was."""
    text = legwright("brief", "generator").out
    plain = Brief.model_validate(_tuples(tomli.loads(text)))
    told = text
    for name in (
        "contact_uohm_cm2",
        "contact_K_cm2_per_W",
        "hot_exchanger_K_cm2_per_W",
        "beyond_service",
        "ambient_K",
    ):
        assert f"# {name} =" in told
        told = told.replace(f"# {name} =", f"{name} =")
    said = Brief.model_validate(_tuples(tomli.loads(told)))
    assert said.task.span == plain.task.span
    assert said.leg.model_copy(update={"ambient_K": None}) == plain.leg


def _tuples(value):
    if isinstance(value, dict):
        return {key: _tuples(item) for key, item in value.items()}
    return tuple(map(_tuples, value)) if isinstance(value, list) else float(value) if type(value) is int else value


def test_every_kind_of_refusal_that_the_code_names_is_explained():
    named = {
        word.value.value
        for path in SOURCES
        for call in ast.walk(ast.parse(path.read_text(encoding="utf-8")))
        if isinstance(call, ast.Call) and getattr(call.func, "id", "") == "InputError"
        for word in call.keywords
        if word.arg == "slug" and isinstance(word.value, ast.Constant)
    }
    assert named | {"usage"} == set(REFUSALS)
    assert not set(REFUSALS) & set(MEANINGS)


@pytest.mark.parametrize("slug", [*REFUSALS, *MEANINGS])
def test_explain_prints_the_paragraph(slug, legwright):
    said = legwright("explain", slug, "--json").json["rows"]
    assert [row["slug"] for row in said] == [slug]
    assert len(said[0]["meaning"]) > 40


def test_explain_lists_all_and_offers_the_nearest(legwright):
    out = legwright("explain").out
    assert all(slug in out for slug in (*REFUSALS, *MEANINGS))
    said = legwright("explain", "window-opn")
    assert said.code == 2
    assert "did you mean 'window-open'?" in said.err
    assert said.err.rstrip().endswith("[unknown-name]")


def test_a_hushed_flag_stays_but_is_not_explained(legwright, brief):
    loud, quiet = legwright("rank", brief()), legwright("rank", brief(), "--hush", "sintered-boundaries")
    assert "Sintered bodies" in loud.out
    assert "Sintered bodies" not in quiet.out
    assert "sintered" in quiet.out
    flags = legwright("rank", brief(), "--hush", "sintered-boundaries", "--json").json["rows"][0]["flags"]
    assert "sintered-boundaries" in flags
    assert legwright("rank", brief(), "--hush", "sintered").code == 2


def test_about_names_versions_and_data(legwright):
    said = legwright("about", "--json").json
    assert said["licence"] == "MIT"
    assert {row["package"] for row in said["packages"]} >= {"numpy", "scipy", "pymatgen", "rich"}
    assert all(row["version"] for row in said["packages"])
    assert {row["data_set"] for row in said["data_sets"]} >= {"candidates", "families", "measurements"}
    assert all(row["files"] and len(row["sha256"]) == 64 for row in said["data_sets"])
    assert "SHA-256" in legwright("about").out


@pytest.mark.parametrize("shell", ["bash", "zsh", "fish"])
def test_the_shell_completes_candidates(shell):
    offered = completions("legwright sheet pb", shell)
    assert {"pbse-n", "pbse-p", "pbte-n", "pbte-p"} <= offered
    assert all(name.startswith("pb") for name in offered)


def test_the_shell_completes_families_options_and_slugs():
    assert "si-ge-n:" in completions("legwright search si-")
    assert completions("legwright leg pbte-p brief.toml --partner mg3") == {"mg3sbbi-n"}
    assert "window-open" in completions("legwright explain wind")
    assert "--temperature" in completions("legwright peak si-n --te")


def completions(words: str, shell: str = "bash") -> set[str]:
    """What the shell is offered for the last of these words."""
    place = words.split()[-1] if shell == "fish" else str(words.count(" "))
    asked = {"_LEGWRIGHT_COMPLETE": f"{shell}_complete", "COMP_WORDS": words, "COMP_CWORD": place}
    program = [sys.executable, "-c", "from legwright.show.cli import main; main()"]
    said = subprocess.run(program, capture_output=True, text=True, env={**os.environ, **asked}, check=False).stdout
    lines = said.splitlines()
    return set(lines[1::3] if shell == "zsh" else (line.partition(",")[2] for line in lines))


def test_a_brief_to_fill_in_never_goes_over_a_file(legwright, tmp_path):
    path = tmp_path / "mine.toml"
    path.write_text("mine", encoding="utf-8")
    said = legwright("brief", "cooler", "--into", path)
    assert (said.code, said.out) == (2, "")
    assert said.err.endswith("exists; name another file [cannot-write]\n")
    assert path.read_text(encoding="utf-8") == "mine"


def test_words_of_flags_are_short_unlike_and_explained(legwright):
    words = [word(flag) for flag in MEANINGS]
    assert len(set(words)) == len(words)
    assert max(map(len, words)) <= 20, "a word in a table, not a sentence"
    assert legwright("explain", "too hot").out.startswith("above-service-temperature (flag): ")


def test_the_names_of_hushed_flags_stay_and_cautions_are_never_hushed(legwright, monkeypatch):
    sheet = ("sheet", "sige-n", "--temperature", "700", "--doping", "1e20", "--size", "50")
    monkeypatch.setenv("LEGWRIGHT_HUSH", "from-memory sintered-boundaries")
    said = legwright(*sheet).out
    assert "from memory.\nsintered" in said or "sintered (sintered-boundaries).\nfrom memory." in said
    assert "Sintered bodies" not in said
    assert "Cautions: " in said


def test_a_pipe_without_unicode_gets_json_tables_and_words():
    def piped(*words: str) -> str:
        program = [sys.executable, "-c", "from legwright.show.cli import main; main()", *words]
        env = {**os.environ, "PYTHONIOENCODING": "ascii"}
        return subprocess.run(program, capture_output=True, env=env, check=True).stdout.decode("ascii")

    sheet = ("sheet", "sige-n", "--temperature", "700", "--doping", "1e20", "--size", "50")
    assert piped(*sheet, "--json").endswith("}\n")
    assert "power factor [uW/(cm K2)]" in piped(*sheet)
    assert "Cahill" in piped("explain", "below amorphous")
