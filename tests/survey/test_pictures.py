"""The pictures of an item against numbers worked out by hand."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from lowpoint.survey.pictures import index_picture, pressure_picture
from survey.books import bay, listed

PV = 0.023393
"""Water at 20 C, bar: saturation tables of IAPWS-95 (0.0023393 MPa)."""


def test_pressure_through_a_valve(tmp_path: Path) -> None:
    """Throat p1 - dp/FL^2, outlet at choking p1 - FL^2 (p1 - FF pv), FF = 0.96 - 0.28 sqrt(pv/pc): IEC 60534-2-1."""
    survey = listed(tmp_path, {})
    picture = pressure_picture(survey, 0)
    pressure, vapour, choked = picture.lines
    assert [name for _, name in picture.x_ticks] == ["inlet", "throat", "outlet"]
    assert pressure.y == pytest.approx((5.8, 5.8 - 1.6 / 0.81, 4.2), rel=1e-9)
    assert vapour.y == pytest.approx((PV, PV), rel=2e-4)
    factor = 0.96 - 0.28 * math.sqrt(PV / 220.64)
    assert choked.y == pytest.approx((5.8 - 0.81 * (5.8 - factor * PV),) * 2, rel=1e-5)
    assert {line.style for line in picture.lines} == {"line", "dashed", "dotted"}
    assert "throat 3.825" in picture.alternative


def test_the_throat_is_not_below_the_vapour_pressure_times_its_factor(tmp_path: Path) -> None:
    survey = listed(tmp_path, {"p2 [bar a]": 0.5})
    throat = pressure_picture(survey, 0).lines[0].y[1]
    assert throat == pytest.approx((0.96 - 0.28 * math.sqrt(PV / 220.64)) * PV, rel=2e-4)


def test_index_of_the_cases_against_flow(tmp_path: Path) -> None:
    survey = listed(tmp_path, {"Flow [m3/h]": 60, "Case": "maximum"}, {"Flow [m3/h]": 20, "Case": "minimum"})
    points, *limits = index_picture(survey, survey.items[0]).lines
    assert (points.x, points.labels) == (pytest.approx((20.0, 60.0)), ("minimum", "maximum"))
    assert points.y == pytest.approx(((5.8 - PV) / 1.6,) * 2, rel=1e-5)  # by definition, (p1-pv)/(p1-p2)
    assert [line.name for line in limits] == ["incipient limit, to keep", "damage limit", "choked limit"]
    assert limits[0].y == pytest.approx((2.1, 2.1))  # as stated: no size or head of a test is given
    assert len({(line.style, line.marker) for line in limits}) == len(limits)


def test_a_lone_case_has_limits_that_are_lines(tmp_path: Path) -> None:
    survey = listed(tmp_path, {})
    points, *limits = index_picture(survey, survey.items[0], "us").lines
    # 46 m3/h in US gallons of 3.785411784 l a minute, exact.
    assert points.x == pytest.approx((46e3 / 60 / 3.785411784,), rel=1e-12)
    assert all(line.x[0] < points.x[0] < line.x[1] for line in limits)


def test_a_case_without_an_answer_has_what_is_known(tmp_path: Path) -> None:
    survey = listed(tmp_path, {"FL": None})
    assert pressure_picture(survey, 0).lines[0].y == pytest.approx((5.8, 4.2))
    assert index_picture(survey, survey.items[0]).alternative.startswith("Index of 21-FCV-110")


def test_every_item_has_pictures_in_both_sets() -> None:
    survey = bay()
    for item in survey.items:
        for system in ("metric", "us"):
            picture = index_picture(survey, item, system)
            assert picture.alternative.endswith(".")
            for line in (*picture.lines, *pressure_picture(survey, item.rows[0], system).lines):
                assert len(line.x) == len(line.y) > 0
                assert all(map(math.isfinite, (*line.x, *line.y)))
