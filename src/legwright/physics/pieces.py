"""A smooth function as Chebyshev series on equal pieces: built once, evaluated in a few operations a point."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Pieces:
    """Pieces of `width` from `start`; `coefficients` has one row a degree and one column a piece; dimensionless."""

    start: float
    width: float
    coefficients: Array

    @classmethod
    def of(cls, function: Callable[[Array], Array], start: float, stop: float, count: int, degree: int) -> Pieces:
        """Interpolate `function`, which takes an array of any shape, at the Chebyshev points of each piece."""
        width = (stop - start) / count
        local = np.cos(np.pi * (np.arange(degree + 1) + 0.5) / (degree + 1))
        centres = start + width * (np.arange(count) + 0.5)
        values = function(centres[:, None] + 0.5 * width * local)
        coefficients = np.asarray(np.polynomial.chebyshev.chebfit(local, values.T, degree), dtype=np.float64)
        return cls(start, width, coefficients)

    def __call__(self, x: Array) -> Array:
        """Values at x, which must lie between the first and the last piece's ends (Clenshaw 1955)."""
        position = (x - self.start) / self.width
        piece = np.clip(position.astype(np.intp), 0, self.coefficients.shape[1] - 1)
        local = 2 * (position - piece) - 1
        twice = 2 * local
        upper, lower = np.zeros_like(local), np.zeros_like(local)
        for row in self.coefficients[:0:-1]:
            upper, lower = row[piece] + twice * upper - lower, upper
        return np.asarray(self.coefficients[0][piece] + local * upper - lower)
