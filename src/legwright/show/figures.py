"""Figures from plain records in trade units: one function a kind, one style, SVG and PNG.

Colours are those of Okabe & Ito (Color Universal Design, 2008); every line also differs by dash and every point by
marker, so that a figure reads without colour. Nothing here computes physics, and no state outlives a call.
"""

from __future__ import annotations

import io
import math
import re
import textwrap
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from html import escape
from typing import Any

import matplotlib.style
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.patches import Patch
from matplotlib.ticker import FixedLocator, FuncFormatter, MaxNLocator, NullLocator

from legwright.show.layout import figure
from legwright.show.tables import SCORE_TITLES

Record = Mapping[str, Any]

BLACK, BLUE, VERMILLION, GREEN = "#000000", "#0072B2", "#D55E00", "#009E73"
ORANGE, SKY, PURPLE = "#E69F00", "#56B4E9", "#CC79A7"
QUIET = "#767676"
#: each series: colour of at least 3 : 1 on white, dash, marker
SERIES: tuple[tuple[str, Any, str], ...] = (
    (BLUE, "-", "o"),
    (VERMILLION, (0, (5, 2)), "s"),
    (GREEN, (0, (1, 1.3)), "^"),
    (QUIET, (0, (6, 2, 1, 2)), "D"),
)
_SHADE: dict[str, Any] = {"facecolor": SKY, "edgecolor": BLUE, "alpha": 0.4, "linewidth": 0.6}

_WIDTH = 4.8  # inches: letters stay readable on a telephone, two or three stand side by side on a screen
_LEFT, _RIGHT, _BOTTOM, _LINE = 0.7, 0.2, 0.5, 0.19
_STYLE = {
    "svg.hashsalt": "legwright",
    "svg.fonttype": "none",
    "font.family": "DejaVu Sans",
    "font.size": 9,
    "axes.titlesize": 9,
    "axes.labelsize": 9,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.linewidth": 0.7,
    "axes.grid": True,
    "axes.axisbelow": True,
    "grid.color": "#e4e4e4",
    "grid.linewidth": 0.6,
    "xtick.labelsize": 8.5,
    "ytick.labelsize": 8.5,
    "legend.fontsize": 8.5,
    "legend.frameon": False,
    "legend.handlelength": 2.4,
    "legend.borderaxespad": 0,
    "legend.borderpad": 0.1,
    "lines.linewidth": 1.6,
    "lines.markersize": 5,
    "hatch.linewidth": 0.5,
}


@dataclass(frozen=True)
class Picture:
    """A figure with its title and with what it says, for those who do not see it."""

    figure: Figure
    title: str
    says: str

    @property
    def alt(self) -> str:
        """Title and words in one."""
        return f"{self.title}. {self.says}"


def picture(record: Record) -> Picture:
    """The figure of a record, by its `kind`."""
    with matplotlib.style.context(["default", _STYLE]):
        return KINDS[record["kind"]](record)


def as_svg(drawn: Picture, name: str) -> str:
    """SVG with title and description; `name` sets its ids apart from those of other figures in one page."""
    out = io.StringIO()
    with matplotlib.style.context(["default", _STYLE]):
        drawn.figure.savefig(out, format="svg", metadata={"Date": None, "Creator": None})
    whole = re.sub(r"<metadata>.*?</metadata>\s*", "", out.getvalue(), flags=re.DOTALL)
    body = whole[whole.index("<svg") :]
    body = body.replace('<g id="', '<g class="')  # names of groups repeat; nothing refers to them
    body = re.sub(r'(\bid="|href="#|url\(#)', rf"\g<1>{name}-", body)
    label = f'role="img" aria-labelledby="{name}-title {name}-desc"'
    words = (
        f'<title id="{name}-title">{escape(drawn.title)}</title><desc id="{name}-desc">{escape(drawn.says)}</desc>'
    )
    opening, rest = body.split(">", 1)
    return f"{opening} {label}>\n {words}{rest}"


def as_png(drawn: Picture) -> bytes:
    """PNG, twice the size of the screen's points, with what it says in its description."""
    out = io.BytesIO()
    with matplotlib.style.context(["default", _STYLE]):
        words = {"Software": None, "Title": drawn.title, "Description": drawn.says}
        drawn.figure.savefig(out, format="png", dpi=200, metadata=words)
    return out.getvalue()


def against_size(record: Record) -> Picture:
    """(a) Worth against size: window, band of the draws, both ends of the grain law."""
    curve, worth = record["curve"], Worth(record["quantity"])
    sizes = [row["size_nm"] for row in curve]
    lines: list[tuple[str, str, tuple[str, Any, str]]] = [("as modelled", "value", SERIES[0])]
    if "grey" in curve[0]:
        lines += [("grey grain law", "grey", SERIES[1]), ("grain law by wavelength", "by_wavelength", SERIES[2])]
    title = f"{record['candidate']}: {worth.word} against {record['shape']} size, {record['where']}"
    sheet = _blank(title, 2.5, legend_rows=3)
    axes = sheet.axes
    if record["window_nm"]:
        axes.axvspan(*record["window_nm"], color="#d6d6d6", linewidth=0, label="keeps 95 % of the best")
    if "low" in curve[0]:
        low, high = ([worth.shown(row[key]) for row in curve] for key in ("low", "high"))
        axes.fill_between(sizes, low, high, **_SHADE, label="90 % of the draws")
    for label, key, (colour, dash, _) in lines:
        axes.plot(sizes, [worth.shown(row[key]) for row in curve], color=colour, ls=dash, label=label, gid=key)
    if record["coarse"]:
        axes.axhline(worth.shown(record["coarse"]), color=QUIET, lw=1, ls=(0, (2, 2)), label="coarse", gid="coarse")
    if sizes[0] < record["smallest_nm"] < sizes[-1]:
        axes.axvline(record["smallest_nm"], color=BLACK, lw=0.8, label="smallest made", gid="smallest")
    best = min(curve, key=lambda row: abs(math.log(row["size_nm"] / record["size_nm"])))
    axes.plot(record["size_nm"], worth.shown(record["value"]), "o", ms=6, mfc="white", mec=BLACK, gid="best")
    axes.set(xscale="log", xlim=(sizes[0], sizes[-1]), xlabel=f"{record['shape']} size [nm]", ylabel=worth.label)
    axes.set_ylim(bottom=0)
    _log_ticks(axes, "x")
    sheet.legend()
    first, last = record["window_nm"] or (None, None)
    alt = (
        f"At {density(record['doping_per_cm3'])}: best {worth.said(record['value'])} at "
        f"{figure(record['size_nm'])} nm; sizes from {figure(first)} to {figure(last)} nm keep 95 % of it; coarse "
        f"material gives {worth.said(record['coarse'])}."
    )
    if "low" in best:
        ends = f"{worth.said(best['low'])} and {worth.said(best['high'])}"
        alt += f" At the best size 90 % of the draws lie between {ends}."
    if "grey" in best:
        grey, by_wavelength = worth.said(best["grey"]), worth.said(best["by_wavelength"])
        alt += f" Under the grey grain law {grey}, by wavelength {by_wavelength}."
    return Picture(sheet.figure, title, alt)


_LATTICE = "lattice_thermal_conductivity_W_per_mK"
_PANELS = (
    ("zT [1]", ("zt",)),
    ("S [µV/K]", ("seebeck_uV_per_K",)),
    ("σ [S/cm]", ("electrical_conductivity_S_per_cm",)),
    ("κ [W/(m K)]", ("thermal_conductivity_W_per_mK", _LATTICE)),
)
#: a quantity that spans more than this factor gets a logarithmic axis
_WIDE = 50.0


def against_temperature(record: Record) -> Picture:
    """(b) zT, S, σ, κ against temperature: published coarse samples, each with the model at its doping."""
    title = f"{record['candidate']}: model and published coarse samples"
    series = [*record["samples"], *([record["design"]] if record.get("design") else [])]
    sheet = _blank(title, 3.9, legend_rows=len(series) + 3, panels=2)
    handles = []
    for place, each in enumerate(series):
        design = "size_nm" in each
        colour, dash, marker = (BLACK, "-", "") if design else SERIES[place % len(SERIES)]
        width = 2.2 if design else 1.2
        for axes, (_, quantities) in zip(sheet.panels, _PANELS, strict=True):
            for key in quantities:
                points = [point for point in each["points"] if point["quantity"] == key]
                if points or design:
                    thin = 0.6 if key == _LATTICE else width
                    rows = [(row["temperature_K"], row[key]) for row in each["curve"]]
                    axes.plot(*zip(*rows, strict=True), color=colour, ls=dash, lw=thin, gid=f"line {key}")
                    _points(axes, points, colour, "v" if key == _LATTICE else marker)
        handles.append(Line2D([], [], color=colour, ls=dash, lw=width, marker=marker))
    labels = [_sample_label(each) for each in series]
    for axes, (label, _) in zip(sheet.panels, _PANELS, strict=True):
        axes.set_title(label, loc="left")
        axes.xaxis.set_major_locator(MaxNLocator(4))
        _fit_scale(axes, label[0])
    for axes in sheet.panels[2:]:
        axes.set_xlabel("temperature [K]")
    both = [
        Line2D([], [], color=QUIET, ls="", marker="o"),
        Line2D([], [], color=QUIET, ls="", marker="o", mfc="white"),
    ]
    heat = [Line2D([], [], color=QUIET, lw=0.6), Line2D([], [], color=QUIET, ls="", marker="v")]
    sheet.legend(
        1, [*handles, *both, tuple(heat)], [*labels, "fixed the candidate", "did not", "lattice part of κ"]
    )
    points = [point for each in series for point in each["points"]]
    fitted = sum(point["fitted"] for point in points)
    alt = f"{len(points)} published figures, {fitted} of which fixed the candidate's prefactors. " + " ".join(
        f"{_sample_label(each)}: {_deviations(each)}" for each in record["samples"]
    )
    if record["left_out"]:
        alt += f" {record['left_out']} samples with fewer figures are left out."
    return Picture(sheet.figure, title, alt.strip())


def _fit_scale(axes: Axes, symbol: str) -> None:
    """From zero; a conductivity that spans much on a logarithmic axis; S, which has a sign, as it comes."""
    values = np.abs(np.concatenate([line.get_ydata() for line in axes.lines] or [np.ones(1)]))
    if symbol in "σκ" and np.min(values) > 0 and np.max(values) > _WIDE * np.min(values):
        axes.set_yscale("log")
        _log_ticks(axes, "y")
        return
    axes.yaxis.set_major_locator(MaxNLocator(5))
    if symbol != "S":
        axes.set_ylim(bottom=0)


def _points(axes: Axes, points: Sequence[Record], colour: str, marker: str) -> None:
    for fitted in (True, False):
        chosen = [point for point in points if point["fitted"] == fitted]
        if chosen:
            face = colour if fitted else "white"
            xy = ([p["temperature_K"] for p in chosen], [p["value"] for p in chosen])
            axes.plot(*xy, ls="", marker=marker, color=colour, mfc=face, gid="fitted" if fitted else "not fitted")


def _sample_label(each: Record) -> str:
    if "size_nm" in each:
        return f"this design, {_size(each['size_nm'])}, {density(each['doping_per_cm3'])}"
    return f"{textwrap.shorten(each['name'], 30, placeholder='…')}, {density(each['doping_per_cm3'])}"


def _deviations(each: Record) -> str:
    """How far the model is from a sample's figures, in words."""
    off = []
    for point in each["points"]:
        kelvin = [row["temperature_K"] for row in each["curve"]]
        model = float(np.interp(point["temperature_K"], kelvin, [row[point["quantity"]] for row in each["curve"]]))
        off.append(abs(model / point["value"] - 1))
    return f"model off by {100 * float(np.median(off)):.0f} % (median of {len(off)})."


def design_map(record: Record) -> Picture:
    """(c) Worth over size and doping: the best design, and where nobody is known to make it."""
    worth = Worth(record["quantity"])
    title = f"{record['candidate']}: {worth.word} over {record['shape']} size and doping, {record['where']}"
    sheet = _blank(title, 2.9, legend_rows=1, right=0.52)
    axes = sheet.axes
    sizes, dopings = np.array(record["sizes_nm"]), np.array(record["dopings_per_cm3"])
    values = np.array([[worth.shown(value) for value in row] for row in record["values"]])
    axes.grid(False)
    shades = axes.contourf(sizes, dopings, values, float(np.max(values)) * np.linspace(0, 1, 11), cmap="cividis")
    levels = worth.shown(record["value"]) * np.array([0.5, 0.8, 0.95])
    dashes = ["dotted", "dashed", "solid"]
    axes.contour(sizes, dopings, values, levels, colors="white", linewidths=1.1, linestyles=dashes)
    smallest, (low, high) = record["smallest_nm"], record["makeable_dopings_per_cm3"]
    outside: dict[str, Any] = {"facecolor": "none", "edgecolor": "white", "hatch": "//", "linewidth": 0}
    left, right = max(smallest or 0, sizes[0]), sizes[-1]
    for edges in ((dopings[0], low), (high, dopings[-1])):
        axes.fill_between([sizes[0], right], *edges, **outside)
    axes.fill_between([sizes[0], left], low, high, **outside)
    axes.plot([left, right, right, left, left], [low, low, high, high, low], color="white", lw=1.3, gid="makeable")
    if record["size_nm"]:
        where = (record["size_nm"], record["doping_per_cm3"])
        axes.plot(*where, marker="*", ms=13, mfc="white", mec=BLACK, ls="", gid="best", clip_on=False, zorder=5)
    axes.set(xscale="log", yscale="log", xlabel=f"{record['shape']} size [nm]", ylabel="doping [cm⁻³]")
    axes.set(xlim=(sizes[0], sizes[-1]), ylim=(dopings[0], dopings[-1]))
    _log_ticks(axes, "x")
    _log_ticks(axes, "y", powers=True)
    bar = sheet.figure.colorbar(shades, ax=axes, pad=0.03, fraction=0.06)
    bar.set_label(worth.label)
    bar.locator = MaxNLocator(5)
    bar.update_ticks()
    star = Line2D([], [], marker="*", ms=11, mfc="white", mec=BLACK, ls="")
    hatched = Patch(facecolor="#888888", edgecolor="white", hatch="////")
    sheet.legend(2, [star, hatched], ["this design", "not known to be made"])
    sizes_made = f"from {figure(smallest)} nm" if smallest else "the file names no smallest size"
    makeable = f"Made so far: {sizes_made}; from {density(low)} to {density(high)}."
    alt = f"The star: {worth.said(record['value'])} at {figure(record['size_nm'])} nm and "
    alt += f"{density(record['doping_per_cm3'])}. Lines at 50 (dotted), 80 (dashed) and 95 % (solid) of it. "
    alt += makeable
    return Picture(sheet.figure, title, alt)


def free_paths(record: Record) -> Picture:
    """(d) Share of charge and of lattice heat carried on free paths up to a length, and the size beside them."""
    rows = record["free_paths"]
    title = f"{record['candidate']}: free paths of carriers and phonons, {record['where']}"
    sheet = _blank(title, 2.3, legend_rows=2)
    axes = sheet.axes
    paths = [row["path_nm"] for row in rows]
    for label, key, (colour, dash, _) in (
        ("charge, by carriers", "electrons_within", SERIES[0]),
        ("lattice heat, by phonons", "phonons_within", SERIES[1]),
    ):
        axes.plot(paths, [100 * row[key] for row in rows], color=colour, ls=dash, label=label, gid=key)
    if record["size_nm"]:
        axes.axvline(
            record["size_nm"], color=QUIET, lw=1, ls=(0, (2, 2)), label=f"{record['shape']} size", gid="size"
        )
    axes.set(xscale="log", xlim=(paths[0], paths[-1]), ylim=(0, 100))
    axes.set(xlabel="free path inside a grain [nm]", ylabel="carried on shorter paths [%]")
    _log_ticks(axes, "x")
    sheet.legend()
    halves = [_half_path(rows, key) for key in ("electrons_within", "phonons_within")]
    alt = (
        f"At {density(record['doping_per_cm3'])} half of the charge is carried on free paths below "
        f"{figure(halves[0], 2)} nm, half of the lattice heat below {figure(halves[1], 2)} nm. "
        f"The design: {record['shape']}, {_size(record['size_nm'])}."
    )
    return Picture(sheet.figure, title, alt)


def _half_path(rows: Sequence[Record], key: str) -> float:
    return float(np.exp(np.interp(0.5, [row[key] for row in rows], np.log([row["path_nm"] for row in rows]))))


def ranking(record: Record) -> Picture:
    """(e) The candidates that can serve, best on top, with the interval of the draws where there is one."""
    rows = [row for row in record["rows"] if row["score"]]
    worth = Worth(rows[0]["score_name"])
    drawn_too = "score_low" in rows[0]
    title = f"{record['title']}: {worth.word} of the candidates"
    sheet = _blank(title, 0.19 * len(rows) + 0.2, legend_rows=1, left=1.12)
    axes = sheet.axes
    places = list(range(len(rows)))
    if drawn_too:
        low, high = ([worth.shown(row[key]) for row in rows] for key in ("score_low", "score_high"))
        axes.hlines(places, low, high, color=SKY, lw=4, alpha=0.7, gid="interval", label="90 % of the draws")
    for carrier, (colour, marker) in {"n": (BLUE, "o"), "p": (VERMILLION, "s")}.items():
        mine = [place for place, row in zip(places, rows, strict=True) if row["carrier"] == carrier]
        scores = [worth.shown(rows[place]["score"]) for place in mine]
        axes.plot(scores, mine, ls="", marker=marker, color=colour, gid=f"score {carrier}", label=f"{carrier}-type")
    axes.set(ylim=(len(rows) - 0.5, -0.5), xlabel=worth.label)
    axes.set_xlim(left=0)
    axes.set_yticks(places, [row["candidate"] for row in rows])
    axes.tick_params(axis="y", length=0)
    sheet.legend(3)
    said = [
        f"{row['rank']}. {row['candidate']} {worth.said(row['score'])}"
        + (f" ({worth.said(row['score_low'])} to {worth.said(row['score_high'])})" if drawn_too else "")
        for row in rows[:5]
    ]
    return Picture(sheet.figure, title, f"{len(rows)} can serve. The first: {'; '.join(said)}.")


def shares(record: Record) -> Picture:
    """(f) What resists charge and lattice heat, process by process."""
    title = f"{record['candidate']}: what resists charge and heat, {record['where']}"
    parts = (
        ("electrical", record["electrical_resistance_shares"], BLUE, ""),
        ("lattice thermal", record["thermal_resistance_shares"], ORANGE, "////"),
    )
    bars = [
        (name, kind, 100 * share, colour, hatch)
        for kind, group, colour, hatch in parts
        for name, share in sorted(group.items(), key=lambda part: -part[1])
    ]
    gap = len(record["electrical_resistance_shares"])
    places = [place + 0.6 * (place >= gap) for place in range(len(bars))]
    sheet = _blank(title, 0.2 * len(bars) + 0.2, legend_rows=1, left=1.55)
    axes = sheet.axes
    for place, (_, kind, share, colour, hatch) in zip(places, bars, strict=True):
        axes.barh(place, share, height=0.7, color=colour, edgecolor=BLACK, lw=0.5, hatch=hatch, gid=f"share {kind}")
        axes.annotate(f"{share:.0f} %", (share, place), (3, 0), textcoords="offset points", va="center", fontsize=8)
    axes.set(ylim=(places[-1] + 0.5, -0.5), xlim=(0, 108), xlabel="share of the resistance [%]")
    axes.set_yticks(places, [name for name, *_ in bars])
    axes.tick_params(axis="y", length=0)
    axes.grid(False, axis="y")
    patches = [Patch(facecolor=colour, edgecolor=BLACK, lw=0.5, hatch=hatch) for *_, colour, hatch in parts]
    sheet.legend(2, patches, [kind for kind, *_ in parts])
    said = "; ".join(
        f"{kind}: " + ", ".join(f"{n} {s:.0f} %" for n, k, s, *_ in bars if k == kind) for kind, *_ in parts
    )
    size = _size(record["size_nm"])
    return Picture(
        sheet.figure,
        title,
        f"{record['shape']} size {size}, {density(record['doping_per_cm3'])}. {said}.",
    )


def sensitivity(record: Record) -> Picture:
    """(g) How the worth of a design moves with each assumption, moved by one standard deviation."""
    worth = Worth(record["quantity"])
    rows = record["leans"][:_MOST_LEANS]
    title = f"{record['candidate']}: what its {worth.word} leans on, {record['where']}"
    sheet = _blank(title, 0.2 * len(rows) + 0.2, legend_rows=1, left=2.62)
    axes = sheet.axes
    for place, row in enumerate(rows):
        rises = row["change"] >= 0
        axes.barh(
            place,
            worth.shown(abs(row["change"])),
            height=0.7,
            color=BLUE if rises else ORANGE,
            hatch="" if rises else "////",
            edgecolor=BLACK,
            lw=0.5,
            gid="rises" if rises else "falls",
        )
    axes.set(ylim=(len(rows) - 0.5, -0.5), xlabel=f"change of {worth.word} [{worth.step}]")
    axes.xaxis.set_major_locator(MaxNLocator(4))
    axes.set_yticks(range(len(rows)), [_lean_name(row) for row in rows])
    axes.tick_params(axis="y", length=0)
    axes.grid(False, axis="y")
    patches = [
        Patch(facecolor=BLUE, edgecolor=BLACK, lw=0.5),
        Patch(facecolor=ORANGE, edgecolor=BLACK, lw=0.5, hatch="////"),
    ]
    sheet.legend(2, patches, ["rises with it", "falls with it"])
    said = "; ".join(f"{_lean_name(row)} {worth.moved(row['change'])}" for row in rows[:6])
    alt = "Change for one standard deviation of each assumption at the same design, of "
    return Picture(sheet.figure, title, f"{alt}{worth.said(record['value'])}. Largest: {said}.")


def _lean_name(row: Record) -> str:
    return row["name"] if row["doping_per_cm3"] is None else f"{row['name']}, {density(row['doping_per_cm3'])}"


_MOST_LEANS = 12

KINDS: dict[str, Callable[[Record], Picture]] = {
    "size": against_size,
    "temperature": against_temperature,
    "map": design_map,
    "paths": free_paths,
    "ranking": ranking,
    "shares": shares,
    "sensitivity": sensitivity,
}


class Worth:
    """A score or zT as it is shown: its word, its label with the unit, and its scale (per cent for efficiency)."""

    def __init__(self, quantity: str) -> None:
        self.word, unit = SCORE_TITLES.get(quantity, ("zT", ""))
        self.percent = quantity == "efficiency"
        self.unit = "%" if self.percent else unit or "1"
        self.label = f"{self.word} [{self.unit}]"

    def shown(self, value: float) -> float:
        return 100 * value if self.percent else value

    @property
    def step(self) -> str:
        """Unit of a difference."""
        return "% points" if self.percent else self.unit

    def said(self, value: float | None) -> str:
        if value is None:
            return "–"
        return figure(self.shown(value)) + ("" if self.unit == "1" else f"\u00a0{self.unit}")

    def moved(self, change: float) -> str:
        sign = "+" if change > 0 else "−" if change < 0 else ""
        return f"{sign}{figure(abs(self.shown(change)))}" + ("" if self.unit == "1" else f" {self.step}")


@dataclass(frozen=True)
class _Sheet:
    """A figure with its axes, and where its legend begins (share of the height)."""

    figure: Figure
    panels: list[Axes]
    legend_top: float

    @property
    def axes(self) -> Axes:
        return self.panels[0]

    def legend(
        self, columns: int = 2, handles: Sequence[Any] | None = None, labels: Sequence[str] | None = None
    ) -> None:
        """A legend between title and axes: of all that has a label, unless handles are given."""
        if handles is None or labels is None:
            handles, labels = self.axes.get_legend_handles_labels()
        place = (0.1 / _WIDTH, self.legend_top)
        self.figure.legend(
            handles, labels, loc="upper left", bbox_to_anchor=place, ncols=columns, labelspacing=0.25
        )


def _blank(
    title: str, height: float, legend_rows: int, panels: int = 1, left: float = _LEFT, right: float = _RIGHT
) -> _Sheet:
    """A sheet with its title and room for a legend under it; `height` of the axes and margins in inches."""
    lines = textwrap.wrap(title, 56)
    top = _LINE * (len(lines) + legend_rows) + 0.24
    whole = top + height + _BOTTOM
    drawn = Figure(figsize=(_WIDTH, whole), facecolor="white")
    grid = drawn.subplots(panels, panels, squeeze=False, sharex=True)
    left = 0.5 if panels > 1 else left
    drawn.subplots_adjust(
        left / _WIDTH, _BOTTOM / whole, 1 - right / _WIDTH, 1 - top / whole, wspace=0.27, hspace=0.2
    )
    drawn.text(0.1 / _WIDTH, 1 - 0.07 / whole, "\n".join(lines), va="top", fontsize=9.5, fontweight="bold")
    return _Sheet(drawn, list(grid.ravel()), 1 - (0.12 + _LINE * len(lines)) / whole)


def _log_ticks(axes: Axes, which: str, powers: bool = False) -> None:
    """Decades alone, as plain figures or as powers of ten."""
    axis, (low, high) = (axes.xaxis, axes.get_xlim()) if which == "x" else (axes.yaxis, axes.get_ylim())
    decades = [10.0**k for k in range(math.ceil(math.log10(low) - 1e-9), math.floor(math.log10(high) + 1e-9) + 1)]
    if len(decades) < 2:
        decades = sorted(step * 10.0**k for k in range(-2, 23) for step in (1, 2, 5))
        decades = [value for value in decades if low <= value <= high]
    axis.set_major_locator(FixedLocator(decades))
    axis.set_minor_locator(NullLocator())
    axis.set_major_formatter(FuncFormatter(lambda value, _: _power(value) if powers else _plain(value)))


_RAISED = str.maketrans("0123456789-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻")


def _power(value: float) -> str:
    """A figure as a power of ten.

    >>> _power(1e20), _power(2.4e19)
    ('10²⁰', '2.4·10¹⁹')
    """
    exponent = math.floor(math.log10(value) + 1e-9)
    share = value / 10.0**exponent
    lead = "" if abs(share - 1) < 1e-6 else f"{share:.2g}·"
    return f"{lead}10{str(exponent).translate(_RAISED)}"


def _plain(value: float) -> str:
    return f"{value:,.10g}".replace(",", "\u202f") if 0.1 <= value < 1e5 else _power(value)


def _size(nanometres: float | None) -> str:
    return "coarse" if nanometres is None else f"{figure(nanometres)} nm"


def density(per_cm3: float | None) -> str:
    if per_cm3 is None:
        return "–"
    return "undoped" if per_cm3 < _COUNTS else f"{_power(float(f'{per_cm3:.2g}'))} cm⁻³"


#: an active density below this, 1/cm³, has no bearing on what is drawn
_COUNTS = 1e15
