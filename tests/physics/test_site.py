"""The site: what has no answer, and why."""

from __future__ import annotations

import pytest

from lowpoint.cells import call, reason
from lowpoint.problems import CellError


@pytest.mark.parametrize("height", [-5000.1, 11000.1, 1e9, -1e9])
def test_elevations_outside_the_standard_atmosphere(height: float) -> None:
    assert call("LP_ATMOSPHERE", [height]) is CellError.NUM
    assert "elevation must be" in reason("LP_ATMOSPHERE", [height])


def test_the_atmosphere_says_what_it_is() -> None:
    assert reason("LP_ATMOSPHERE", [120.0]).startswith("basis: the standard atmosphere")
    assert call("LP_ATMOSPHERE", [0.0]) == pytest.approx(1.01325, rel=1e-15)


def test_a_column_that_parts() -> None:
    # Definition: 10.33 m of water are an atmosphere.
    assert call("LP_COLUMN", [1.01325, 10.4, 1000.0]) is CellError.NUM
    assert "would part" in reason("LP_COLUMN", [1.01325, 10.4, 1000.0])
    assert isinstance(call("LP_COLUMN", [1.01325, 10.3, 1000.0]), float)


def test_a_column_beyond_all_numbers() -> None:
    assert call("LP_COLUMN", [1.0, -1e306, 1000.0]) is CellError.NUM
    assert "larger than a number" in reason("LP_COLUMN", [1.0, -1e306, 1000.0])


@pytest.mark.parametrize(("density", "name"), [(0.998, "LP_COLUMN"), (99.9, "LP_COLUMN"), (5.9, "LPU_COLUMN")])
def test_a_relative_density_was_typed(density: float, name: str) -> None:
    assert call(name, [10.0, 1.0, density]) is CellError.NUM
    assert "relative density" in reason(name, [10.0, 1.0, density])


def test_no_rise_changes_nothing() -> None:
    assert call("LP_COLUMN", [7.3, 0.0, 998.0]) == 7.3
