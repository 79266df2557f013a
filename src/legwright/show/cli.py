"""The command line: the verbs together, and how a run ends. Nothing heavy is imported before a verb runs."""

from __future__ import annotations

import sys
from typing import Any, NoReturn

import click

from legwright.base.errors import InputError, NothingFeasible, nearest
from legwright.base.version import VERSION
from legwright.show.verbs.about import about_verb
from legwright.show.verbs.audit import audit_verb
from legwright.show.verbs.brief import brief_verb
from legwright.show.verbs.candidates import candidates_verb
from legwright.show.verbs.draw import draw_verb
from legwright.show.verbs.explain import explain_verb
from legwright.show.verbs.fit import fit_verb
from legwright.show.verbs.leg import leg_verb
from legwright.show.verbs.measure import measure_verb
from legwright.show.verbs.peak import peak_verb
from legwright.show.verbs.rank import rank_verb
from legwright.show.verbs.screen import screen_verb
from legwright.show.verbs.search import search_verb
from legwright.show.verbs.sheet import sheet_verb
from legwright.show.verbs.why import why_verb


class _Verbs(click.Group):
    """A group that offers the nearest verb for an unknown one."""

    def resolve_command(self, ctx: click.Context, args: list[str]) -> Any:
        if args and self.get_command(ctx, args[0]) is None:
            verbs = self.list_commands(ctx)
            raise InputError(f"no verb '{args[0]}'; {nearest(args[0], verbs)}", slug="unknown-name")
        return super().resolve_command(ctx, args)


@click.group(cls=_Verbs, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(VERSION)
def _cli() -> None:
    """Which thermoelectric material, at which size and doping, is worth making into a leg."""


for _verb in (
    rank_verb,
    peak_verb,
    sheet_verb,
    why_verb,
    draw_verb,
    candidates_verb,
    search_verb,
    screen_verb,
    leg_verb,
    measure_verb,
    fit_verb,
    audit_verb,
    brief_verb,
    explain_verb,
    about_verb,
):
    _cli.add_command(_verb)


def main() -> NoReturn:
    """Run the command line and leave with its exit code."""
    sys.exit(run(sys.argv[1:]))


def run(arguments: list[str]) -> int:
    """Exit code: 0 done, 1 our fault, 2 the input's, 3 nothing feasible, 130 interrupted."""
    try:
        done = _cli.main(args=arguments, prog_name="legwright", standalone_mode=False)
    except InputError as error:
        return _refuse(str(error), error.slug)
    except click.exceptions.NoArgsIsHelpError as error:
        click.echo(error.format_message())
        return 0
    except click.ClickException as error:
        return _refuse(error.format_message(), "usage")
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


def _refuse(message: str, slug: str) -> int:
    click.echo(f"legwright: {message} [{slug}]", err=True)
    return 2
