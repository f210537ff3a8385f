"""Headings as the trade writes them: which field, which unit; what is no heading, and what has no unit."""

from __future__ import annotations

import pytest

from lowpoint.survey.fields import CARRIED, FIELDS, TABLE_FIELDS
from lowpoint.survey.grids import Grid
from lowpoint.survey.headers import find_headings, is_carried, read_heading, with_unit


@pytest.mark.parametrize(
    ("text", "key", "unit"),
    [
        ("p1 [bar g]", "p1", "bar g"),
        ("P1 (psig)", "p1", "psig"),
        ("p₁, bar a", "p1", "bar a"),
        ("p1 bar g", "p1", "bar g"),
        ("Inlet pressure\nkPa", "p1", "kPa"),
        ("Flow, m3/h", "flow", "m3/h"),
        ("Flow rate in US gal/min", "flow", "US gal/min"),
        ("MASS FLOW [t/h]", "flow", "t/h"),
        ("Temperature [°C]", "t", "°C"),
        ("Temp. deg F", "t", "deg F"),
        ("DN", "valve_size", "mm"),
        ("NPS", "valve_size", "in"),
        ("Valve size (mm)", "valve_size", "mm"),
        ("Kvs", "rated", "Kv"),
        ("Rated Cv", "rated", "Cv"),
        ("SG", "density", "SG"),
        ("Density kg/m³", "density", "kg/m³"),
        ("FL", "fl", None),
        ("x Fz [-]", "xfz", "-"),
        ("Kinematic viscosity [cSt]", "viscosity", "cSt"),
        ("Tag No.", "tag", None),
        ("Limit to keep", "keep", None),
    ],
)  # fmt: skip
def test_known_headings(text: str, key: str, unit: str | None) -> None:
    heading = with_unit(read_heading(text, FIELDS))
    assert heading.field is not None
    assert (heading.field.key, heading.unit, heading.problem) == (key, unit, "")


@pytest.mark.parametrize("text", ["Colour", "p3 [bar]", "Pump curve", "1", "bar g", "§", ""])
def test_unknown_headings(text: str) -> None:
    assert read_heading(text, FIELDS).field is None


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("p1", "the heading of p1 must name its unit"),
        ("p1 [-]", "the heading of p1 must name its unit"),
        ("p1 [furlong]", "'furlong' is not a unit that is known"),
        ("Flow [Mbar]", "is not clear"),
        ("Flow [bar]", "'bar' is a unit of another kind of quantity than Flow"),
        ("Flow [Nm3/h]", "normal or standard volume of gas"),
        ("FL [bar]", "no unit of FL, which is a plain ratio"),
    ],
)
def test_headings_whose_unit_will_not_do(text: str, words: str) -> None:
    heading = with_unit(read_heading(text, FIELDS))
    assert heading.field is not None
    assert words in heading.problem
    assert heading.remedy


def test_no_name_is_carried_and_known_at_once() -> None:
    for catalogue in (FIELDS, TABLE_FIELDS):
        for field in catalogue:
            assert not any(is_carried(name) for name in field.names), field.key
    assert all(read_heading(name, FIELDS).field is None for name in CARRIED)


def test_a_row_of_units_below_the_headings() -> None:
    rows = [(3, ["Tag", "Flow", "p1", "p2", "FL"]), (4, [None, "m3/h", "bar g", "bar g", "-"]), (5, ["A", 1, 2, 3, 4])]
    place = find_headings(Grid("List", rows))
    assert place is not None
    assert (place.row, place.first) == (3, 5)
    assert [heading.unit for heading in place.headings.values()] == [None, "m3/h", "bar g", "bar g", "-"]
    assert not any(heading.problem for heading in place.headings.values())


def test_titles_above_are_not_taken_for_headings() -> None:
    rows = [
        (1, ["Valve list of Kestrel Bay"]),
        (2, ["Tag", None]),
        (4, ["Tag", "Flow [m3/h]", "p1 [bar a]", "p2 [bar a]"]),
    ]
    place = find_headings(Grid("List", rows))
    assert place is not None
    assert place.row == 4
    assert find_headings(Grid("List", rows[:2])) is None


def test_a_summary_of_items_is_no_list() -> None:
    assert find_headings(Grid("Summary", [(1, ["Tag", "Case", "Service", "Margin"])])) is None
