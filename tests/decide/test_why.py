"""The verdict says what the figures say."""

from __future__ import annotations

import numpy as np
import pytest

from legwright.base.errors import InputError
from legwright.candidate.library import load_candidate
from legwright.decide.why import PAYING, design_of, why
from legwright.physics.properties import evaluate


@pytest.mark.parametrize("shape", ["grain", "wire"])
def test_figures_are_those_of_the_point(shape):
    candidate, kelvin = load_candidate("sige-p"), np.array([900.0, 1100.0])
    found = why(candidate, kelvin, 2e26, 2e-8, shape)
    made = evaluate(candidate, kelvin[:, None], 2e26, [2e-8, np.inf], shape)
    assert (found.zt, found.zt_coarse) == pytest.approx(tuple(np.mean(made.zt, axis=0)), rel=1e-12)
    assert sum(found.electrical_shares.values()) == pytest.approx(1, abs=1e-12)
    assert sum(found.thermal_shares.values()) == pytest.approx(1, abs=1e-12)
    assert (found.zt_grain_law is None) == (shape == "wire")
    if found.zt_grain_law:
        grey, by_wavelength = found.zt_grain_law
        assert grey > found.zt > by_wavelength, "the grey law stops long waves sooner"
    at = found.electrons_pay_below
    mobility = evaluate(candidate, kelvin[:, None], 2e26, [at, np.inf], shape).mobility.mean(axis=0)
    assert mobility[0] / mobility[1] == pytest.approx(PAYING, abs=1e-4)


def test_verdict_names_gain_and_loss():
    kelvin = np.array([1100.0])
    pays = why(load_candidate("sige-p"), kelvin, 2.4e26, 2e-8, "grain").verdict
    assert " pays: at 1100 K" in pays
    assert "(+" in pays
    loses = why(load_candidate("pbte-n"), np.array([300.0]), 1e25, 2e-9, "grain").verdict
    assert "does not pay" in loses
    assert "(-" in loses
    nothing = why(load_candidate("pbte-n"), np.array([300.0]), 1e25, 1e-4, "grain").verdict
    assert "makes no difference that counts" in nothing


def test_a_point_needs_doping_and_size():
    with pytest.raises(InputError, match="--doping and --size"):
        design_of(load_candidate("si-n"), None, 300.0, 1e25, None, None)
