"""Beside and below a label: formulas as symbols, labels that are no values, values that look like labels."""

from __future__ import annotations

from pathlib import Path

from audit_readings import one, reading


def test_a_formula_may_stand_in_the_column_of_symbols(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["Pressure difference", "p1-p2", "kPa", 540], ["Inlet pressure", "p1", "kPa a", 900]])
    assert (one(sheet, "dp").number, one(sheet, "dp").unit) == (540, "kPa")


def test_a_label_with_a_unit_is_no_value_of_its_neighbour(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["Medium", "Ambient pressure, sea side [kPa a]"], ["Water", 101.3]])
    assert one(sheet, "fluid").cell.endswith("!A2")
    assert one(sheet, "fluid").raw == "Water"


def test_words_that_are_half_a_label_are_the_value_below_a_label(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["Service", "Inlet pressure [bar a]"], ["return line", 7.5]])
    assert one(sheet, "service").raw == "return line"
    assert one(sheet, "p1").number == 7.5


def test_the_largest_drop_to_size_with_is_the_choked_one(tmp_path: Path) -> None:
    """Common practice: what is beyond it passes no more flow."""
    sheet = reading(tmp_path, [["Pressure drop", 3.2, "bar"], ["Maximum sizing pressure drop", 5.7, "bar"]])
    assert one(sheet, "dp").number == 3.2
    assert one(sheet, "dp_choked").number == 5.7
