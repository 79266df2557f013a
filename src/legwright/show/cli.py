"""The command line: it parses, calls and prints. Nothing heavy is imported before a verb runs."""

from __future__ import annotations

import math
import sys
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any, NoReturn

import click

from legwright.base.errors import InputError, NothingFeasible, nearest
from legwright.base.version import VERSION

if TYPE_CHECKING:
    from legwright.show.records import Record


class _Verbs(click.Group):
    """A group that offers the nearest verb for an unknown one."""

    def resolve_command(self, ctx: click.Context, args: list[str]) -> Any:
        if args and self.get_command(ctx, args[0]) is None:
            raise click.UsageError(f"no verb '{args[0]}'; {nearest(args[0], self.list_commands(ctx))}", ctx)
        return super().resolve_command(ctx, args)


class _Positive(click.ParamType[float]):
    """A finite number above zero, and where allowed a word that stands for coarse material."""

    def __init__(self, name: str, bulk: bool = False) -> None:
        self.name = name
        self.bulk = bulk

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> float:
        if isinstance(value, float):
            return value
        if self.bulk and value == "bulk":
            return math.inf
        try:
            number = float(value)
        except ValueError:
            number = math.nan
        if not (math.isfinite(number) and number > 0):
            word = " or the word bulk" if self.bulk else ""
            self.fail(f"value '{value}' is not allowed; a finite number above 0{word}", param, ctx)
        return number


def _output(command: Callable[..., Any]) -> Callable[..., Any]:
    """The options that every verb has."""
    for option in (
        click.option("--markdown", is_flag=True, help="Print tables as Markdown."),
        click.option("--csv", "csv_file", type=click.Path(path_type=Path), help="Also write the rows to FILE."),
        click.option("--json", "as_json", is_flag=True, help="Print one JSON object and nothing else."),
    ):
        command = option(command)
    return command


_shape = click.option("--shape", default="grain", show_default=True, metavar="grain|wire|film")


@click.group(cls=_Verbs, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(VERSION)
def _cli() -> None:
    """Which thermoelectric material, at which size and doping, is worth making into a leg."""


@_cli.command("rank")
@click.argument("brief", type=click.Path(path_type=Path))
@click.option("--workers", type=click.IntRange(1, 64), default=1, show_default=True, help="Processes.")
@click.option(
    "--draws", type=click.IntRange(0, 65536), default=0, show_default=True, help="For confidence; 0: none."
)
@click.option("--seed", type=click.IntRange(0), default=0, show_default=True, help="Of the draws.")
@_output
def _rank(
    brief: Path,
    workers: int,
    draws: int,
    seed: int,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """Rank the candidates of BRIEF, each at its best size and doping."""
    from legwright.decide.brief import load_brief
    from legwright.decide.draws import confidences
    from legwright.decide.rank import rank
    from legwright.show import records, tables

    job = load_brief(brief)
    found = rank(job, brief, workers)
    sure = confidences(job, found, draws, seed) if draws else None
    rows = [records.rank_record(row, sure) for row in found]
    under = records.notes((f for row in found for f in row.flags), (row.candidate for row in found if row.score))
    content = {"title": job.title, "rows": rows, **under}

    def table() -> None:
        out = tables.console(markdown)
        duty = job.duty
        heading = f"{job.title}: {duty.kind} leg, {duty.cold_K:g} to {duty.hot_K:g} K, {job.size.shape} size"
        out.print(tables.rank_table(heading, rows, markdown))
        tables.footnotes(out, tables.flag_numbers(rows), under["flag_meanings"], under["cautions"])

    _publish("rank", content, rows, as_json, csv_file, table)
    if not any(row["score"] for row in rows):
        raise NothingFeasible("no candidate can serve this brief; the flags say why")


@_cli.command("peak")
@click.argument("candidate")
@click.option("--temperature", type=_Positive("K"), required=True, help="Kelvin.")
@click.option("--doping", type=_Positive("CM3"), help="Active density per cm³; default: the best.")
@_shape
@_output
def _peak(
    candidate: str,
    temperature: float,
    doping: float | None,
    shape: str,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """At which size the zT of CANDIDATE peaks, and how wide the window is."""
    from legwright.base.units import PER_CM3
    from legwright.candidate.library import load_candidate
    from legwright.decide.peak import peak
    from legwright.show import records, tables

    one = load_candidate(candidate)
    found = peak(one, temperature, None if doping is None else doping * PER_CM3, shape)
    content = records.peak_record(found)
    under = records.notes(found.flags, [one])

    def table() -> None:
        out = tables.console(markdown)
        low, high = content["window_nm"]
        pairs = [
            (f"{shape} size at the peak [nm]", tables.figure(content["size_nm"])),
            ("zT at the peak", tables.figure(content["zt"])),
            ("sizes that keep 95 % of it [nm]", f"{tables.figure(low)} … {tables.figure(high)}"),
            ("zT of coarse material, same doping", tables.figure(content["zt_coarse"])),
            ("doping [cm⁻³]" + ("" if doping else ", the best"), tables.figure(content["doping_per_cm3"])),
        ]
        out.print(tables.pairs_table(f"{one.name} at {temperature:g} K", pairs, markdown))
        tables.footnotes(out, tables.flag_numbers([content]), under["flag_meanings"], under["cautions"])

    _publish("peak", {**content, **under}, content["curve"], as_json, csv_file, table)


@_cli.command("sheet")
@click.argument("candidate")
@click.option("--temperature", type=_Positive("K"), required=True, help="Kelvin.")
@click.option("--doping", type=_Positive("CM3"), required=True, help="Active density per cm³.")
@click.option("--size", type=_Positive("NM", bulk=True), required=True, metavar="NM|bulk", help="Nanometres.")
@_shape
@_output
def _sheet(
    candidate: str,
    temperature: float,
    doping: float,
    size: float,
    shape: str,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """Every property of CANDIDATE at one design point, with its parts."""
    from legwright.base.flags import ordered
    from legwright.base.units import NM, PER_CM3
    from legwright.candidate.library import load_candidate
    from legwright.decide.warnings import point_flags
    from legwright.physics.properties import evaluate
    from legwright.show import records, tables

    one = load_candidate(candidate)
    made = evaluate(one, temperature, doping * PER_CM3, size * NM, shape)
    content = records.sheet_record(one, made, ordered(point_flags(one, made, shape)))
    under = records.notes(content["flags"], [one])

    def table() -> None:
        out = tables.console(markdown)
        parts = made.to_frame().iloc[0].drop(["temperature [K]", "doping [1/cm^3]", "size [nm]"])
        pairs = [(str(name), tables.figure(value, 4)) for name, value in parts.items()]
        where = "coarse" if math.isinf(size) else f"{size:g} nm {shape}"
        heading = f"{one.name} ({content['formula']}) at {temperature:g} K, {doping:.3g} cm⁻³, {where}"
        out.print(tables.pairs_table(heading, pairs, markdown))
        tables.footnotes(out, tables.flag_numbers([content]), under["flag_meanings"], under["cautions"])

    _publish("sheet", {**content, **under}, [content], as_json, csv_file, table)


@_cli.command("why")
@click.argument("candidate")
@click.option("--temperature", type=_Positive("K"), help="Kelvin; or give a brief.")
@click.option("--brief", type=click.Path(path_type=Path), help="Over the duty of this brief, at its best design.")
@click.option("--doping", type=_Positive("CM3"), help="Active density per cm³.")
@click.option("--size", type=_Positive("NM"), metavar="NM", help="Nanometres.")
@click.option("--shape", metavar="grain|wire|film", help="Default: grain, or the brief's.")
@_output
def _why(
    candidate: str,
    temperature: float | None,
    brief: Path | None,
    doping: float | None,
    size: float | None,
    shape: str | None,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """What limits CANDIDATE at a design point or over a duty, and whether its size pays."""
    from legwright.base.units import NM, PER_CM3
    from legwright.candidate.library import load_candidate
    from legwright.decide.brief import load_brief
    from legwright.decide.why import design_of, why
    from legwright.show import records, tables

    if (temperature is None) == (brief is None):
        raise InputError("give either --temperature or --brief")
    one = load_candidate(candidate)
    job = None if brief is None else load_brief(brief)
    point = design_of(
        one,
        job,
        temperature,
        None if doping is None else doping * PER_CM3,
        None if size is None else size * NM,
        shape,
    )
    found = why(one, *point)
    content = records.why_record(found)
    under = records.notes(found.flags, [one])

    def table() -> None:
        out = tables.console(markdown)
        out.print(content["verdict"], markup=False)
        pays = content["electrons_pay_below_nm"]
        reach = "not down to 1 nm" if pays is None else f"below {tables.figure(pays)} nm"
        out.print(f"Carriers start to pay (5 % of mobility) {reach}.", markup=False)
        for each in tables.why_tables(content, markdown):
            out.print(each)
        tables.footnotes(out, tables.flag_numbers([content]), under["flag_meanings"], under["cautions"])

    _publish("why", {**content, **under}, content["free_paths"], as_json, csv_file, table)


@_cli.command("candidates")
@click.argument("name", required=False)
@_output
def _candidates(name: str | None, as_json: bool, csv_file: Path | None, markdown: bool) -> None:
    """What is in the library; with NAME, every number of that candidate and its source."""
    from legwright.candidate.family import family_names, load_family
    from legwright.candidate.library import library_names, load_candidate
    from legwright.show import records, tables

    if name is None:
        rows = [records.candidate_record(load_candidate(each)) for each in library_names()]
        lines = [records.family_record(load_family(each)) for each in family_names()]
        content: Record = {"candidates": rows, "families": lines}

        def table() -> None:
            out = tables.console(markdown)
            out.print(tables.library_table(rows, markdown))
            out.print(tables.make_up_table(rows, markdown))
            out.print(tables.families_table(lines, markdown))
    else:
        one = load_candidate(name)
        rows = records.number_records(one)
        content = {**records.candidate_record(one), "values": rows, "sources": records.citations(one)}

        def table() -> None:
            out = tables.console(markdown)
            out.print(tables.numbers_table(f"{one.name}: {one.data.title}, {one.data.direction}", rows, markdown))
            for key, text in content["sources"].items():
                out.print(f"{key}: {text}", markup=False)

    _publish("candidates", content, rows, as_json, csv_file, table)


@_cli.command("search")
@click.argument("subject")
@click.argument("brief", type=click.Path(path_type=Path))
@click.option("--evaluations", type=click.IntRange(12, 2000), default=48, show_default=True, help="Costly answers.")
@click.option("--seed", type=click.IntRange(0), default=0, show_default=True, help="Of the random numbers.")
@click.option("--resume", type=click.Path(path_type=Path), help="Checkpoint: kept up to date, and replayed.")
@_output
def _search(
    subject: str,
    brief: Path,
    evaluations: int,
    seed: int,
    resume: Path | None,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> int:
    """The best size, doping and, for a family, composition of SUBJECT (candidate or family) for BRIEF."""
    from legwright.candidate.family import family_names, load_family
    from legwright.candidate.library import load_candidate
    from legwright.decide.brief import load_brief
    from legwright.decide.search import search
    from legwright.show import records, tables

    one = load_family(subject) if subject in family_names() else load_candidate(subject)
    found = search(one, load_brief(brief), evaluations, seed, resume)
    content = records.search_record(found)
    under = records.notes(found.flags, [found.candidate])

    def table() -> None:
        out = tables.console(markdown)
        out.print(tables.search_table(content, markdown))
        tables.footnotes(out, tables.flag_numbers([content]), under["flag_meanings"], under["cautions"])

    _publish("search", {**content, **under}, [content], as_json, csv_file, table)
    return 0 if found.complete else 130


@_cli.command("leg")
@click.argument("candidate")
@click.argument("brief", type=click.Path(path_type=Path))
@click.option("--doping", type=_Positive("CM3"), help="Active density per cm³; default: the brief's best.")
@click.option("--size", type=_Positive("NM|bulk", bulk=True), help="nm, or bulk; default: the brief's best.")
@_output
def _leg(
    candidate: str,
    brief: Path,
    doping: float | None,
    size: float | None,
    as_json: bool,
    csv_file: Path | None,
    markdown: bool,
) -> None:
    """What a leg of CANDIDATE delivers in BRIEF, with the brief's contacts and exchangers."""
    from legwright.base.units import NM, PER_CM3
    from legwright.candidate.library import load_candidate
    from legwright.decide.brief import load_brief
    from legwright.decide.installed import deliver
    from legwright.show import records, tables

    one, job = load_candidate(candidate), load_brief(brief)
    found = deliver(one, job, None if doping is None else doping * PER_CM3, None if size is None else size * NM)
    content = records.leg_record(found, job)
    under = records.notes(found.flags, [one])

    def table() -> None:
        out = tables.console(markdown)
        out.print(tables.leg_table(content, markdown))
        tables.footnotes(out, tables.flag_numbers([content]), under["flag_meanings"], under["cautions"])

    _publish("leg", {**content, **under}, [content], as_json, csv_file, table)
    if found.running is None:
        raise NothingFeasible("this leg cannot serve this brief; the flags say why")


@_cli.command("fit")
@click.argument("measurements", type=click.Path(path_type=Path))
@click.option("--like", metavar="CANDIDATE", required=True, help="Candidate to start from: name or file.")
@click.option("--into", type=click.Path(path_type=Path), help="Write the calibrated candidate to this TOML file.")
@_output
def _fit(
    measurements: Path, like: str, into: Path | None, as_json: bool, csv_file: Path | None, markdown: bool
) -> None:
    """Calibrate a candidate to the table MEASUREMENTS (CSV with the unit in each header)."""
    from legwright.base.files import write_whole
    from legwright.candidate.library import load_candidate
    from legwright.candidate.measurements import read_measurements
    from legwright.decide.fit import candidate_text, fit
    from legwright.show import records, tables

    if into is not None and into.suffix != ".toml":
        raise InputError(f"value '{into}' is not allowed; a name that ends in .toml", key="--into")
    start = load_candidate(like)
    found = fit(read_measurements(measurements, start.data.carrier), start)
    content = records.fit_record(found, into)
    if into is not None:
        write_whole(into, candidate_text(found))

    def table() -> None:
        out = tables.console(markdown)
        for each in tables.fit_tables(content, markdown):
            out.print(each)
        out.print(f"Fit: {found.reason}. Heat capacity: {found.heat_capacity}.", markup=False)
        open_ones = [row["parameter"] for row in content["parameters"] if not row["determined"]]
        if open_ones:
            out.print(f"These data do not determine: {', '.join(open_ones)}.", markup=False)
        if into is not None:
            out.print(f"Written: {into}", markup=False)

    _publish("fit", content, content["parameters"], as_json, csv_file, table)


@_cli.command("audit")
@_output
def _audit(as_json: bool, csv_file: Path | None, markdown: bool) -> None:
    """The library against published samples: how far off, how often inside its own intervals."""
    from legwright.decide.audit import audit, totals
    from legwright.show import records, tables

    found = audit()
    rows = [records.verdict_record(one) for one in found.verdicts]
    sums = [records.total_record(one) for one in totals(found.verdicts)]
    content: Record = {"samples": rows, "totals": sums, "without_candidate": found.without_candidate}

    def table() -> None:
        out = tables.console(markdown)
        out.print(tables.totals_table(sums, markdown))
        out.print(tables.misses_table(rows, markdown))
        out.print(tables.AUDIT_WORDS, markup=False)
        waiting = ", ".join(f"{name} ({count})" for name, count in found.without_candidate.items())
        out.print(f"Published values without a candidate: {waiting or 'none'}.", markup=False)

    _publish("audit", content, rows, as_json, csv_file, table)


def _publish(
    verb: str,
    content: Record,
    rows: list[Record],
    as_json: bool,
    csv_file: Path | None,
    table: Callable[[], None],
) -> None:
    from legwright.base.files import write_whole
    from legwright.show import records

    if csv_file == Path():
        raise InputError("needs the name of a file", key="--csv")
    if csv_file is not None:
        write_whole(csv_file, records.as_csv(rows))
    if as_json:
        sys.stdout.write(records.as_json(verb, content))
    else:
        table()


def main() -> NoReturn:
    """Run the command line and leave with its exit code."""
    sys.exit(run(sys.argv[1:]))


def run(arguments: list[str]) -> int:
    """Exit code: 0 done, 1 our fault, 2 the input's, 3 nothing feasible, 130 interrupted."""
    try:
        done = _cli.main(args=arguments, prog_name="legwright", standalone_mode=False)
    except InputError as error:
        return _refuse(str(error))
    except click.exceptions.NoArgsIsHelpError as error:
        click.echo(error.format_message())
        return 0
    except click.ClickException as error:
        return _refuse(error.format_message())
    except NothingFeasible as error:
        click.echo(f"legwright: {error}", err=True)
        return 3
    except (KeyboardInterrupt, click.Abort):
        click.echo("legwright: interrupted", err=True)
        return 130
    except BrokenPipeError:
        return 0
    except Exception as error:
        click.echo(f"legwright: this is our fault: {type(error).__name__}: {error}", err=True)
        return 1
    return done if isinstance(done, int) else 0


def _refuse(message: str) -> int:
    click.echo(f"legwright: {message}", err=True)
    return 2
