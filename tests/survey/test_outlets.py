"""The outlet as a place: p2 by hand from density, height and friction."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from lowpoint.survey import survey_list
from lowpoint.survey.model import Survey
from survey_lists import write_csv

BASE = {"Tag": "21-LCV-126", "Flow [m3/h]": 100, "p1 [bar a]": 4.0, "pv [bar a]": 0.05, "pc [bar a]": 221.2,
        "Density [kg/m3]": 1000, "FL": 0.8, "Incipient": 2.0, "Atmosphere [bar a]": 1.0}  # fmt: skip


def _survey(tmp_path: Path, **place: Any) -> Survey:
    columns = BASE | {{"outlet": "Outlet into", "pressure": "Pressure there [bar a]", "rise": "Rise to the place [m]",
                       "loss": "Friction to the place [bar]", "p2": "p2 [bar a]"}[key]: value
                      for key, value in place.items()}  # fmt: skip
    return survey_list(write_csv(tmp_path / "list.csv", list(columns), [list(columns.values())]))


# By hand with g = 9.80665 m/s2 and 1000 kg/m3: 0.0980665 bar a metre.
@pytest.mark.parametrize(
    ("place", "p2"),
    [
        ({"outlet": "into a pipe", "pressure": 2.0}, 2.0),
        ({"outlet": "pipe", "pressure": 2.0, "rise": 5.0, "loss": 0.3}, 2.0 + 0.4903325 + 0.3),
        ({"outlet": "submerged", "rise": 6.0}, 1.0 + 0.588399),
        ({"outlet": "Submerged", "rise": 6.0, "pressure": 1.5, "loss": 0.1}, 1.5 + 0.588399 + 0.1),
        ({"outlet": "free jet"}, 1.0),
        ({"outlet": "falling leg", "rise": -5.0}, 1.0 - 0.4903325),
        ({"outlet": "falling leg", "rise": -5.0, "loss": 0.2}, 1.0 - 0.4903325 + 0.2),
    ],
)
def test_outlet_pressure_by_hand(place: dict[str, Any], p2: float, tmp_path: Path) -> None:
    survey = _survey(tmp_path, **place)
    assert survey.findings.errors == [[]]
    assert survey.cases.p2[0] / 1e5 == pytest.approx(p2, rel=1e-9)
    assert survey.cases.source["p2"].tolist() == ["place"]
    assert survey.findings.sigma[0] == pytest.approx((4.0 - 0.05) / (4.0 - p2), rel=1e-9)
    untold = "loss" in place or place["outlet"] == "free jet"
    assert any("without friction" in caution for caution in survey.findings.cautions[0]) is not untold


def test_a_leg_that_parts(tmp_path: Path) -> None:
    """A leg of 12 m under 1 bar would draw -0.18 bar: it parts, and the vapour pressure stands behind the valve."""
    survey = _survey(tmp_path, outlet="falling leg", rise=-12.0, loss=0.0)
    assert survey.cases.p2[0] / 1e5 == pytest.approx(0.05)
    assert survey.findings.regime.tolist() == ["flashing"]
    assert any("it parts" in caution for caution in survey.findings.cautions[0])


@pytest.mark.parametrize(
    ("place", "words"),
    [
        ({"outlet": "pipe"}, "Pressure there must be given for an outlet into a pipe"),
        ({"outlet": "submerged"}, "Rise to the place must be given"),
        ({"outlet": "falling leg"}, "Rise to the place must be given"),
        ({"outlet": "falling leg", "rise": 5.0}, "Rise to the place must be negative for a falling leg"),
        ({"outlet": "submerged", "rise": -15.0}, "no absolute pressure is left at the outlet"),
        ({"outlet": "submerged", "rise": 60.0}, "p2 must be below p1"),
    ],
)
def test_places_that_cannot_be(place: dict[str, Any], words: str, tmp_path: Path) -> None:
    survey = _survey(tmp_path, **place)
    assert any(words in error for error in survey.findings.errors[0]), survey.findings.errors
    assert survey.findings.regime.tolist() == [None]


def test_a_given_pressure_goes_before_the_place(tmp_path: Path) -> None:
    survey = _survey(tmp_path, outlet="free jet", p2=2.0)
    assert survey.cases.p2[0] == 2e5
    assert any("which would make it 1 bar a: the given one was used" in c for c in survey.findings.cautions[0])


def test_an_unknown_place(tmp_path: Path) -> None:
    survey = _survey(tmp_path, outlet="the sea")
    assert "Outlet into must be one of pipe, submerged, free jet, falling leg, got the text 'the sea'" in (
        survey.reading.problems[0].sentence()
    )
