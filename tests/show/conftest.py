"""A duty and a design that several tests draw."""

import pytest

from legwright.candidate.library import load_candidate
from legwright.leg.duty import Duty
from legwright.show.drawings import Design

DUTY = Duty("generator", 900.0, 400.0, "efficiency", 1e-3)


@pytest.fixture(scope="session")
def at_temperature() -> Design:
    return Design(load_candidate("sige-n"), 900.0, 1e26, 50e-9, (20e-9, 90e-9), "grain", (10e-9, 1e-5))


@pytest.fixture(scope="session")
def over_duty() -> Design:
    return Design(load_candidate("sige-n"), DUTY, 1e26, 50e-9, (20e-9, 90e-9), "grain", (10e-9, 1e-5))
