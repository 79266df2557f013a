"""Figures show what was computed, with units, the same bytes each time, and readable without colour."""

import io
import re
import xml.etree.ElementTree as ET
from dataclasses import replace
from itertools import combinations
from pathlib import Path

import numpy as np
import pytest
from matplotlib.colors import to_hex, to_rgb
from PIL import Image

from legwright.candidate.library import load_candidate
from legwright.candidate.priors import load_priors
from legwright.decide.score import score
from legwright.physics.crystal import crystal
from legwright.physics.properties import evaluate, evaluate_crystal
from legwright.show import drawings, figures
from legwright.show.verbs.draw import KINDS

ROWS = [
    {
        "rank": 1,
        "candidate": "aa-n",
        "carrier": "n",
        "score": 0.08,
        "score_name": "efficiency",
        "score_low": 0.05,
        "score_high": 0.1,
    },
    {
        "rank": 2,
        "candidate": "bb-p",
        "carrier": "p",
        "score": 0.06,
        "score_name": "efficiency",
        "score_low": 0.02,
        "score_high": 0.09,
    },
    {"rank": 3, "candidate": "cc-p", "carrier": "p", "score": 0.0, "score_name": "efficiency"},
]

#: lines hold the computed doubles, scaled to per cent at most
EXACT = 1e-12


def record(kind, at):
    if kind == "ranking":
        return drawings.ranking_record("A duty", ROWS)
    if kind == "temperature":
        return drawings.temperature_record(at.candidate, at)
    if kind in ("paths", "shares"):
        return drawings.why_figure_record(kind, at, None)
    return {
        "size": lambda: drawings.size_record(at, 32, 0),
        "map": lambda: drawings.map_record(at),
        "sensitivity": lambda: drawings.sensitivity_record(at),
    }[kind]()


@pytest.fixture(params=KINDS)
def drawn(request, at_temperature):
    return figures.picture(record(request.param, at_temperature))


def lines(drawn, gid):
    return [line for axes in drawn.figure.axes for line in axes.lines if line.get_gid() == gid]


def y(drawn, gid):
    (line,) = lines(drawn, gid)
    return np.asarray(line.get_ydata(), dtype=float)


def test_the_verb_knows_every_figure():
    assert set(KINDS) == set(figures.KINDS)


# what is drawn is what was computed


def test_size_figure_shows_zt(at_temperature):
    drawn = figures.picture(record("size", at_temperature))
    (line,) = lines(drawn, "value")
    sizes = np.asarray(line.get_xdata()) * 1e-9
    one = crystal(at_temperature.candidate)
    np.testing.assert_allclose(
        line.get_ydata(), evaluate(at_temperature.candidate, 900.0, 1e26, sizes).zt, rtol=EXACT
    )
    for gid, exponent in (("grey", 0.0), ("by_wavelength", 1.0)):
        law = replace(one, phonons=replace(one.phonons, grain_exponent=exponent))
        np.testing.assert_allclose(y(drawn, gid), evaluate_crystal(law, 900.0, 1e26, sizes).zt, rtol=EXACT)
    assert np.all(y(drawn, "grey") >= y(drawn, "by_wavelength")), "the grey law stops more heat"
    assert y(drawn, "coarse")[0] == pytest.approx(float(evaluate(at_temperature.candidate, 900.0, 1e26, np.inf).zt))


def test_size_figure_shows_a_duty_s_score_in_per_cent(over_duty):
    drawn = figures.picture(record("size", over_duty))
    (line,) = lines(drawn, "value")
    sizes = np.asarray(line.get_xdata()) * 1e-9
    expected = score(over_duty.candidate, over_duty.aim, 1e26, sizes, "grain")
    np.testing.assert_allclose(np.asarray(line.get_ydata()), 100 * expected, rtol=EXACT)
    assert drawn.figure.axes[0].get_ylabel() == "efficiency [%]"


def test_band_holds_the_curve_and_settles_with_more_draws(at_temperature):
    few, many = (drawings.size_record(at_temperature, draws, 0)["curve"] for draws in (128, 2048))
    for row in many:
        assert row["low"] < row["value"] < row["high"]
    for end in ("low", "high"):
        ratio = [a[end] / b[end] for a, b in zip(few, many, strict=True)]
        # a 5 % point of 128 draws with a spread of about one half: s.e. about 0.5 · √(0.05·0.95/128)/0.1 = 0.1
        assert np.abs(np.log(ratio)).max() < 0.3


def test_map_shows_the_scores_and_where_it_can_be_made(at_temperature):
    made = record("map", at_temperature)
    sizes, dopings = np.array(made["sizes_nm"]) * 1e-9, np.array(made["dopings_per_cm3"]) * 1e6
    expected = evaluate(at_temperature.candidate, 900.0, dopings[:, None], sizes).zt
    np.testing.assert_allclose(made["values"], expected, rtol=EXACT)
    drawn = figures.picture(made)
    (outline,) = lines(drawn, "makeable")
    doping, making = at_temperature.candidate.data.doping, at_temperature.candidate.data.making
    assert min(outline.get_xdata()) == pytest.approx(making.smallest_grain.si * 1e9)
    assert min(outline.get_ydata()) == pytest.approx(doping.lowest.si * 1e-6)
    assert max(outline.get_ydata()) == pytest.approx(doping.highest.si * 1e-6)
    (best,) = lines(drawn, "best")
    assert best.get_xdata()[0] == pytest.approx(50.0)


def test_paths_and_shares_show_what_why_found(at_temperature):
    paths = record("paths", at_temperature)
    drawn = figures.picture(paths)
    for key in ("electrons_within", "phonons_within"):
        np.testing.assert_allclose(y(drawn, key), [100 * row[key] for row in paths["free_paths"]], rtol=EXACT)
    drawn = figures.picture(record("shares", at_temperature))
    for kind in ("electrical", "lattice thermal"):
        bars = [bar.get_width() for bar in drawn.figure.axes[0].patches if bar.get_gid() == f"share {kind}"]
        assert sum(bars) == pytest.approx(100)


def test_ranking_leaves_out_who_cannot_serve_and_shows_intervals():
    drawn = figures.picture(drawings.ranking_record("A duty", ROWS))
    (axes,) = drawn.figure.axes
    assert [label.get_text() for label in axes.get_yticklabels()] == ["aa-n", "bb-p"]
    assert y(drawn, "score n").tolist() == [0]
    (interval,) = [part for part in axes.collections if part.get_gid() == "interval"]
    ends = [segment[:, 0].tolist() for segment in interval.get_segments()]
    np.testing.assert_allclose(ends, [[5, 10], [2, 9]])
    bare = [{key: value for key, value in row.items() if not key.startswith("score_l")} for row in ROWS]
    assert not figures.picture(drawings.ranking_record("A duty", bare)).figure.axes[0].collections


@pytest.mark.parametrize("name", ["sige-n", "pbte-p", "si-n"])
def test_fitted_points_are_filled_and_the_others_open(name):
    made = drawings.temperature_record(load_candidate(name), None)
    points = [point for sample in made["samples"] for point in sample["points"]]
    drawn = figures.picture(made)
    for gid, fitted in (("fitted", True), ("not fitted", False)):
        shown = lines(drawn, gid)
        assert sum(len(line.get_xdata()) for line in shown) == sum(point["fitted"] == fitted for point in points)
        assert all((to_hex(line.get_markerfacecolor()) != "#ffffff") == fitted for line in shown)
    assert any(point["fitted"] for point in points)


def test_a_sample_s_line_is_the_model_at_its_own_doping():
    made = drawings.temperature_record(load_candidate("pbte-p"), None)
    for sample in made["samples"]:
        kelvin = [row["temperature_K"] for row in sample["curve"]]
        expected = evaluate(load_candidate("pbte-p"), kelvin, sample["doping_per_cm3"] * 1e6, np.inf)
        np.testing.assert_allclose([row["zt"] for row in sample["curve"]], expected.zt, rtol=EXACT)
        np.testing.assert_allclose(
            [row["seebeck_uV_per_K"] for row in sample["curve"]], 1e6 * expected.seebeck, rtol=EXACT
        )


def test_sensitivity_shows_derivative_times_spread(at_temperature):
    """zT = S²σT/κ: with factors on σ (and κ_e), S and κ_L the derivatives are closed forms."""
    made = record("sensitivity", at_temperature)
    change = {row["name"]: row["change"] for row in made["leans"]}
    here = evaluate(at_temperature.candidate, 900.0, 1e26, 50e-9)
    zt, share = float(here.zt), float(here.lattice_thermal_conductivity / here.thermal_conductivity)
    model = load_priors().discrepancy
    expected = {
        "model's Seebeck coefficient": 2 * zt * model.seebeck.si,
        "model's lattice conductivity": -zt * share * model.thermal_conductivity_sized.si,
        "model's electrical conductivity": zt * share * model.electrical_conductivity.si,
    }
    for name, value in expected.items():
        assert change[name] == pytest.approx(value, rel=5e-3), "central differences over 0.1: h²/6"
    fixing = [anchor for anchor in at_temperature.candidate.data.anchor if anchor.fixes != "nothing"]
    assert sum("anchor" in row["name"] for row in made["leans"]) == len(fixing)
    assert any("anchor" in name and value != 0 for name, value in change.items())
    drawn = figures.picture(made)
    bars = [bar.get_width() * (1 if bar.get_gid() == "rises" else -1) for bar in drawn.figure.axes[0].patches]
    np.testing.assert_allclose(bars, [row["change"] for row in made["leans"]][: len(bars)])


def test_the_recipe_for_a_new_figure_works():
    """The function in DEVELOPERS.md, as it stands there."""
    text = (Path(__file__).resolve().parents[2] / "DEVELOPERS.md").read_text(encoding="utf-8")
    (body,) = re.findall(r"^\+(def lorenz.*?)^ KINDS", text, re.DOTALL | re.MULTILINE)
    names = dict(vars(figures))
    exec(body.replace("\n+", "\n"), names)
    curve = [{"temperature_K": 300.0, "lorenz": 2.44}, {"temperature_K": 400.0, "lorenz": 2.0}]
    drawn = names["lorenz"]({"candidate": "aa-n", "curve": curve})
    assert y(drawn, "lorenz").tolist() == [2.44, 2.0]
    assert drawn.says == "From 2 to 2.44."


# labels, words, bytes


def test_every_axis_with_figures_names_its_unit(drawn):
    for axes in drawn.figure.axes:
        named = [axes.get_xlabel(), axes.get_ylabel(), axes.get_title(loc="left")]
        assert any(re.search(r"\[.+\]$", name) for name in named), named
        assert all(re.search(r"\[.+\]$", name) for name in named if name)


def test_the_words_tell_the_figures(drawn):
    assert len(re.findall(r"\d", drawn.says)) > 5
    assert drawn.says.endswith(".")
    assert "nan" not in drawn.says.lower()


def test_nothing_is_cut_off(drawn):
    whole = drawn.figure.bbox
    drawn.figure.canvas.draw()
    for axes in drawn.figure.axes:
        box = axes.get_tightbbox()
        slack = 2.0  # pixels of 100 to the inch
        assert box.x0 > -slack
        assert box.y0 > -slack
        assert box.x1 < whole.x1 + slack
        assert box.y1 < whole.y1 + slack
    for legend in drawn.figure.legends:
        box = legend.get_window_extent()
        assert box.x1 < whole.x1
        assert all(box.y0 > axes.bbox.y1 - 2 for axes in drawn.figure.axes), "the legend stands above the axes"


@pytest.mark.parametrize("kind", KINDS)
def test_same_record_same_bytes(kind, at_temperature):
    made = record(kind, at_temperature)
    svg, png = zip(
        *((figures.as_svg(one, "x"), figures.as_png(one)) for one in map(figures.picture, (made, made))),
        strict=True,
    )
    assert svg[0] == svg[1]
    assert png[0] == png[1]


def test_svg_is_whole_names_itself_and_reaches_for_nothing(drawn):
    text = figures.as_svg(drawn, "mine")
    root = ET.fromstring(text)
    ids = [node.get("id") for node in root.iter() if node.get("id")]
    assert len(ids) == len(set(ids))
    assert all(name.startswith("mine-") for name in ids)
    assert set(re.findall(r"url\(#([^)]+)\)", text)) <= set(ids)
    links = [value for node in root.iter() for key, value in node.attrib.items() if key.endswith("href")]
    assert all(value.startswith("#") and value[1:] in ids for value in links)
    assert root.get("role") == "img"
    title, desc = root[0], root[1]
    assert root.get("aria-labelledby").split() == [title.get("id"), desc.get("id")]
    assert title.text == drawn.title
    assert desc.text == drawn.says
    assert "<text" in text, "words stay words"
    assert not re.search(r"20\d\d-\d\d-\d\d", text), "no date"


def test_words_in_a_figure_are_escaped():
    rows = [{**row, "candidate": f"<b>&{row['candidate']}"} for row in ROWS]
    text = figures.as_svg(figures.picture(drawings.ranking_record('<script>"&', rows)), "x")
    assert "<script" not in text
    assert ET.fromstring(text)[0].text.startswith('<script>"&')


# without colour


def luminance(colour):
    """Relative luminance (WCAG 2.1, W3C 2018)."""
    parts = np.array(to_rgb(colour))
    linear = np.where(parts <= 0.04045, parts / 12.92, ((parts + 0.055) / 1.055) ** 2.4)
    return float(linear @ [0.2126, 0.7152, 0.0722])


def lightness(colour):
    """CIE 1976 L*."""
    return 116 * luminance(colour) ** (1 / 3) - 16


def test_lines_stand_out_from_white():
    """Graphical objects: at least 3 : 1 (WCAG 2.1, success criterion 1.4.11)."""
    for colour, _, _ in (*figures.SERIES, (figures.BLACK, "-", "")):
        assert 1.05 / (luminance(colour) + 0.05) >= 3, colour


def test_series_differ_in_more_than_colour():
    for one, other in combinations(figures.SERIES, 2):
        assert one[1] != other[1]
        assert one[2] != other[2]


def test_fills_that_stand_side_by_side_differ_in_lightness_and_hatch(at_temperature):
    assert abs(lightness(figures.BLUE) - lightness(figures.ORANGE)) > 20
    axes = figures.picture(record("shares", at_temperature)).figure.axes[0]
    kinds = {bar.get_gid(): bar.get_hatch() for bar in axes.patches}
    assert len(set(kinds.values())) == 2


def test_the_palette_is_the_published_one():
    """Okabe & Ito, Color Universal Design (2008), but for the quiet grey."""
    published = {"#000000", "#E69F00", "#56B4E9", "#009E73", "#0072B2", "#D55E00"}
    used = {figures.BLACK, figures.ORANGE, figures.SKY, figures.GREEN, figures.BLUE, figures.VERMILLION}
    assert used == published


def test_in_grey_every_line_is_still_there(at_temperature):
    """The picture in grey: each line's own grey level is found, apart from paper, band and window."""
    drawn = figures.picture(record("size", at_temperature))
    grey = np.asarray(Image.open(io.BytesIO(figures.as_png(drawn))).convert("L"), dtype=int)
    for gid in ("value", "grey", "by_wavelength"):
        (line,) = lines(drawn, gid)
        rgb = tuple(round(255 * part) for part in to_rgb(line.get_color()))
        level = Image.new("RGB", (1, 1), rgb).convert("L").getpixel((0, 0))
        assert np.sum(np.abs(grey - level) <= 3) > 200, gid
        assert level < 140, "paper is 255, the band about 215"


def test_the_map_rises_in_lightness():
    """One hue order for every eye and for grey: lightness rises all the way (Nuñez, Anderton & Renslow 2018)."""
    from matplotlib import colormaps

    steps = [lightness(colour[:3]) for colour in colormaps["cividis"](np.linspace(0, 1, 32))]
    assert np.all(np.diff(steps) > 0)
