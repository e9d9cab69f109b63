"""Derivatives found without the formulas under test."""

import numpy as np
import pytest


def by_contour(function, at, radius, points=16):
    """Return dF/dx of an analytic function from its values on a circle (Cauchy's integral formula)."""
    turns = np.exp(2j * np.pi * np.arange(points) / points)
    return sum(function(at + radius * turn) / turn for turn in turns) / (points * radius)


def by_differences(function, at, step, halvings=6):
    """Return dF/dx by central differences, extrapolated to step zero; the best of the table is kept.

    C. J. F. Ridders, "Accurate computation of F'(x) and F'(x)F''(x)", Advances in Engineering Software 4,
    1982, 75–76.
    """
    table = []
    best, smallest = None, np.inf
    for row in range(halvings):
        h = step / 2.0**row
        line = [(function(at + h) - function(at - h)) / (2.0 * h)]
        for column in range(1, row + 1):
            line.append(line[-1] + (line[-1] - table[-1][column - 1]) / (4.0**column - 1.0))
            error = max(np.abs(line[-1] - line[-2]).max(), np.abs(line[-1] - table[-1][column - 1]).max())
            if error < smallest:
                best, smallest = line[-1], error
        table.append(line)
    return best


@pytest.fixture
def contour_derivative():
    return by_contour


@pytest.fixture
def extrapolated_derivative():
    return by_differences
