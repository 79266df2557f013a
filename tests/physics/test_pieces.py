"""Chebyshev pieces: exact on polynomials, geometric on analytic functions, continuous at the seams."""

from functools import partial

import numpy as np
import pytest

from legwright.physics.pieces import Pieces

#: pytest adds an absolute 1e-12 of its own, which is large among SI figures
near = partial(pytest.approx, abs=0.0)

X = np.linspace(-1.0, 3.0, 1001)


def test_polynomials_up_to_the_degree_are_exact():
    def cubic(x: np.ndarray) -> np.ndarray:
        return 2 - x + 0.5 * x**3

    assert Pieces.of(cubic, -1.0, 3.0, 5, 3)(X) == near(cubic(X), abs=1e-14 * 20)


def test_error_falls_geometrically_with_degree_and_with_the_width_to_the_degree_plus_one():
    errors = [np.max(np.abs(Pieces.of(np.exp, -1.0, 3.0, 4, n)(X) - np.exp(X))) for n in (3, 6, 9)]
    # Chebyshev interpolation of eˣ on a width of 1: about 2 e³ (1/4)^(n+1)/(n+1)!
    assert errors == sorted(errors, reverse=True)
    assert errors[0] / errors[1] > 1e3
    assert errors[1] / errors[2] > 1e3
    halved = np.max(np.abs(Pieces.of(np.exp, -1.0, 3.0, 8, 3)(X) - np.exp(X)))
    assert errors[0] / halved == near(2**4, rel=0.3)


def test_ends_and_seams():
    pieces = Pieces.of(np.sin, -1.0, 3.0, 8, 14)
    assert pieces(np.array([-1.0, 3.0])) == near(np.sin([-1.0, 3.0]), abs=1e-14)
    seams = np.arange(-0.5, 3.0, 0.5)
    assert pieces(np.nextafter(seams, -9)) == near(pieces(seams), abs=1e-14)


def test_shape_is_kept_and_neighbours_do_not_matter():
    pieces = Pieces.of(np.exp, -1.0, 3.0, 4, 9)
    assert pieces(np.array(0.3)).shape == ()
    grid = X[:1000].reshape(10, 20, 5)
    assert np.array_equal(pieces(grid).ravel(), pieces(X[:1000]))
    assert np.array_equal(pieces(X[:1000:7]), pieces(X[:1000])[::7])
