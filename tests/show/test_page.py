"""The page for the meeting: whole, escaped, in order, alone, and the same bytes each time."""

import json
import os
import re
import subprocess
import sys
from html.parser import HTMLParser
from importlib import resources
from itertools import pairwise
from pathlib import Path

import pytest

from legwright.show.cli import run

BRIEF = """
title = "Rig <b>&\\"1\\"</b>"
[duty]
kind = "generator"
hot_K = 700
cold_K = 400
maximise = "efficiency"
[size]
shape = "grain"
min_nm = 20
max_nm = 2000
[candidates]
use = ["sige-n", "pbte-p", "si-n", "bitese-n"]
"""
VOID = {"meta", "link", "br", "img", "input", "hr"}


class Reader(HTMLParser):
    """Every start tag with its attributes, and whether all that opens closes."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.open: list[str] = []
        self.words: list[str] = []
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        self.tags.append((tag, dict(attrs)))
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag, attrs):
        self.tags.append((tag, dict(attrs)))

    def handle_endtag(self, tag):
        assert self.open.pop() == tag

    def handle_data(self, data):
        self.words.append(data)

    def all(self, tag):
        return [attrs for name, attrs in self.tags if name == tag]


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    where = tmp_path_factory.mktemp("page")
    (where / "rig.toml").write_text(BRIEF, encoding="utf-8")
    assert run(["rank", str(where / "rig.toml"), "--draws", "32", "--page", str(where / "page.html")]) == 0
    return where


@pytest.fixture(scope="module")
def text(folder):
    return (folder / "page.html").read_text(encoding="utf-8")


@pytest.fixture(scope="module")
def page(text):
    return Reader(text)


def section(text, name):
    return text.split(f'<h2 id="{name}">')[1].split("</section>")[0]


def plain(part):
    return " ".join(re.sub(r"<[^>]+>", " ", part).split())


def test_it_is_whole_and_alone(text, page):
    assert text.startswith("<!DOCTYPE html>")
    assert not page.open
    assert not page.all("script")
    assert not page.all("link")
    for _, attrs in page.tags:
        for key, value in attrs.items():
            if key in ("src", "srcset", "data", "poster"):
                raise AssertionError(f"{key} = {value}")
            if key.endswith("href"):
                assert value.startswith("#")
            assert not key.startswith("on"), "no script"
    assert "@import" not in text
    assert not re.search(r"url\((?!#)", text)
    outside = set(re.findall(r"https?://[^\"'\s<]+", text)) - {
        "http://www.w3.org/2000/svg",
        "http://www.w3.org/1999/xlink",
    }
    assert not {link for link in outside if link not in plain(section(text, "sources"))}, "only names of namespaces"


def test_words_of_the_brief_are_escaped(text):
    assert "Rig <b>" not in text
    assert "<h1>Rig &lt;b&gt;&amp;&#34;1&#34;&lt;/b&gt;</h1>" in text


def test_ids_are_one_each_and_every_link_lands(page):
    ids = [attrs["id"] for _, attrs in page.tags if "id" in attrs]
    assert len(ids) == len(set(ids))
    assert {attrs["href"][1:] for attrs in page.all("a")} <= set(ids)
    for _, attrs in page.tags:
        for name in (attrs.get("aria-labelledby") or "").split():
            assert name in ids


def test_headings_come_in_order(page):
    levels = [int(name[1]) for name, _ in page.tags if re.fullmatch(r"h[1-6]", name)]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(after <= before + 1 for before, after in pairwise(levels))


def test_keyboard_and_reader_find_their_way(page):
    assert page.all("html")[0]["lang"] == "en"
    assert next(attrs for attrs in page.all("a"))["class"] == "skip"
    scrolling = [attrs for _, attrs in page.tags if attrs.get("class") == "scroll"] + page.all("pre")
    for attrs in scrolling:
        assert attrs["tabindex"] == "0"
        assert attrs["role"] == "region"
        assert "aria-labelledby" in attrs or "aria-label" in attrs
    assert all(attrs.get("scope") in ("col", "row") for attrs in page.all("th"))
    for attrs in page.all("svg"):
        assert attrs["role"] == "img"
        assert len(attrs["aria-labelledby"].split()) == 2
    assert len(page.all("svg")) == len(page.all("desc")) == len(page.all("figcaption")) > 6


def test_the_verdict_is_three_sentences_with_the_first_row_s_figures(text, folder, capsys):
    said = re.findall(r"<p>(.*?)</p>", section(text, "verdict"), re.DOTALL)
    assert len(said) == 3
    capsys.readouterr()
    assert run(["rank", str(folder / "rig.toml"), "--draws", "32", "--json"]) == 0
    rows = json.loads(capsys.readouterr().out)["rows"]
    best = rows[0]
    assert f"Make {best['candidate']} ({best['formula']}" in said[0]
    assert f"{100 * best['score']:.3g}\u00a0%" in said[0]
    assert f"{100 * best['score_low']:.3g}" in said[0]
    assert f"×{best['gain_over_bulk']:.2f}" in said[1]
    assert ("does not pay" in said[1]) == (best["gain_over_bulk"] < 0.97)
    assert f"wins {100 * best['win_share']:.0f} % of the draws" in said[2]
    serving = [row for row in rows if row["score"]]
    assert text.count('<th scope="row"') == len(serving)
    refused = plain(section(text, "refused"))
    assert all(row["candidate"] in refused for row in rows if not row["score"])
    assert len(serving) < len(rows)


def test_everything_that_a_meeting_asks_for_is_there(text):
    for name in ("ranking", "order", "best", "bulk", "assumptions", "notes", "cautions", "sources", "brief"):
        assert plain(section(text, name)), name
    assert section(text, "bulk").count("<figure>") == 3
    assert "wang2011" in section(text, "sources"), "the shared grain law is an assumption with a source"
    said = plain(section(text, "brief"))
    assert "legwright rank" in said
    assert "--draws 32 --seed 0 --page" in said
    assert "hot_K = 700" in said


def test_same_bytes_from_another_process(folder, text):
    """The order of sets and hashes has no say; nor has the clock."""
    before = folder / "page.html"
    kept = before.read_bytes()
    command = [
        sys.executable,
        "-c",
        "from legwright.show.cli import main; main()",
        "rank",
        str(folder / "rig.toml"),
    ]
    subprocess.run(
        [*command, "--draws", "32", "--page", str(before)],
        env={**os.environ, "PYTHONHASHSEED": "7", "TZ": "Asia/Tokyo"},
        check=True,
        capture_output=True,
        timeout=300,
    )
    assert before.read_bytes() == kept == text.encode()


def test_a_page_where_nobody_can_serve_says_so(tmp_path, capsys):
    path = tmp_path / "none.toml"
    path.write_text(BRIEF.replace("hot_K = 700", "hot_K = 1700"), encoding="utf-8")
    assert run(["rank", str(path), "--page", str(tmp_path / "none.html")]) == 3
    text = (tmp_path / "none.html").read_text(encoding="utf-8")
    assert "No candidate can serve" in section(text, "verdict")
    assert "sige-n" in section(text, "refused")
    assert "<svg" not in text
    capsys.readouterr()


@pytest.mark.parametrize(
    ("more", "said"),
    [
        ("[making]\nsize_scatter = 1.5", "legs that hit their design"),
        ("[leg]\npartner = 'pbte-p'", "beside pbte-p"),
        (
            "[leg]\ncontact_uohm_cm2 = 5\nlength_free_mm = [0.5, 5]",
            "Contacts and exchangers of the brief; the leg as long",
        ),
    ],
)
def test_a_page_says_what_its_brief_adds(more, said, tmp_path, capsys):
    path = tmp_path / "more.toml"
    path.write_text(BRIEF.replace('"pbte-p", "si-n", "bitese-n"', '"pbte-n"') + more, encoding="utf-8")
    assert run(["rank", str(path), "--page", str(tmp_path / "more.html")]) == 0
    assert said in plain((tmp_path / "more.html").read_text(encoding="utf-8"))
    capsys.readouterr()


def test_a_page_that_cannot_be_written_is_refused(tmp_path, folder, capsys):
    assert run(["rank", str(folder / "rig.toml"), "--page", str(tmp_path / "no" / "page.html")]) == 2
    said = capsys.readouterr()
    assert said.out == ""
    assert "page.html" in said.err


def test_the_template_ships_with_the_package():
    assert Path(str(resources.files("legwright.show").joinpath("page.html"))).is_file()
