"""Units, gauge and absolute, digits and decimal signs of values that were read, and their numbers in SI."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest

from audit_readings import kinds, one, reading
from lowpoint.audit.numbers import decimal_sign, numbers_of, shown_number
from lowpoint.audit.reading import read_sheet
from lowpoint.audit.unitsigns import unit_sign


@pytest.mark.parametrize(
    ("row", "unit", "source"),
    [
        (["p1 [bar g]", 6.8], "bar g", "label"), (["p1, bar(g)", 6.8], "bar g", "label"),
        (["Inlet pressure barg", 6.8], "bar g", "label"), (["p1", "6.8 bar g"], "bar g", "cell"),
        (["p1", 6.8, "barg"], "bar g", "beside"), (["p1", "bar (g)", None, 6.8], "bar g", "beside"),
        (["p1 = 6.8 bar g"], "bar g", "cell"), (["Inlet pressure (gauge)", 6.8, "bar"], "bar g", "beside"),
        (["P1", 98.6, "psig"], "psi g", "beside"), (["P1 [kPa(a)]", 781.3], "kPa a", "label"),
    ],
)  # fmt: skip
def test_units_stand_in_many_places(row: list[Any], unit: str, source: str, tmp_path: Path) -> None:
    value = one(reading(tmp_path, [row]), "p1")
    assert (value.unit, value.unit_from, value.gauge) == (unit, source, unit.endswith("g"))


def test_a_column_and_a_block_headed_by_units(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["", "Value", "Unit"], ["p1", 6.8, "bar a"], ["Pressures [bar g]"], ["p2", 2.6]])
    assert (one(sheet, "p1").unit, one(sheet, "p2").unit, one(sheet, "p2").unit_from) == ("bar a", "bar g", "head")


def test_gauge_pressures_count_from_the_site(tmp_path: Path) -> None:
    # 1 bar = 1e5 Pa and 1 psi = 6894.757 Pa (SI brochure, NIST SP 811); standard atmosphere 101 325 Pa (ISO 2533).
    sheet = reading(tmp_path, [["p1", 6.8, "bar g"], ["p2", 37.7, "psig"], ["Pressure drop", 4.2, "bar"]])
    assert (sheet.atmosphere, sheet.atmosphere_from) == (101325.0, "assumed")
    assert one(sheet, "p1").si == pytest.approx(680000.0 + 101325.0)
    assert one(sheet, "p2").si == pytest.approx(37.7 * 6894.757 + 101325.0, rel=1e-6)
    assert one(sheet, "dp").si == pytest.approx(420000.0)


def test_the_sheet_speaks_before_the_caller(tmp_path: Path) -> None:
    # ISO 2533: 89 874.6 Pa at 1000 m geopotential, so 89 876 Pa at 1000 m geometric height (from memory).
    sheet = reading(tmp_path, [["p1", 6.8, "bar g"], ["Site elevation", 1000, "m"]], elevation=3000.0)
    assert (sheet.atmosphere, sheet.atmosphere_from) == (pytest.approx(89876.0, abs=5.0), "elevation")
    given = reading(tmp_path, [["p1", 6.8, "bar g"], ["Barometric pressure", 0.95, "bar"]], atmosphere=9e4)
    assert (given.atmosphere, given.atmosphere_from) == (pytest.approx(95000.0), "sheet")
    called = reading(tmp_path, [["p1", 6.8, "bar g"]], atmosphere=9e4)
    assert (called.atmosphere, called.atmosphere_from) == (9e4, "option")


def test_a_pressure_that_does_not_say_its_reference_has_no_si(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["p1", 6.8, "bar"], ["Vapour pressure", 0.03, "bar"]])
    value = one(sheet, "p1")
    assert (value.gauge, value.unit, math.isnan(value.si)) == (None, "bar", True)
    assert kinds(sheet) == ["gauge"]
    # A vapour pressure is absolute by its nature.
    assert (one(sheet, "pv").gauge, one(sheet, "pv").si) == (False, pytest.approx(3000.0))


def test_a_sentence_may_say_it_for_all(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["All pressures are absolute."], ["p1", 6.8, "bar"], ["p2", 2.6, "bar"]])
    assert (one(sheet, "p1").unit, one(sheet, "p2").gauge, kinds(sheet)) == ("bar a", False, [])
    assert any("read as absolute" in note.text for note in sheet.notes)


def test_a_gauge_unit_on_a_difference_is_kept(tmp_path: Path) -> None:
    value = one(reading(tmp_path, [["Pressure drop", 4.2, "bar g"]]), "dp")
    assert (value.unit, value.gauge, value.si) == ("bar g", True, pytest.approx(420000.0))


def test_one_number_in_two_units_is_two_values(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["p1", 6.8, "bar g", 98.6, "psig"], ["p2", "2.6 bar g / 37.7 psig"]])
    assert [(v.number, v.unit) for v in sheet.values if v.quantity == "p1"] == [(6.8, "bar g"), (98.6, "psi g")]
    assert [(v.number, v.unit) for v in sheet.values if v.quantity == "p2"] == [(2.6, "bar g"), (37.7, "psi g")]
    assert sheet.cases == ("",)


def test_flow_coefficients_are_their_own_unit(tmp_path: Path) -> None:
    # Av = Kv N1 sqrt(rho0/1000)/3600 with N1 0.1 (IEC 60534-2-1); 1 Kv = 1.156 Cv.
    sheet = reading(tmp_path, [["Kvs", 160, "m3/h"], ["Required Cv", 68.7]])
    assert (one(sheet, "rated").unit, one(sheet, "coefficient").unit) == ("Kv", "Cv")
    assert one(sheet, "rated").si == pytest.approx(160 * 0.1 * math.sqrt(0.9991) / 3600)
    assert one(sheet, "coefficient").si == pytest.approx(68.7 / 1.156 * 0.1 * math.sqrt(0.9991) / 3600)


def test_sizes_by_name(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["Valve size", "DN 100 / PN 16"], ["Pipe size upstream", '6" Sch 40'],
                               ["Pipe size downstream", "NPS 8"]])  # fmt: skip
    assert [(v.quantity, v.number, v.unit) for v in sheet.values if "size" in v.quantity or "pipe" in v.quantity] == [
        ("valve_size", 100.0, "DN"), ("pipe_in", 6.0, "in"), ("pipe_out", 8.0, "NPS")]  # fmt: skip
    assert one(sheet, "pipe_out").si == pytest.approx(0.2032)


def test_a_bound_is_said(tmp_path: Path) -> None:
    value = one(reading(tmp_path, [["Noise level", "< 85 dB(A)"]]), "noise")
    assert (value.number, value.note) == (85.0, "a bound, as is written")


def test_the_form_of_an_index_is_read_from_its_label_or_a_definition(tmp_path: Path) -> None:
    rows = {"σ = (p1-pv)/(p1-p2)": "upstream", "Sigma (P2 - Pv)/ΔP": "downstream", "xF": "xf",
            "Cavitation index, downstream form": "downstream", "Cavitation index": None}  # fmt: skip
    for label, form in rows.items():
        assert one(reading(tmp_path, [[label, 1.8]]), "sigma").form == form
    defined = reading(tmp_path, [["Sigma", 1.8], ["Definition: sigma = (p1 - pv)/(p1 - p2)"]])
    assert one(defined, "sigma").form == "upstream"


@pytest.mark.parametrize(
    ("stored", "style", "shown", "number", "half", "unit"),
    [
        (143.0876, "0.0", "143.1", 143.0876, 0.05, "Kv"), (143.0876, "General", "143.0876", 143.0876, 0.00005, "Kv"),
        (143.10000000000002, "General", "143.1", 143.10000000000002, 0.05, "Kv"),
        (1234.0, "#,##0", "1234", 1234.0, 0.5, "Kv"),
    ],
)  # fmt: skip
def test_digits_shown(stored: float, style: str, shown: str, number: float, half: float, unit: str,
                      tmp_path: Path) -> None:  # fmt: skip
    value = one(reading(tmp_path, [["Required Kv", stored]], {(1, 2): style}), "coefficient")
    assert (value.raw, value.number, value.unit) == (shown, pytest.approx(number, rel=1e-15), unit)
    assert value.half == pytest.approx(half)


def test_a_number_shown_in_per_cent_is_per_cents(tmp_path: Path) -> None:
    value = one(reading(tmp_path, [["Travel", 0.524]], {(1, 2): "0%"}), "travel")
    assert (value.raw, value.number, value.unit, value.half) == ("52", pytest.approx(52.4), "%", 0.5)
    assert value.si == pytest.approx(0.524)


def test_a_unit_in_the_number_format(tmp_path: Path) -> None:
    value = one(reading(tmp_path, [["p1", 6.83]], {(1, 2): '0.0" bar g"'}), "p1")
    assert (value.unit, value.unit_from, value.raw) == ("bar g", "cell", "6.8")


@pytest.mark.parametrize(
    ("text", "decimal", "number"),
    [
        ("6,8", "", 6.8), ("1.234,5", "", 1234.5), ("1,234.5", "", 1234.5), ("1 234,5", ",", 1234.5),
        ("1,234", ".", 1234.0), ("1,234", ",", 1.234), ("1.234", ",", 1234.0), ("1.234", ".", 1.234),
        ("0,0317", "", 0.0317),
        ("1,234,567", "", 1234567.0), ("2.5E-3", "", 0.0025), ("1 1/2", "", 1.5), ("≈ 12", "", 12.0), ("-5", "", -5.0),
    ],
)  # fmt: skip
def test_numbers_as_text(text: str, decimal: str, number: float) -> None:
    (found,) = numbers_of(text, decimal)
    assert found.value == pytest.approx(number)


@pytest.mark.parametrize("text", ["10-20", "2026-05-01", "12:30", "LV-204", "abc", "", "100/150", "IEC 60534"])
def test_what_is_no_number(text: str) -> None:
    assert numbers_of(text, "") == ()


def test_a_comma_that_may_be_either_is_told(tmp_path: Path) -> None:
    assert numbers_of("1,234", "")[0].ambiguous
    sheet = reading(tmp_path, [["Flow", "1,234 m3/h"], ["p1", 6.8, "bar a"]])
    assert kinds(sheet) == ["ambiguous"]
    assert not [v for v in sheet.values if v.quantity == "flow"]


def test_the_decimal_sign_of_a_sheet() -> None:
    assert decimal_sign(["6,8", "1,234"]) == ","
    assert decimal_sign(["6.8", "1,234"]) == "."
    assert decimal_sign(["6.8", "6,8"]) == "?"
    assert decimal_sign(["1,234", "12"]) == ""


def test_shown_number_examples() -> None:
    assert shown_number(-2.5, "0.0;(0.0)")[:2] == ("-2.5", 0.05)
    assert shown_number(0.00123, "0.00E+00")[:2] == ("1.23e-03", pytest.approx(5e-6))
    assert shown_number(12.0, "0.##")[0] == "12"


@pytest.mark.parametrize("text", ["bar g", "BARG", "bar(g)", "bar (g)", "bar gauge", "[bar g]", "bar.g"])
def test_spellings_of_one_unit(text: str) -> None:
    sign = unit_sign(text)
    assert sign is not None
    assert (sign.label.lower(), sign.gauge) == ("bar g", True)


@pytest.mark.parametrize("text", ["P1", "p2", "T1", "D1", "valve", "", "dBm"])
def test_what_is_no_unit(text: str) -> None:
    assert unit_sign(text) is None


@pytest.mark.parametrize(("raw", "unit", "findings"), [(55, "%", 0), (0.55, "", 1)])
def test_an_opening_without_a_unit(tmp_path: Path, raw: float, unit: str, findings: int) -> None:
    """Above 1 it can only be per cent; below, a share or per cent, which is asked."""
    rows = [["Tag", "21-FV-1"], ["P1 bar(a)", 8], ["P2 bar(a)", 6], ["Valve opening", raw]]
    found = reading(tmp_path, rows)
    value = one(found, "travel")
    assert value.unit == unit
    assert math.isfinite(value.si) == bool(unit)
    assert len([f for f in found.findings if f.kind == "unit"]) == findings


def test_numbers_that_may_be_read_two_ways_are_told(tmp_path: Path) -> None:
    """Too few others make it a data sheet, and what is the matter is said all the same."""
    path = tmp_path / "sheet.csv"
    path.write_text("Tag;1-FV-1\nP1 kPa(a);1,200\nP2 kPa(a);1,050\nT °C;120\n", encoding="utf-8")
    (sheet,) = read_sheet(path).sheets
    assert [finding.cell for finding in sheet.findings] == ["row 2, column 2", "row 3, column 2"]


@pytest.mark.parametrize("unit", ["", " [Cv]"])
def test_a_row_of_labels_is_no_value_of_its_first(tmp_path: Path, unit: str) -> None:
    """The characteristic stands below its label; beside it stands another label, which is not clear alone."""
    rows = [["Characteristic", f"Flow coefficient at full travel Cv100{unit}", "Pipe inside diameter [mm]"],
            ["equal percentage", 92.8, 80.0]]  # fmt: skip
    found = reading(tmp_path, [["Required Cv", 31.0], *rows])
    assert one(found, "characteristic").word == "equal percentage"
    assert one(found, "rated").number == 92.8
