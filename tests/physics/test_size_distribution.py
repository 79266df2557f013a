"""Log-normal grains: the moments by quadrature, and the key of a candidate file."""

from __future__ import annotations

import math
from functools import partial

import numpy as np
import pytest
from scipy.integrate import quad

from legwright.candidate.library import load_candidate
from legwright.physics.crystal import crystal
from legwright.physics.properties import evaluate
from legwright.physics.shares import thermal_limits
from legwright.physics.texture import effective_size_ratio

near = partial(pytest.approx, abs=0.0)


@pytest.mark.parametrize("s", [0.05, 0.3, 0.7, 1.2])
def test_effective_size_is_the_ratio_of_moments(s):
    def moment(power: int) -> float:
        middle = power * s  # where d^power times the distribution peaks

        def among(z: float) -> float:
            return math.exp(power * s * z - 0.5 * z**2) / math.sqrt(2 * math.pi)

        return quad(among, middle - 12, middle + 12, epsabs=0, epsrel=1e-12)[0]

    assert effective_size_ratio(s) == near(moment(3) / moment(2), rel=1e-11)


def test_alike_grains_are_their_own_size():
    assert effective_size_ratio(0.0) == 1.0


def test_the_stated_size_of_a_file_with_a_spread_is_the_median(tmp_path):
    plain = load_candidate("sige-n")
    text = plain.path.read_text(encoding="utf-8")
    key = (
        'size_spread = { value = 0.6, unit = "1", spread = 0.1, source = "trade-practice", basis = "from memory" }'
    )
    path = tmp_path / "sige-n.toml"
    path.write_text(text.replace("[making]\n", f"[making]\n{key}\n"), encoding="utf-8")
    spread = load_candidate(path)
    assert crystal(spread).size_ratio == near(math.exp(0.9), rel=1e-14)
    assert crystal(plain).size_ratio == 1.0

    d = np.array([1e-8, 2e-7, np.inf])
    found, larger = evaluate(spread, 600.0, 1e26, d), evaluate(plain, 600.0, 1e26, d * math.exp(0.9))
    for name in ("lattice_thermal_conductivity", "electrical_conductivity", "seebeck", "hall_factor"):
        assert getattr(found, name) == near(getattr(larger, name), rel=1e-12), name
    assert np.array_equal(found.size, d)
    # and what limits a design point is asked at the same acting size
    limits = thermal_limits(crystal(spread), 600.0, 1e26, 1e-8, "grain").shares
    reference = thermal_limits(crystal(plain), 600.0, 1e26, 1e-8 * math.exp(0.9), "grain").shares
    assert limits["grain boundaries"] == near(reference["grain boundaries"], rel=1e-12)
