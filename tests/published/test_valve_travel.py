"""Inherent characteristics against the ideal curves of IEC 60534-2-4 (from memory)."""

from __future__ import annotations

import math

import pytest

from lowpoint import functions
from published.rows import Row, parameters, read

ROWS = read("valve_travel")
RATED = 84.0


def test_every_row_is_used() -> None:
    assert len(ROWS) == 15
    assert {row.quantity.split(",")[0] for row in ROWS.values()} == {"phi=R^(h-1)", "phi=phi0+(1-phi0)h"}


@pytest.mark.parametrize("row", parameters(ROWS.values()))
def test_opening_of_a_published_share(row: Row) -> None:
    """The share that the row prints, at both ends of its tolerance, encloses the row's opening."""

    def opening(share: float) -> float:
        if "R" in row.inputs:
            word, rangeability = "equal percentage", row.inputs["R"]
        else:
            word, rangeability = "linear", 1.0 / row.inputs["phi0"]
        return functions["LP_TRAVEL"](
            coefficient=share * RATED, rated=RATED, characteristic=word, rangeability=rangeability
        )

    low, high = opening(row.value - row.allowed), opening(row.value + row.allowed)
    # Beyond an end of the travel there is no answer, which is what the standard's curve says too.
    assert math.isnan(low) == (row.inputs["h"] == 0)
    assert math.isnan(high) == (row.inputs["h"] == 1)
    wanted = 100.0 * row.inputs["h"]
    assert (0.0 if math.isnan(low) else low) <= wanted <= (100.0 if math.isnan(high) else high)
    if not math.isnan(low) and not math.isnan(high):
        assert high - low < 1e-3
