"""Tables for people: terminal, or Markdown for a report. Rounded here and only here."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from rich import box
from rich.console import Console
from rich.table import Table
from rich.text import Text

Record = Mapping[str, Any]
#: columns that a table gets off a terminal; Markdown rows must not fold at all
_OFF_TERMINAL, _UNFOLDED = 150, 100_000


def console(markdown: bool) -> Console:
    """A console on stdout; wide enough for the tables when nothing says how wide the screen is."""
    if markdown:
        return Console(highlight=False, width=_UNFOLDED, no_color=True, soft_wrap=True)
    out = Console(highlight=False)
    if not out.is_terminal:
        out = Console(highlight=False, width=max(out.width, _OFF_TERMINAL), no_color=True)
    return out


def draw(title: str, columns: Sequence[str], rows: Iterable[Sequence[str]], markdown: bool) -> Table:
    """A table whose first column is text on the left and whose others stand to the right."""
    table = Table(
        title=None if markdown else title,
        title_justify="left",
        box=box.MARKDOWN if markdown else box.SIMPLE_HEAD,
        title_style="bold",
    )
    for index, name in enumerate(columns):
        table.add_column(name, justify="left" if index == 0 else "right", overflow="fold")
    for row in rows:
        table.add_row(*(Text(cell) for cell in row))
    return table


def figure(value: float | None, digits: int = 3) -> str:
    """A rounded figure without trailing noise; a dash for none.

    >>> figure(0.123456), figure(148.3), figure(None), figure(2.2e20)
    ('0.123', '148', '–', '2.20e+20')
    """
    if value is None:
        return "–"
    if value and not 1e-3 <= abs(value) < 1e5:
        return f"{value:.{digits - 1}e}"
    return f"{value:.{digits}g}" if abs(value) < 10**digits else f"{value:.0f}"


def _span(ends: Sequence[float] | None) -> str:
    return "–" if ends is None else f"{figure(ends[0])} … {figure(ends[1])}"


SCORE_TITLES = {
    "efficiency": "efficiency",
    "cop": "COP",
    "delta_t_max_K": "ΔT max [K]",
    "power_W_per_cm2": "power [W/cm²]",
    "heat_lifted_W_per_cm2": "lift [W/cm²]",
}


def rank_table(title: str, rows: Sequence[Record], markdown: bool) -> Table:
    """The ranking; flags are numbered and explained under the table. With draws, the score's interval."""
    numbers = flag_numbers(rows)
    drawn = "win_share" in rows[0]
    columns = (
        "candidate",
        "formula",
        "carrier",
        "size [nm]",
        "window [nm]",
        "doping [cm⁻³]",
        SCORE_TITLES[rows[0]["score_name"]],
        *(("5 to 95 %",) if drawn else ()),
        "zT mean",
        "zT peak",
        "gain over coarse",
        "notes",
    )
    cells = (
        (
            f"{row['rank']}. {row['candidate']}",
            row["formula"],
            row["carrier"],
            figure(row["size_nm"]),
            _span(row["window_nm"]),
            figure(row["doping_per_cm3"]),
            figure(row["score"]),
            *((_interval(row),) if drawn else ()),
            figure(row["zt_mean"]),
            figure(row["zt_peak"]),
            "–" if row["gain_over_bulk"] is None else f"×{row['gain_over_bulk']:.2f}",
            " ".join(str(numbers[flag]) for flag in row["flags"]),
        )
        for row in rows
    )
    return draw(title, columns, cells, markdown)


def _interval(row: Record) -> str:
    return f"{figure(row['score_low'], 2)} … {figure(row['score_high'], 2)}" if row["score"] else "–"


def sureness_table(rows: Sequence[Record], markdown: bool) -> Table:
    """Of each candidate that can serve: places over the draws, best size, and whether a small one pays."""
    columns = ("candidate", "wins", "in first three", "best size, 5 to 95 % [nm]", "small size pays", "tied with")
    cells = (
        (
            f"{row['rank']}. {row['candidate']}",
            _percent(row["win_share"]),
            _percent(row["first_three_share"]),
            _span((row["size_low_nm"], row["size_high_nm"])),
            _percent(row["nanostructuring_pays"]),
            ", ".join(row["tied_with"]) or "–",
        )
        for row in rows
        if row["score"]
    )
    return draw("How sure (draws; tied: neither is twice as likely to be the better)", columns, cells, markdown)


_MOST_ADVICE = 10


def advice_tables(found: Record, markdown: bool) -> list[Table]:
    """The measurements worth most, and where the doubt about the scores comes from."""
    title = SCORE_TITLES[found["score_name"]]
    advice = draw(
        f"What to measure next: expected gain of the chosen candidate's {title}",
        ("candidate", "measure", "expected gain", "± standard error", "effort", "gain per effort"),
        (
            (
                row["candidate"],
                row["quantity"].replace("_", " "),
                figure(row["expected_gain"], 2),
                figure(row["standard_error"], 2),
                figure(row["effort"]),
                figure(row["gain_per_effort"], 2),
            )
            for row in found["rows"][:_MOST_ADVICE]
        ),
        markdown,
    )
    doubt = draw(
        "Where the doubt comes from (shares of the score's variance)",
        ("candidate", "source", "by itself", "with others"),
        (
            (
                row["candidate"],
                row["source"].replace("_", " "),
                _percent(row["first_order"]),
                _percent(row["total"]),
            )
            for row in found["sensitivities"]
        ),
        markdown,
    )
    return [advice, doubt]


TRADE_OFFS = {
    "cost_USD_per_kg": "element cost [USD/kg]",
    "supply_concentration": "supply concentration",
    "hazardous_elements": "hazardous elements",
    "largest_size_nm": "largest size [nm]",
}


def trade_offs_table(rows: Sequence[Record], fronts: Mapping[str, Sequence[str]], markdown: bool) -> Table:
    """Candidates on a front of score against another count; a star where nobody beats them on both."""
    columns = ("candidate", SCORE_TITLES[rows[0]["score_name"]], *TRADE_OFFS.values())
    on_a_front = {name for names in fronts.values() for name in names}

    def starred(row: Record, axis: str, text: str) -> str:
        return f"* {text}" if row["candidate"] in fronts[axis] else text

    cells = (
        (
            f"{row['rank']}. {row['candidate']}",
            figure(row["score"]),
            starred(row, "cost_USD_per_kg", figure(row["cost_USD_per_kg"])),
            starred(row, "supply_concentration", figure(row["supply_concentration"])),
            starred(row, "hazardous_elements", " ".join(row["hazardous_elements"]) or "none"),
            starred(row, "largest_size_nm", figure(row["window_nm"][1])),
        )
        for row in rows
        if row["candidate"] in on_a_front
    )
    return draw("Trade-offs (*: nobody has both a better score and a better figure here)", columns, cells, markdown)


def flag_numbers(rows: Iterable[Record]) -> dict[str, int]:
    """Footnote numbers of the flags, in order of first use."""
    used = dict.fromkeys(flag for row in rows for flag in row["flags"])
    return {flag: number for number, flag in enumerate(used, start=1)}


def pairs_table(title: str, pairs: Iterable[tuple[str, str]], markdown: bool) -> Table:
    """Two columns: what, and how much."""
    return draw(title, ("property", "value"), pairs, markdown)


def why_tables(found: Record, markdown: bool) -> list[Table]:
    """Shares of the two resistances, and the flow by free path, coarse."""
    shares = [
        draw(
            f"Shares of the {kind} resistance",
            ("process", "share"),
            ((name, f"{100 * share:.1f} %") for name, share in sorted(parts.items(), key=lambda p: -p[1])),
            markdown,
        )
        for kind, parts in (
            ("electrical", found["electrical_resistance_shares"]),
            ("lattice thermal", found["thermal_resistance_shares"]),
        )
    ]
    paths = draw(
        "Carried inside a grain on free paths up to",
        ("free path [nm]", "charge", "lattice heat"),
        (
            (
                figure(row["path_nm"]),
                f"{100 * row['electrons_within']:.0f} %",
                f"{100 * row['phonons_within']:.0f} %",
            )
            for row in found["free_paths"][::5]
        ),
        markdown,
    )
    return [*shares, paths]


_BASES = ("measured", "published model", "calibrated on bulk", "common practice", "from memory")


def library_table(rows: Sequence[Record], markdown: bool) -> Table:
    """One line a candidate, with the share of its numbers by basis."""
    columns = ("candidate", "formula", "up to [K]", "doping [cm⁻³]", "numbers", *_BASES, "direction")
    cells = (
        (
            row["candidate"],
            row["formula"],
            figure(row["highest_temperature_K"], 4),
            _span((row["doping_min_per_cm3"], row["doping_max_per_cm3"])),
            str(row["numbers"]),
            *(f"{100 * row['numbers_by_basis'].get(basis, 0) / row['numbers']:.0f} %" for basis in _BASES),
            row["direction"],
        )
        for row in rows
    )
    return draw("Library (shares of the numbers by where they came from)", columns, cells, markdown)


def make_up_table(rows: Sequence[Record], markdown: bool) -> Table:
    """One line a candidate: what it weighs, costs and holds."""
    columns = (
        "candidate",
        "density [g/cm³]",
        "elements [USD/kg]",
        "supply (0–10 000)",
        "dopant [at. %]",
        "hazards",
    )
    cells = (
        (
            row["candidate"],
            figure(row["density_g_per_cm3"]),
            figure(row["cost_USD_per_kg"], 2),
            figure(row["supply_concentration"], 2),
            f"{row['dopant']} {_span(row['dopant_atomic_percent'])}",
            " ".join(row["hazardous_elements"]) or "none listed",
        )
        for row in rows
    )
    return draw("Make-up (element prices of 2013; supply: Herfindahl–Hirschman index)", columns, cells, markdown)


def families_table(rows: Sequence[Record], markdown: bool) -> Table:
    """One line an alloy line, and how its members are named."""
    columns = ("family", "a member", "share of", "up to", "through")
    cells = (
        (
            row["family"],
            f"{row['family']}:{','.join('x' for _ in row['ends'][1:])}",
            ", ".join(row["ends"][1:]),
            ", ".join(figure(share, 2) for share in row["largest_shares"][1:]),
            ", ".join(row["nodes"]),
        )
        for row in rows
    )
    return draw("Alloy lines", columns, cells, markdown)


def search_table(found: Record, markdown: bool) -> Table:
    """The best design, and what certifies it."""
    pairs = [
        ("best", f"{found['candidate']} ({found['formula']})"),
        (f"{found['shape']} size [nm]", "coarse" if found["size_nm"] is None else figure(found["size_nm"])),
        ("doping [cm⁻³]", f"{found['doping_per_cm3']:.3g}"),
        (found["score_name"], figure(found["score"], 4)),
        ("costly evaluations, and of the polish", f"{found['evaluations']}, {found['polish_evaluations']}"),
        ("before the polish", figure(found["score_before_polish"], 4)),
        ("best of dense maps", figure(found["score_of_dense_map"], 4)),
        ("dense map better by", f"{100 * found['gap_to_dense_map']:+.4f} %"),
        ("at a bound", ", ".join(found["bounds_touched"]) or "none"),
    ]
    return pairs_table("Search" if found["complete"] else "Search (interrupted: best so far)", pairs, markdown)


_LEG_LABELS = {
    "efficiency": "efficiency",
    "efficiency_ideal_contacts": "efficiency, ideal contacts and exchangers",
    "power_W_per_cm2": "power [W/cm²]",
    "cop": "COP",
    "cop_ideal_contacts": "COP, ideal contacts and exchangers",
    "heat_lifted_W_per_cm2": "heat lifted [W/cm²]",
    "delta_t_max_K": "largest ΔT [K]",
    "current_A_per_cm2": "current [A/cm²]",
    "heat_from_hot_W_per_cm2": "heat taken in [W/cm²]",
    "heat_to_hot_W_per_cm2": "heat given off [W/cm²]",
    "hot_end_K": "hot end of the leg [K]",
    "cold_end_K": "cold end of the leg [K]",
    "length_mm": "length [mm]",
    "contact_uohm_cm2": "each contact [µΩ cm²]",
    "hot_exchanger_K_cm2_per_W": "hot exchanger [K cm²/W]",
    "cold_exchanger_K_cm2_per_W": "cold exchanger [K cm²/W]",
}


def leg_table(found: Record, markdown: bool) -> Table:
    """What a leg delivers."""
    size = "coarse" if found["size_nm"] is None else f"{figure(found['size_nm'])} nm"
    title = (
        f"{found['candidate']} ({found['formula']}), {found['shape']} {size}, {found['doping_per_cm3']:.3g} cm⁻³"
    )
    pairs = [(label, figure(found[key])) for key, label in _LEG_LABELS.items() if key in found]
    return pairs_table(title, pairs, markdown)


def fit_tables(found: Record, markdown: bool) -> list[Table]:
    """Parameters with their intervals, and how well each quantity is met."""
    parameters = draw(
        f"Fitted to {found['measurements']}, starting from {found['start']} (factors on the start's; 90 %)",
        ("parameter", "value", "between", "unit", "data decide"),
        (
            (
                row["parameter"],
                figure(row["value"]),
                _span((row["low"], row["high"])),
                row["unit"],
                "yes" if row["determined"] else "no",
            )
            for row in found["parameters"]
        ),
        markdown,
    )
    residuals = draw(
        "How well the data are met",
        ("quantity", "rows", "rms off"),
        (
            (row["quantity"].replace("_", " "), str(row["rows"]), f"{100 * row['rms_deviation']:.1f} %")
            for row in found["residuals"]
        ),
        markdown,
    )
    return [parameters, residuals]


AUDIT_WORDS = (
    "blind: nobody looked at it, and nothing like it fixed the candidate. unlike: blind too, but the sample "
    "holds what the candidate's file does not describe (pores, other phases, another composition or "
    "direction). seen: looked at while parameters were chosen. fitted: it fixed the candidate, or repeats "
    "what did. setting: papers that set the model discrepancy; testing: the others. A sample's doping is "
    "published, or follows from its own Seebeck coefficient or conductivity at one temperature, which is then"
    " not judged, or is that of the best zT. could be: 95 % binomial interval, as if values were independent;"
    " by paper: one vote a paper."
)


def totals_table(rows: Sequence[Record], markdown: bool) -> Table:
    """How far off, and how often inside."""
    columns = (
        "material",
        "kind",
        "papers' half",
        "quantity",
        "values",
        "papers",
        "median off",
        "half-width",
        "inside",
        "could be",
        "inside by paper",
    )
    cells = (
        (
            row["material"],
            row["kind"],
            row["half"],
            row["quantity"].replace("_", " "),
            str(row["values"]),
            str(row["papers"]),
            _percent(row["median_error"]),
            _percent(row["median_half_width"]),
            _percent(row["coverage"]),
            " … ".join(map(_percent, row["coverage_95"])),
            _percent(row["coverage_by_paper"]),
        )
        for row in rows
    )
    return draw("Predictions against published samples (90 % intervals)", columns, cells, markdown)


def _percent(share: float) -> str:
    return f"{100 * share:.0f} %"


def misses_table(rows: Sequence[Record], markdown: bool) -> Table:
    """Every value outside its interval, by name, but for those that fixed a candidate."""
    columns = (
        "material",
        "sample",
        "kind",
        "quantity",
        "T [K]",
        "size [nm]",
        "measured",
        "low … high",
        "likely cause",
    )
    cells = (
        (
            row["material"],
            row["sample"],
            row["kind"],
            row["quantity"].replace("_", " "),
            figure(row["temperature_K"], 4),
            "bulk" if row["size_nm"] is None else figure(row["size_nm"]),
            f"{figure(row['measured'])} {row['unit']}",
            _span((row["low"], row["high"])),
            row["likely_cause"],
        )
        for row in rows
        if not row["inside"] and not row["fitted"]
    )
    return draw("Outside their interval", columns, cells, markdown)


def numbers_table(title: str, rows: Sequence[Record], markdown: bool) -> Table:
    """Every number of a candidate."""
    columns = ("key", "value", "unit", "spread (1 σ)", "basis", "source", "note")
    cells = (
        (
            row["key"],
            f"{row['value']:g}",
            row["unit"],
            f"{row['spread']:g} {row['spread_unit']}" if row["spread_unit"] else f"{100 * row['spread']:g} %",
            row["basis"],
            row["source"],
            row["note"] or "",
        )
        for row in rows
    )
    return draw(title, columns, cells, markdown)


def footnotes(
    out: Console, numbers: Mapping[str, int], meanings: Mapping[str, str], cautions: Iterable[str]
) -> None:
    """Meaning of each numbered flag, then the cautions, once."""
    for flag, number in numbers.items():
        out.print(f"{number}  {flag}: {meanings[flag]}", markup=False)
    reminders = list(cautions)
    if reminders:
        out.print()
        out.print("Cautions: " + " ".join(reminders), markup=False)
