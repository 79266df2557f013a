"""One page for the meeting: verdict, table, figures, assumptions, sources; a single file that needs no network."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from importlib import resources

from jinja2 import Environment, StrictUndefined
from markupsafe import Markup

from legwright.base.files import datasets_folder
from legwright.base.flags import MEANINGS
from legwright.base.version import VERSION
from legwright.candidate.number import Measure
from legwright.candidate.priors import load_priors
from legwright.candidate.sources import bibliography
from legwright.decide.brief import Brief
from legwright.decide.confidence import PAYS
from legwright.decide.rank import Row
from legwright.decide.why import TELLING
from legwright.leg.duty import SCORE_NAMES
from legwright.show import drawings
from legwright.show.figures import Worth, as_svg, density, picture
from legwright.show.layout import figure
from legwright.show.records import Record, citations

#: candidates whose bulk fit is shown
LEADING = 3


def meeting_page(
    job: Brief,
    brief_text: str,
    found: Sequence[Row],
    records: Sequence[Record],
    under: Record,
    command: str,
    seed: int,
) -> str:
    """The whole page. `found` and `records`: the ranking, and its rows in trade units; `under`: `records.notes`.

    The same bytes for the same input: nothing on it tells when or where it was made.
    """
    able = [row for row in found if row.score > 0]
    serving = [record for record in records if record["score"]]
    first = _first_figures(job, able[0], seed) if able else {}
    leading = [_leading(job, row) for row in able[:LEADING]]
    numbers = _note_numbers(serving)
    content = {
        "title": job.title,
        "duty": _duty(job),
        "verdict": _verdict(serving, first, job.leg.partner),
        "table": _table(serving, numbers) if serving else None,
        "sections": _sections(job, serving, first, leading),
        "assumptions": _assumptions(job),
        "notes": [{"number": n, "flag": flag, "meaning": MEANINGS[flag]} for flag, n in numbers.items()],
        "refused": _refused(record for record in records if not record["score"]),
        "cautions": under["cautions"],
        "sources": _sources(able[:LEADING], leading),
        "brief": brief_text,
        "command": command,
        "version": VERSION,
    }
    template = resources.files("legwright.show").joinpath("page.html").read_text(encoding="utf-8")
    house = Environment(autoescape=True, undefined=StrictUndefined, trim_blocks=True, lstrip_blocks=True)
    return house.from_string(template).render(content) + "\n"


def _note_numbers(rows: Iterable[Record]) -> dict[str, int]:
    """Numbers of the flags, in order of first use."""
    used = dict.fromkeys(flag for row in rows for flag in row["flags"])
    return {flag: number for number, flag in enumerate(used, start=1)}


def _first_figures(job: Brief, row: Row, seed: int) -> dict[str, Record]:
    """The records of the figures of the best candidate, by kind."""
    at = drawings.design_in(job, row)
    return {
        "size": drawings.size_record(at, _DRAWS, seed),
        "map": drawings.map_record(at),
        "shares": drawings.why_figure_record("shares", at, job),
        "paths": drawings.why_figure_record("paths", at, job),
        "sensitivity": drawings.sensitivity_record(at),
    }


#: for the band of the size curve
_DRAWS = 128


def _leading(job: Brief, row: Row) -> Record:
    return drawings.temperature_record(row.candidate, drawings.design_in(job, row))


def _duty(job: Brief) -> str:
    duty, size = job.duty, job.size
    goal = Worth(SCORE_NAMES[duty.maximise]).word
    return (
        f"A {duty.kind} leg between {duty.cold_K:g} and {duty.hot_K:g} K that maximises {goal}; "
        f"{size.shape} sizes from {size.min_nm:g} to {size.max_nm:g}\u00a0nm."
    )


def _verdict(rows: Sequence[Record], first: dict[str, Record], partner: str | None) -> list[str]:
    """Three sentences: what to make, what limits it and whether the size pays, and the main doubt."""
    if not rows:
        return ["No candidate can serve this brief; the reasons stand below."]
    return [_choice(rows, partner), _limits(rows[0], first["shares"]), _doubt(rows, first["sensitivity"])]


def _choice(rows: Sequence[Record], partner: str | None) -> str:
    best, worth = rows[0], Worth(rows[0]["score_name"])
    low, high = best["window_nm"]
    beside = f", beside {partner}" if partner else ""
    sentence = (
        f"Make {best['candidate']} ({best['formula']}, {best['carrier']}-type) with a {best['shape']} size of "
        f"{figure(best['size_nm'])} nm ({figure(low)} to {figure(high)} nm keep 95 %) and "
        f"{density(best['doping_per_cm3'])} active carriers{beside}: {worth.word} {worth.said(best['score'])}"
    )
    if best.get("score_high"):
        sentence += f" (90 % of the draws: {worth.said(best['score_low'])} to {worth.said(best['score_high'])})"
    if len(rows) > 1:
        sentence += f", before {rows[1]['candidate']} with {worth.said(rows[1]['score'])}"
    return sentence + "."


def _limits(best: Record, shares: Record) -> str:
    gain, shape = best["gain_over_bulk"], best["shape"]
    if gain is None:
        pays = f"Only a small {shape} size lets it serve at all: coarse material scores 0"
    elif gain > 1 + TELLING:
        pays = f"This {shape} size pays: ×{gain:.2f} over coarse material"
    elif gain < 1 - TELLING:
        pays = f"This {shape} size does not pay: ×{gain:.2f} against coarse material"
    else:
        pays = f"This {shape} size makes no difference that counts: ×{gain:.2f} against coarse material"
    if best.get("nanostructuring_pays") is not None:
        often = f"{100 * best['nanostructuring_pays']:.0f} % of the draws"
        pays += f", and by {100 * (PAYS - 1):.0f} % or more in {often}"
    (charge, of_charge), (heat, of_heat) = (
        max(shares[f"{kind}_resistance_shares"].items(), key=lambda part: part[1])
        for kind in ("electrical", "thermal")
    )
    return (
        f"{pays}; its carriers are held back mostly by {charge} ({100 * of_charge:.0f} %), its lattice heat by "
        f"{heat} ({100 * of_heat:.0f} %)."
    )


def _doubt(rows: Sequence[Record], leans: Record) -> str:
    best, worth = rows[0], Worth(leans["quantity"])
    most = leans["leans"][0]
    moved = worth.moved(abs(most["change"])).removeprefix("+")
    doubt = f"The main doubt: {worth.word} moves by {moved} for one standard deviation of the {most['name']}"
    if "win_share" in best:
        doubt += f", and {best['candidate']} wins {100 * best['win_share']:.0f} % of the draws"
        if best.get("tied_with"):
            doubt += f", so that it is not told apart from {', '.join(best['tied_with'])}"
    elif len(rows) > 1:
        lead = 100 * (1 - rows[1]["score"] / best["score"])
        doubt += f", and the next candidate is only {lead:.0f} % behind" if lead < 20 else ""
    if "from-memory" in best["flags"]:
        doubt += "; more than half of its numbers were taken from memory, not read"
    return doubt + "."


def _table(rows: Sequence[Record], numbers: dict[str, int]) -> Record:
    worth, drawn = Worth(rows[0]["score_name"]), "win_share" in rows[0]
    columns = ["", "candidate", "formula", "type", "size [nm]", "window [nm]", "doping [cm⁻³]", worth.label]
    columns += ["5 to 95 %", "wins [%]"] if drawn else []
    columns += ["zT mean", "zT peak", "gain over coarse", "notes"]

    def cells(row: Record) -> list[str]:
        sure = []
        if drawn:
            ends = (figure(worth.shown(row[key]), 2) for key in ("score_low", "score_high"))
            sure = [" … ".join(ends), f"{100 * row['win_share']:.0f}"]
        return [
            row["formula"],
            row["carrier"],
            figure(row["size_nm"]),
            " … ".join(figure(end) for end in row["window_nm"]),
            density(row["doping_per_cm3"]).removesuffix(" cm⁻³"),
            figure(worth.shown(row["score"])),
            *sure,
            figure(row["zt_mean"]),
            figure(row["zt_peak"]),
            "–" if row["gain_over_bulk"] is None else f"×{row['gain_over_bulk']:.2f}",
        ]

    lines = [
        {
            "rank": row["rank"],
            "candidate": row["candidate"],
            "cells": cells(row),
            "notes": [numbers[flag] for flag in row["flags"]],
        }
        for row in rows
    ]
    return {"columns": columns, "rows": lines}


def _sections(job: Brief, rows: Sequence[Record], first: dict[str, Record], leading: list[Record]) -> list[Record]:
    if not rows:
        return []
    order = drawings.ranking_record(job.title, list(rows))
    best = rows[0]["candidate"]
    return [
        _section("order", "How the candidates stand", "", [order]),
        _section("best", f"The best candidate: {best}", "", list(first.values())),
        _section(
            "bulk",
            "How well the leading candidates meet bulk data",
            "Filled points fixed a candidate and are no predictions; open ones did not. A sample's line is the "
            "model of coarse material at that sample's doping; the thick line is the design in the table.",
            leading,
        ),
    ]


def _section(name: str, heading: str, lead: str, records: Iterable[Record]) -> Record:
    pictures = [(f"{name}-{number}", picture(record)) for number, record in enumerate(records, start=1)]
    figures = [{"svg": Markup(as_svg(drawn, label)), "says": drawn.says} for label, drawn in pictures]
    return {"id": name, "heading": heading, "lead": lead, "figures": figures}


def _assumptions(job: Brief) -> list[str]:
    priors = load_priors()
    law, miss = priors.grain_law, priors.discrepancy

    def said(number: Measure) -> str:
        return f"{number.value:g} ± {number.relative_spread * number.value:.2g} ({number.source}, {number.basis})"

    lines = [
        "Shared by all candidates, so wrong for all at once: a phonon's free path from grain boundaries is "
        f"c d (ω_max/ω)^s, with s = {said(law.exponent)} and c = {said(law.prefactor)}.",
        "A grain boundary turns back this share of the carriers, where a candidate's file says nothing else: "
        f"{said(priors.reflection.electrons)}.",
        "What the model misses beyond the spreads of the anchors, one standard deviation of the logarithm: "
        f"{miss.electrical_conductivity.value:g} of electrical conductivity, {miss.seebeck.value:g} of the Seebeck "
        f"coefficient, {miss.thermal_conductivity_sized.value:g} of lattice conductivity at a stated size.",
        _surroundings(job),
        "Prefactors were fixed on bulk samples: those are fitted, not predicted. Nothing nanostructured fixed "
        "anything.",
    ]
    if job.scatter is not None:
        lines.append(
            "The table counts legs as they are made, scattered; the figures show legs that hit their design."
        )
    if job.leg.partner is not None:
        lines.append(
            f"The table's score is that of a couple with {job.leg.partner}; the figures of the best candidate show "
            "its leg alone."
        )
    return lines


def _surroundings(job: Brief) -> str:
    length = f"leg length {job.leg.length_mm:g} mm"
    if job.leg.length_free_mm is not None:
        length = "the leg as long as is best, from {:g} to {:g} mm".format(*job.leg.length_free_mm)
    around = "Ideal contacts and exchangers" if job.task.setting.ideal else "Contacts and exchangers of the brief"
    return f"{around}; {length}."


def _refused(records: Iterable[Record]) -> list[Record]:
    groups: dict[str, list[str]] = {}
    for record in records:
        groups.setdefault(MEANINGS[record["flags"][0]], []).append(record["candidate"])
    return [{"flag": flag, "candidates": ", ".join(names)} for flag, names in groups.items()]


def _sources(rows: Sequence[Row], leading: Sequence[Record]) -> dict[str, str]:
    """Sources of the leading candidates, of the points drawn, and of what all share."""
    if not rows:
        return {}
    shared = bibliography(datasets_folder())
    priors = load_priors()
    keys = {number.source for number in (priors.grain_law.exponent, priors.reflection.electrons)}
    keys |= {point["source"] for record in leading for sample in record["samples"] for point in sample["points"]}
    found = {key: shared[key] for key in keys if key in shared}
    for row in rows:
        found |= citations(row.candidate)
    return dict(sorted(found.items()))
