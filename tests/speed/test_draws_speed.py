"""What confidence costs, as a ratio of two things timed in the same run."""

from collections.abc import Callable
from time import perf_counter

from legwright.candidate.library import load_candidate
from legwright.decide.brief import Brief
from legwright.decide.drawn import drawn
from legwright.decide.rank import rank_one


def seconds(work: Callable[[], object]) -> float:
    begin = perf_counter()
    work()
    return perf_counter() - begin


def test_a_thousand_draws_cost_no_more_than_twenty_rankings():
    """Each with its own best size and doping: ranking anew would cost a thousand. Three to seven measured."""
    brief = Brief.model_validate(
        {
            "title": "Test",
            "duty": {"kind": "generator", "hot_K": 640.0, "cold_K": 350.0, "maximise": "efficiency"},
            "size": {"shape": "grain", "min_nm": 20.0, "max_nm": 5000.0},
        }
    )
    candidate = load_candidate("pbte-p")
    row = rank_one(brief, candidate)
    ranking = min(seconds(lambda: rank_one(brief, candidate)) for _ in range(3))
    drawing = min(seconds(lambda: drawn(brief, row, 1024, 0)) for _ in range(2))
    print(f"one ranking {ranking:.3f} s, 1024 draws {drawing:.2f} s, ratio {drawing / ranking:.1f}")
    assert drawing <= 20 * ranking
