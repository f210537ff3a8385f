"""Standard drills, and rounding to them."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from lowpoint.design import Criteria
from lowpoint.design.drills import SERIES
from lowpoint.errors import LowpointError

METRIC, INCH = SERIES["metric"], SERIES["inch"]


@pytest.mark.parametrize(
    ("bore", "low", "high"),
    [
        # Steps of ISO 235 (from memory): 0.05 to 3, 0.1 to 14, 0.25 to 32, 0.5 to 50 mm, 1 mm where holes are bored.
        (2.97, 2.95, 3.0),
        (3.02, 3.0, 3.1),
        (13.95, 13.9, 14.0),
        (14.1, 14.0, 14.25),
        (31.8, 31.75, 32.0),
        (32.1, 32.0, 32.5),
        (49.7, 49.5, 50.0),
        (50.2, 50.0, 51.0),
        (215.5, 215.0, 216.0),
        (8.5, 8.5, 8.5),  # a tapping drill for M10 (common practice): itself
    ],
)
def test_metric_sizes(bore: float, low: float, high: float) -> None:
    found = METRIC.around(bore * 1e-3)
    assert [float(size) * 1e3 for size in found] == pytest.approx([low, high], rel=1e-12)


@pytest.mark.parametrize(
    ("bore", "low", "high"),
    [
        # Fractions of ASME B94.11M (from memory): 1/64 to 1 3/4, 1/32 to 2 1/4, 1/16 in above.
        (0.51, 1 / 2, 33 / 64),
        (1.76, 1.75, 1 + 25 / 32),
        (2.26, 2.25, 2 + 5 / 16),
    ],
)
def test_inch_sizes(bore: float, low: float, high: float) -> None:
    assert [float(size) / 0.0254 for size in INCH.around(bore * 0.0254)] == pytest.approx([low, high], rel=1e-12)


def test_outside_the_series_there_is_no_size() -> None:
    low, high = METRIC.around(np.array([0.3e-3, 4.0]))
    assert np.isnan(low).tolist() == [True, False]
    assert np.isnan(high).tolist() == [False, True]


@given(st.floats(0.8e-3, 2.9), st.sampled_from([METRIC, INCH]))
def test_sizes_enclose_the_bore_and_are_their_own_neighbours(bore: float, drills: object) -> None:
    low, high = (float(size) for size in drills.around(bore))  # type: ignore[attr-defined]
    assert low * (1.0 - 1e-9) <= bore <= high * (1.0 + 1e-9)
    assert high - low <= 1.6e-3  # the widest step, 1/16 in
    for size in (low, high):
        assert [float(x) for x in drills.around(size)] == [size, size]  # type: ignore[attr-defined]


def test_unknown_series() -> None:
    with pytest.raises(LowpointError) as error:
        Criteria(drills="imperial")
    assert str(error.value) == "drills: must be one of metric, inch, got 'imperial'."
