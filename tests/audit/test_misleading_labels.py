"""Labels that nearly name a quantity: read as nothing, or as unclear, never as what they are not."""

from __future__ import annotations

from pathlib import Path

import pytest

from lowpoint.audit.matching import OTHER, UNSURE, read_label
from lowpoint.audit.reading import read_sheet


@pytest.mark.parametrize("label", [
    "Filter differential pressure", "Strainer dp", "Actuator differential pressure", "Pump inlet pressure",
    "Pump discharge pressure", "Relief valve set pressure", "Steam inlet temperature", "Gas flow", "Bypass flow",
    "Cooling water flow", "Vapor density", "Vapour pressure margin", "Temperature rise", "Flow tolerance",
    "Opening time", "Pressure drop ratio", "Pipe OD", "Pipe outside diameter", "Downstream temperature",
    "Temp after valve", "Outlet pressure relief", "Stroke mm", "FL^2", "FL²", "Shut-off pressure drop",
    "Leakage flow", "Allowable noise", "Max. differential pressure (closed)", "Kv", "Cv", "DN", "Sigma min",
])  # fmt: skip
def test_it_is_not_taken_for_a_quantity(label: str) -> None:
    assert not read_label(label).known, read_label(label)


@pytest.mark.parametrize(
    ("label", "key"),
    [
        ("Plug travel", "travel"), ("Critical pressure ratio factor", "ff"), ("Pipe ID in.", "pipe_in"),
        ("Choked pressure drop", "dp_choked"), ("Durchflussbegrenzte Druckdifferenz", "dp_choked"),
        ("Atmosphärendruck", "atmosphere"), ("Rohrinnendurchmesser", "pipe_in"), ("Messstellen-Nr.", "tag"),
        ("Outlet velocity", "velocity_out"), ("Vapour pressure at T1", "pv"), ("Flow rate", "flow"),
    ],
)  # fmt: skip
def test_it_is_still_read(label: str, key: str) -> None:
    found = read_label(label)
    assert found.key == key
    assert found.key not in (OTHER, UNSURE)


def test_an_inch_with_its_stop() -> None:
    unit = read_label("Pipe ID in.").unit
    assert unit is not None
    assert unit.label == "in"


def test_a_property_at_another_temperature_is_not_used(tmp_path: Path) -> None:
    path = tmp_path / "sheet.csv"
    path.write_text("P1 bar(a);9\nP2 bar(a);7.2\nTemperature °C;90\nDensity at 15 °C, kg/m3;999.1\n"
                    "Vapour pressure at 90 °C, bar(a);0.7018\n", encoding="utf-8")  # fmt: skip
    (sheet,) = read_sheet(path).sheets
    assert {value.quantity for value in sheet.values} == {"p1", "p2", "t", "pv"}
    (finding,) = sheet.findings
    assert "999.1 holds at another temperature" in finding.text
