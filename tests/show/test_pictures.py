"""The README shows what the program draws today: `python tests/show/test_pictures.py` makes its pictures anew."""

import re
import xml.etree.ElementTree as ET
from functools import cache
from io import StringIO
from pathlib import Path

import pytest
from rich._export_format import CONSOLE_SVG_FORMAT

from legwright.decide.brief import load_brief
from legwright.decide.rank import rank
from legwright.show import drawings, figures, records, tables
from legwright.show.layout import Screen

ROOT = Path(__file__).resolve().parents[2]
FOLDER = ROOT / "examples" / "pictures"
BRIEF = ROOT / "examples" / "sensor-cooler.toml"
NAMES = ("table", "size", "bulk")

#: points of a drawing: a shift that no eye sees, and more than processors differ by
UNSEEN = 0.02


@cache
def made() -> dict[str, str]:
    """Each picture by name, as SVG."""
    job = load_brief(BRIEF)
    rows = rank(job, BRIEF)
    at = drawings.design_in(job, rows[0])
    drawn = {
        "size": drawings.size_record(at, draws=256, seed=0),
        "bulk": drawings.temperature_record(at.candidate, at),
    }
    pictures = {name: figures.as_svg(figures.picture(record), name) for name, record in drawn.items()}
    lines = [records.rank_record(row) for row in rows if row.score]
    out = Screen(width=120, file=StringIO())
    out.console.record = True
    duty = {"kind": job.duty.kind, "hot_K": job.duty.hot_K, "cold_K": job.duty.cold_K}
    meanings = records.notes((flag for line in lines for flag in line["flags"]), ())["flag_meanings"]
    tables.rank(out, {"title": job.title, "duty": duty, "rows": lines, "flag_meanings": meanings, "cautions": []})
    return {
        "table": out.console.export_svg(title="legwright rank", unique_id="table", code_format=_alone()),
        **pictures,
    }


def _alone() -> str:
    """Rich's frame without its fonts, which lie on the network."""
    return re.sub(r"@font-face \{\{.*?\}\}\s*", "", CONSOLE_SVG_FORMAT, flags=re.DOTALL)


def words(svg: str) -> list[str]:
    return [
        text.strip() for node in ET.fromstring(svg).iter() if node.tag.endswith("text") for text in node.itertext()
    ]


def places(svg: str) -> dict[str, list[float]]:
    """Numbers of every line and marker that bears a name of ours."""
    found: dict[str, list[float]] = {}
    for group in ET.fromstring(svg).iter():
        name = group.get("class", "")
        if name and not re.search(r"_\d+$", name):
            for node in group.iter():
                numbers = re.findall(
                    r"-?\d+\.?\d*", node.get("d", "") + f" {node.get('x', '')} {node.get('y', '')}"
                )
                found.setdefault(name, []).extend(map(float, numbers))
    return found


@pytest.mark.parametrize("name", NAMES)
def test_picture_is_fresh(name):
    kept = (FOLDER / f"{name}.svg").read_text(encoding="utf-8")
    assert words(kept) == words(made()[name])
    before, now = places(kept), places(made()[name])
    assert before.keys() == now.keys()
    for line, numbers in before.items():
        assert numbers == pytest.approx(now[line], abs=UNSEEN), line


def test_figures_have_lines_to_compare():
    assert {"value", "grey", "by_wavelength", "best"} <= places(made()["size"]).keys()
    assert {"fitted", "line zt"} <= places(made()["bulk"]).keys()


@pytest.mark.parametrize("name", NAMES)
def test_picture_is_in_the_readme_with_words_and_needs_no_network(name):
    readme = (ROOT / "README.md").read_text(encoding="utf-8")
    (said,) = re.findall(rf"!\[([^\]]+)\]\(examples/pictures/{name}\.svg\)", readme)
    assert len(said.split()) > 4
    kept = (FOLDER / f"{name}.svg").read_text(encoding="utf-8")
    assert not re.search(r"(href|src)=\"http|url\(\"?http", kept)
    assert not re.search(r"/(home|root|tmp|work)/", kept)


def test_there_is_no_picture_without_a_test():
    assert {path.stem for path in FOLDER.iterdir()} == set(NAMES)


if __name__ == "__main__":
    for each, svg in made().items():
        (FOLDER / f"{each}.svg").write_text(svg, encoding="utf-8")
