"""Quanta of conductance against CODATA and against the integral over one open channel."""

import math
from functools import partial

import numpy as np
import pytest
from scipy import constants
from scipy.integrate import quad

from legwright.physics import quanta

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)


def test_thermal_conductance_quantum():
    # π² k_B² T/3h with CODATA constants: 9.4643e-13 W/K² × T
    assert f"{float(quanta.thermal_conductance_quantum(1.0)):.4e}" == "9.4643e-13"
    t = np.array([[0.0, 0.5], [1.0, 300.0]])
    assert quanta.thermal_conductance_quantum(t) == near(9.46432e-13 * t, rel=1e-6)


def test_it_is_the_heat_of_one_phonon_channel():
    # Landauer: (1/2π) ∫ ħω (∂n/∂T) dω = (k_B² T/h) ∫ x² eˣ/(eˣ − 1)² dx (Rego & Kirczenow 1998)
    integral, _ = quad(lambda x: (0.5 * x / math.sinh(0.5 * x)) ** 2, 1e-12, 100, epsrel=1e-12)
    channel = constants.k**2 * 2.0 / constants.h * integral
    assert quanta.thermal_conductance_quantum(2.0) == near(channel, rel=1e-10)


def test_channels_of_charge_and_heat_obey_wiedemann_and_franz():
    ratio = quanta.thermal_conductance_quantum(7.0) / (quanta.conductance_quantum_per_spin() * 7.0)
    assert ratio == near(math.pi**2 / 3 * (constants.k / constants.e) ** 2, rel=1e-14)


def test_conductance_quantum_per_spin():
    # e²/h = 3.8740e-5 S; its inverse is the von Klitzing constant (CODATA)
    assert f"{quanta.conductance_quantum_per_spin():.4e}" == "3.8740e-05"
    assert 1 / quanta.conductance_quantum_per_spin() == near(
        constants.physical_constants["von Klitzing constant"][0], rel=1e-9
    )


@pytest.mark.parametrize("temperature", [-1e-9, float("nan"), [1.0, -1.0]])
def test_below_absolute_zero_is_refused(temperature):
    with pytest.raises(ValueError, match="≥ 0 K"):
        quanta.thermal_conductance_quantum(temperature)
