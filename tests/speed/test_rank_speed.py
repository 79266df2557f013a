"""Speed as a ratio of two things timed in the same run; seconds are only recorded."""

import subprocess
import sys
from pathlib import Path
from time import perf_counter

KILN = Path(__file__).resolve().parents[2] / "examples" / "kiln-flue.toml"
SCIENCE = "import numpy, scipy.optimize, scipy.interpolate, pandas, pymatgen.core, skopt, rich"


def seconds(*program: object) -> float:
    begin = perf_counter()
    subprocess.run([sys.executable, *map(str, program)], stdout=subprocess.DEVNULL, timeout=300, check=True)
    return perf_counter() - begin


def test_rank_costs_at_most_ten_times_importing_what_it_stands_on():
    """Best of a few, so that a busy machine or a cold disk does not count."""
    importing = min(seconds("-c", SCIENCE) for _ in range(3))
    cli = "from legwright.show.cli import main; main()"
    ranking = min(seconds("-c", cli, "rank", KILN, "--json") for _ in range(2))
    print(f"importing {importing:.2f} s, ranking the kiln brief {ranking:.2f} s, ratio {ranking / importing:.2f}")
    assert ranking <= 10 * importing
