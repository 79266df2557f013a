"""How soon an answer comes, as ratios of things timed in the same run; seconds are only recorded."""

import subprocess
import sys
from time import perf_counter

CLI = "from legwright.show.cli import main; main()"
SHEET = ("sheet", "si-n", "--temperature", "300", "--doping", "1e20", "--size", "50")


def seconds(*arguments: str) -> float:
    begin = perf_counter()
    subprocess.run([sys.executable, *arguments], stdout=subprocess.DEVNULL, timeout=300, check=True)
    return perf_counter() - begin


def alternating(first: tuple[str, ...], second: tuple[str, ...], rounds: int) -> tuple[float, float]:
    """Best of each, timed in turn so that a busy spell strikes both."""
    pairs = [(seconds(*first), seconds(*second)) for _ in range(rounds)]
    return min(a for a, _ in pairs), min(b for _, b in pairs)


def test_help_comes_within_eight_bare_starts_of_the_interpreter():
    bare, helping = alternating(("-c", "pass"), ("-c", CLI, "--help"), 9)
    print(f"bare start {bare:.3f} s, --help {helping:.3f} s, ratio {helping / bare:.1f}")
    assert helping <= 8 * bare


def test_a_sheet_comes_within_twice_the_import_of_what_it_stands_on():
    libraries = ("-c", "import numpy, scipy.special, pydantic, pint")
    importing, answering = alternating(libraries, ("-c", CLI, *SHEET), 5)
    print(f"importing {importing:.2f} s, a sheet {answering:.2f} s, ratio {answering / importing:.2f}")
    assert answering <= 2 * importing
