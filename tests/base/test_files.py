"""Reading names file and line; writing is whole or not at all."""

import os

import pytest

from legwright.base.errors import InputError
from legwright.base.files import LARGEST_INPUT_BYTES, datasets_folder, read_toml, write_whole


def test_writes_what_it_is_given_and_leaves_nothing_else(tmp_path):
    write_whole(tmp_path / "out.csv", "µV/K\nzT\n")
    assert (tmp_path / "out.csv").read_bytes() == "µV/K\nzT\n".encode()
    assert [path.name for path in tmp_path.iterdir()] == ["out.csv"]


def test_replaces_an_older_file(tmp_path):
    target = tmp_path / "out.csv"
    target.write_text("old and longer than the new one")
    write_whole(target, "new")
    assert target.read_text() == "new"


@pytest.mark.parametrize("step", ["fsync", "replace"])
def test_a_failure_on_the_way_leaves_the_old_file_and_no_other(step, tmp_path, monkeypatch):
    target = tmp_path / "out.csv"
    target.write_text("old")

    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, step, full)
    with pytest.raises(InputError, match=r"out\.csv: cannot be written \(No space left on device\)"):
        write_whole(target, "new")
    assert target.read_text() == "old"
    assert [path.name for path in tmp_path.iterdir()] == ["out.csv"]


def test_a_folder_in_the_way_leaves_no_temporary_file(tmp_path):
    (tmp_path / "out.csv").mkdir()
    with pytest.raises(InputError, match="cannot be written"):
        write_whole(tmp_path / "out.csv", "new")
    assert [path.name for path in tmp_path.iterdir()] == ["out.csv"]


def test_a_missing_folder_is_not_made(tmp_path):
    with pytest.raises(InputError, match="cannot be written"):
        write_whole(tmp_path / "nowhere" / "out.csv", "new")
    assert not list(tmp_path.iterdir())


def test_reads_toml(tmp_path):
    path = tmp_path / "a.toml"
    path.write_text('title = "Öl"\n[size]\nmin_nm = 1e1\n', encoding="utf-8")
    assert read_toml(path) == {"title": "Öl", "size": {"min_nm": 10.0}}


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"a = 1\nb =\n", "not valid TOML: .*line 2"),
        (b"a = 1\na = 2\n", "not valid TOML: .*line 2"),
        (b"\xff\xfe", "not UTF-8"),
        (b"#" * (LARGEST_INPUT_BYTES + 1), "larger than"),
    ],
    ids=["no value", "twice", "not text", "too large"],
)
def test_unreadable_content_names_the_file(content, message, tmp_path):
    path = tmp_path / "a.toml"
    path.write_bytes(content)
    with pytest.raises(InputError, match=message) as refusal:
        read_toml(path)
    assert str(path) in str(refusal.value)


def test_a_folder_and_a_missing_file_are_named(tmp_path):
    with pytest.raises(InputError, match="is a directory"):
        read_toml(tmp_path)
    with pytest.raises(InputError, match=r"none\.toml: no such file"):
        read_toml(tmp_path / "none.toml")


def test_shipped_data_is_found():
    folder = datasets_folder()
    assert (folder / "sources.bib").is_file()
    assert (folder / "priors.toml").is_file()
    assert list((folder / "candidates").glob("*.toml"))


@pytest.mark.parametrize("mask", [0o022, 0o077])
def test_what_is_written_is_as_open_to_others_as_any_file_of_the_user(mask, tmp_path):
    before = os.umask(mask)
    try:
        write_whole(tmp_path / "ours.txt", "a")
        (tmp_path / "any.txt").write_text("a")
    finally:
        os.umask(before)
    assert (tmp_path / "ours.txt").stat().st_mode == (tmp_path / "any.txt").stat().st_mode
