"""Tables for people: terminal, or Markdown for a report. Rounded here and only here."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from rich.console import Console

from legwright.show.layout import Layout, draw, figure, figure_within, percent, span
from legwright.show.options import hushed

Record = Mapping[str, Any]

SCORE_TITLES = {
    "efficiency": "efficiency",
    "cop": "COP",
    "delta_t_max_K": "ΔT max [K]",
    "power_W_per_cm2": "power [W/cm²]",
    "heat_lifted_W_per_cm2": "lift [W/cm²]",
}


def rank_table(title: str, rows: Sequence[Record], markdown: bool) -> Layout:
    """The ranking, its flags as words that are explained under it. With draws, how sure each score is."""
    drawn = "win_share" in rows[0]
    columns = (
        "candidate",
        SCORE_TITLES[rows[0]["score_name"]],
        *(("5 to 95 %", "wins") if drawn else ()),
        "size [nm]",
        "window [nm]",
        "doping [cm⁻³]",
        "gain over coarse",
        "zT mean",
        "zT peak",
        "formula",
        "flags",
    )
    cells = (
        (
            f"{row['rank']:>2}. {row['candidate']}",
            *(_sureness(row) if drawn else (figure(row["score"]),)),
            figure(row["size_nm"]),
            span(row["window_nm"]),
            figure(row["doping_per_cm3"]),
            "–" if row["gain_over_bulk"] is None else f"×{row['gain_over_bulk']:.2f}",
            figure(row["zt_mean"]),
            figure(row["zt_peak"]),
            row["formula"],
            " ".join(row["flags"]),
        )
        for row in rows
    )
    return draw(title, columns, cells, markdown)


def _sureness(row: Record) -> tuple[str, str, str]:
    if not row["score"]:
        return figure(row["score"]), "–", "–"
    low, high = row["score_low"], row["score_high"]
    within = (figure_within(value, low, high) for value in (row["score"], low, high))
    score, *ends = within
    return score, " … ".join(ends), percent(row["win_share"])


def sureness_table(rows: Sequence[Record], markdown: bool) -> Layout:
    """Of each candidate that can serve: places over the draws, best size, and whether a small one pays."""
    columns = ("candidate", "in first three", "best size, 5 to 95 % [nm]", "small size pays", "tied with")
    cells = (
        (
            f"{row['rank']:>2}. {row['candidate']}",
            percent(row["first_three_share"]),
            span((row["size_low_nm"], row["size_high_nm"])),
            percent(row["nanostructuring_pays"]),
            ", ".join(row["tied_with"]) or "–",
        )
        for row in rows
        if row["score"]
    )
    return draw("How sure (draws; tied: neither is twice as likely to be the better)", columns, cells, markdown)


_MOST_ADVICE = 10


def advice_tables(found: Record, markdown: bool) -> list[Layout]:
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
                percent(row["first_order"]),
                percent(row["total"]),
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


def trade_offs_table(rows: Sequence[Record], fronts: Mapping[str, Sequence[str]], markdown: bool) -> Layout:
    """Candidates on a front of score against another count; a star where nobody beats them on both."""
    columns = ("candidate", SCORE_TITLES[rows[0]["score_name"]], *TRADE_OFFS.values())
    on_a_front = {name for names in fronts.values() for name in names}

    def starred(row: Record, axis: str, text: str) -> str:
        return f"* {text}" if row["candidate"] in fronts[axis] else text

    cells = (
        (
            f"{row['rank']:>2}. {row['candidate']}",
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


def pairs_table(title: str, pairs: Iterable[tuple[str, str]], markdown: bool) -> Layout:
    """Two columns: what, and how much."""
    return draw(title, ("property", "value"), pairs, markdown)


def why_tables(found: Record, markdown: bool) -> list[Layout]:
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


def library_table(rows: Sequence[Record], markdown: bool) -> Layout:
    """One line a candidate, with the share of its numbers by basis."""
    columns = ("candidate", "formula", "up to [K]", "doping [cm⁻³]", "numbers", *_BASES, "direction")
    cells = (
        (
            row["candidate"],
            row["formula"],
            figure(row["highest_temperature_K"], 4),
            span((row["doping_min_per_cm3"], row["doping_max_per_cm3"])),
            str(row["numbers"]),
            *(f"{100 * row['numbers_by_basis'].get(basis, 0) / row['numbers']:.0f} %" for basis in _BASES),
            row["direction"],
        )
        for row in rows
    )
    return draw("Library (shares of the numbers by where they came from)", columns, cells, markdown)


def make_up_table(rows: Sequence[Record], markdown: bool) -> Layout:
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
            f"{row['dopant']} {span(row['dopant_atomic_percent'])}",
            " ".join(row["hazardous_elements"]) or "none listed",
        )
        for row in rows
    )
    return draw("Make-up (element prices of 2013; supply: Herfindahl–Hirschman index)", columns, cells, markdown)


def families_table(rows: Sequence[Record], markdown: bool) -> Layout:
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


def about_tables(found: Record, markdown: bool) -> list[Layout]:
    """Versions and data sets."""
    title = f"legwright {found['program']} ({found['licence']}), Python {found['python']}, {found['platform']}"
    packages = ((row["package"], row["version"] or "not installed") for row in found["packages"])
    sets = ((row["data_set"], str(row["files"]), row["sha256"][:16]) for row in found["data_sets"])
    return [
        draw(title, ("package", "version"), packages, markdown),
        draw("Data sets", ("data set", "files", "SHA-256 begins"), sets, markdown),
    ]


def screen_table(found: Record, markdown: bool) -> Layout:
    """The best of a screening."""
    rows = found["rows"]
    columns = (
        "candidate",
        SCORE_TITLES[rows[0]["score_name"]] if rows else "score",
        "size [nm]",
        "doping [cm⁻³]",
        "formula",
    )
    cells = (
        (
            row["candidate"],
            figure(row["score"]),
            figure(row["size_nm"]),
            figure(row["doping_per_cm3"]),
            row["formula"],
        )
        for row in rows
    )
    return draw(
        f"{found['title']}: best of {found['done']} screened, of {found['asked']}", columns, cells, markdown
    )


def search_table(found: Record, markdown: bool) -> Layout:
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
    "power_matched_load_W_per_cm2": "power at the matched load [W/cm²]",
    "efficiency_matched_load": "efficiency there",
    "cop": "COP",
    "cop_ideal_contacts": "COP, ideal contacts and exchangers",
    "heat_lifted_W_per_cm2": "heat lifted [W/cm²]",
    "delta_t_max_K": "largest ΔT [K]",
    "current_A_per_cm2": "current [A/cm²]",
    "heat_from_hot_W_per_cm2": "heat taken in [W/cm²]",
    "heat_to_hot_W_per_cm2": "heat given off [W/cm²]",
    "heat_through_sides_W_per_cm2": "lost through the sides [W/cm²]",
    "hot_end_K": "hot end of the leg [K]",
    "cold_end_K": "cold end of the leg [K]",
    "length_mm": "length [mm]",
    "contact_uohm_cm2": "each contact [µΩ cm²]",
    "contact_K_cm2_per_W": "each contact, to heat [K cm²/W]",
    "hot_exchanger_K_cm2_per_W": "hot exchanger [K cm²/W]",
    "cold_exchanger_K_cm2_per_W": "cold exchanger [K cm²/W]",
    "side_loss_W_per_m3_K": "side loss [W/(m³ K)]",
}


_COUPLE_LABELS = {"area_ratio": "cross-section of n over p"} | {
    f"couple_{key}": f"couple's {label.replace(' of the leg', '')}"
    for key, label in _LEG_LABELS.items()
    if not key.startswith(("heat_from", "heat_to", "heat_through"))
}


def leg_tables(found: Record, markdown: bool) -> list[Layout]:
    """What a leg delivers; then, where it has them, its segments and what it delivers in a couple."""
    tables = [_leg_table(found, markdown)]
    if "segments" in found:
        tables.append(_segments_table(found["segments"], markdown))
    if "partner" in found:
        size = "coarse" if found["partner_size_nm"] is None else f"{figure(found['partner_size_nm'])} nm"
        title = f"Couple with {found['partner']}, {size}, {found['partner_doping_per_cm3']:.3g} cm⁻³"
        pairs = [(label, figure(found[key])) for key, label in _COUPLE_LABELS.items() if key in found]
        pairs += [
            (f"compatibility of {name}, hot to cold [1/V]", " … ".join(figure(s, 2) for s in (all_s[0], all_s[-1])))
            for name, all_s in found["compatibility_per_V"].items()
        ]
        pairs.append(("strain between the legs", _percents(found["strain"])))
        pairs += [(f"strain to {strap}", _percents(value)) for strap, value in found["strain_to_strap"].items()]
        tables.append(pairs_table(title, pairs, markdown))
    return tables


def _percents(share: float | None) -> str:
    return "–" if share is None else f"{100 * share:.2f} %"


def _segments_table(rows: Sequence[Record], markdown: bool) -> Layout:
    columns = ("segment", "hot [K]", "cold [K]", "length", "size [nm]", "doping [cm⁻³]", "compatibility [1/V]")
    cells = (
        (
            row["candidate"],
            figure(row["hot_K"]),
            figure(row["cold_K"]),
            "–" if row["length_share"] is None else percent(row["length_share"]),
            "coarse" if row["size_nm"] is None else figure(row["size_nm"]),
            f"{row['doping_per_cm3']:.3g}",
            " … ".join(figure(s, 2) for s in (row["compatibility_per_V"][0], row["compatibility_per_V"][-1])),
        )
        for row in rows
    )
    return draw("Segments, hot to cold", columns, cells, markdown)


def _leg_table(found: Record, markdown: bool) -> Layout:
    """What a leg delivers."""
    title = found["candidate"] + (f" ({found['formula']})" if "formula" in found else "")
    if found.get("doping_per_cm3") is not None:
        size = "coarse" if found["size_nm"] is None else f"{figure(found['size_nm'])} nm"
        title += f", {found['shape']} {size}, {found['doping_per_cm3']:.3g} cm⁻³"
    pairs = [(label, figure(found[key])) for key, label in _LEG_LABELS.items() if key in found]
    return pairs_table(title, pairs, markdown)


def service_tables(found: Record, start_nm: float | None, markdown: bool) -> list[Layout]:
    """What hours of service leave, and how long each process takes."""
    sizes = found["along"]["size_nm"]
    ends = "unknown" if sizes is None else " … ".join(_size(sizes[end]) for end in (0, -1))
    counted = " and ".join(found["score_end_counts"])
    left = "unknown" if found["score_end"] is None else f"{figure(found['score_end'], 4)} (counts {counted} alone)"
    best = found["best_starting_size_nm"]
    pairs = [
        (f"{found['score_name']} at the start", figure(found["score_start"], 4)),
        ("at the end", left),
        ("size at the start [nm]", _size(start_nm)),
        ("at the end, hot … cold [nm]", ends),
        ("best size to start with [nm]", "unknown" if best is None else figure(best)),
        ("starts that end inside the window [nm]", span(found["starting_window_nm"])),
    ]
    wears = draw(
        "Hours until a tenth is lost",
        ("process", "hours", "within a factor", "why"),
        (
            (
                process,
                figure(wear["hours"]) if wear["status"] == "known" else _unsure(wear),
                figure(wear["factor_1_sigma"], 2),
                wear["reason"],
            )
            for process, wear in found["hours_to_lose_a_tenth"].items()
        ),
        markdown,
    )
    return [pairs_table(f"After {found['hours']:g} hours", pairs, markdown), wears]


def _size(nm: float | None) -> str:
    return "coarse" if nm is None else figure(nm)


def _unsure(wear: Record) -> str:
    return str(wear["status"]) if wear["hours"] is None else f"{wear['status']} {figure(wear['hours'])}"


def fit_tables(found: Record, markdown: bool) -> list[Layout]:
    """Parameters with their intervals, and how well each quantity is met."""
    parameters = draw(
        f"Fitted to {found['measurements']}, starting from {found['start']} (factors on the start's; 90 %)",
        ("parameter", "value", "between", "unit", "data decide"),
        (
            (
                row["parameter"],
                figure(row["value"]),
                span((row["low"], row["high"])),
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


def totals_table(rows: Sequence[Record], markdown: bool) -> Layout:
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
            percent(row["median_error"]),
            percent(row["median_half_width"]),
            percent(row["coverage"]),
            " … ".join(map(percent, row["coverage_95"])),
            percent(row["coverage_by_paper"]),
        )
        for row in rows
    )
    return draw("Predictions against published samples (90 % intervals)", columns, cells, markdown)


DEVICE_WORDS = (
    "computed: the best that legs of these materials could do between those temperatures, at their best doping, "
    "areas, interfaces and current, with nothing lost outside them; contacts, straps, radiation and the rest of a "
    "generator take from it. own paper: the device's paper also stands behind a number of one of its candidates."
)


def devices_table(rows: Sequence[Record], markdown: bool) -> Layout:
    """Published legs, couples and modules, measured over computed."""
    columns = ("device", "n", "p", "between [K]", "quantity", "measured", "computed", "ratio", "own paper", "note")
    cells = (
        (
            row["device"],
            row["n"] or "",
            row["p"] or "",
            figure(row["hot_K"]) + ("" if row["cold_K"] is None else f", {figure(row['cold_K'])}"),
            row["quantity"].replace("_", " "),
            f"{figure(row['measured'])} {row['unit']}".removesuffix(" 1"),
            figure(row["computed"]),
            f"{row['ratio']:.2f}",
            "yes" if row["fixed"] else "no",
            row["note"],
        )
        for row in rows
    )
    return draw("Published legs, couples and modules: measured over computed", columns, cells, markdown)


def misses_table(rows: Sequence[Record], markdown: bool) -> Layout:
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
            span((row["low"], row["high"])),
            row["likely_cause"],
        )
        for row in rows
        if not row["inside"] and not row["fitted"]
    )
    return draw("Outside their interval", columns, cells, markdown)


def numbers_table(title: str, rows: Sequence[Record], markdown: bool) -> Layout:
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


def footnotes(out: Console, meanings: Mapping[str, str], cautions: Iterable[str]) -> None:
    """Meaning of each flag used, then the cautions, once."""
    quiet = hushed()
    for flag, meaning in meanings.items():
        if flag not in quiet:
            out.print(f"{flag}: {meaning}", markup=False)
    reminders = list(cautions)
    if reminders:
        out.print()
        out.print("Cautions: " + " ".join(reminders), markup=False)
