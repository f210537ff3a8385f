"""Ordinary formulas agree with LibreOffice where it knows them, newer ones with their documentation."""

from __future__ import annotations

import datetime
import io
import math
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from openpyxl.utils.datetime import to_excel
from openpyxl.workbook.defined_name import DefinedName

from book.formulas import DOCUMENTED, NAMES, OFFICE_DIFFERS, ORDINARY, SHEETS, Documented, Ordinary
from book.office import needs_office, recalculated
from lowpoint.book.cures import prepare
from lowpoint.book.engine import Engine, Unrefreshable
from lowpoint.book.lifting import register

_APART = 20  # rows from one documented formula to the next: room for what spills

# LibreOffice has errors of its own (Err:502, invalid argument) and saves them all as #VALUE!.
_OFFICE_VALUE = {"#VALUE!", "#NUM!", "#REF!", "#N/A"}


def _book(formulas: list[str], apart: int = 1) -> bytes:
    book = openpyxl.Workbook()
    del book["Sheet"]
    for name, rows in SHEETS.items():
        sheet = book.create_sheet(name)
        for row in rows:
            sheet.append(row)
    sheet = book.create_sheet("Calc")
    for number, formula in enumerate(formulas):
        sheet.cell(1 + number * apart, 2, formula)
    for name, place in NAMES.items():
        book.defined_names[name] = DefinedName(name, attr_text=place)
    out = io.BytesIO()
    book.save(out)
    return out.getvalue()


def _engine(formulas: list[str], apart: int = 1) -> Engine:
    prepared = [prepare(formula) for formula in formulas]
    engine = Engine.load(_book(["kept" if p.blocked else p.text for p in prepared], apart))
    register(engine)
    engine.evaluate()
    return engine


def _plain(value: Any) -> Any:
    """A value as openpyxl reads it from a saved cell, as a cell value."""
    if isinstance(value, datetime.timedelta):
        return value / datetime.timedelta(days=1)
    if isinstance(value, (datetime.datetime, datetime.date, datetime.time)):
        return to_excel(value)
    return float(value) if isinstance(value, int) and not isinstance(value, bool) else value


def _agree(found: Any, wanted: Any) -> bool:
    if isinstance(found, float) and isinstance(wanted, float):
        return math.isclose(found, wanted, rel_tol=1e-12)
    if isinstance(found, list) and isinstance(wanted, list):
        return len(found) == len(wanted) and all(
            len(a) == len(b) and all(map(_agree, a, b)) for a, b in zip(found, wanted, strict=True)
        )
    if isinstance(found, Unrefreshable) or isinstance(found, bool) is not isinstance(wanted, bool):
        return False
    return bool((found or None) == (wanted or None)) if isinstance(found, (str, type(None))) else bool(found == wanted)


@pytest.fixture(scope="module")
def ours() -> list[Any]:
    """What our engine gives for every ordinary formula."""
    engine = _engine([item.formula for item in ORDINARY])
    return [row[0] for row in engine.values("Calc", 1, 2, len(ORDINARY), 2)]


@pytest.fixture(scope="module")
def theirs(tmp_path_factory: pytest.TempPathFactory) -> list[Any]:
    """What LibreOffice gives for every ordinary formula, in one run."""
    folder = tmp_path_factory.mktemp("office")
    source = folder / "ordinary.xlsx"
    source.write_bytes(_book([item.formula for item in ORDINARY]))
    return _read(recalculated(source, folder / "out"))


def _read(path: Path) -> list[Any]:
    sheet = openpyxl.load_workbook(path, data_only=True)["Calc"]
    return [_plain(sheet.cell(row, 2).value) for row in range(1, len(ORDINARY) + 1)]


_ROWS = list(enumerate(ORDINARY))
_BLOCKED = [item.formula for item in ORDINARY if prepare(item.formula).blocked]


@needs_office
@pytest.mark.parametrize("place, item", _ROWS, ids=[f"{item.group} {item.formula}" for item in ORDINARY])
def test_agrees_with_libreoffice(place: int, item: Ordinary, ours: list[Any], theirs: list[Any]) -> None:
    found, wanted = ours[place], theirs[place]
    if item.formula in _BLOCKED:
        assert found == "kept"
    elif item.formula in OFFICE_DIFFERS:
        value, source = OFFICE_DIFFERS[item.formula]
        assert source
        assert _agree(found, value), (found, value)
        assert not _agree(value, wanted), "LibreOffice agrees by now: take it out of OFFICE_DIFFERS"
    elif wanted == "#VALUE!":
        assert found in _OFFICE_VALUE
    else:
        assert wanted != "#NAME?", "LibreOffice does not know it: give it a documented value"
        assert _agree(found, wanted), (found, wanted)


@pytest.mark.parametrize("formula", OFFICE_DIFFERS)
def test_the_reference_holds_where_libreoffice_differs(formula: str, ours: list[Any]) -> None:
    place = next(k for k, item in enumerate(ORDINARY) if item.formula == formula)
    assert _agree(ours[place], OFFICE_DIFFERS[formula][0])


@pytest.fixture(scope="module")
def documented() -> Engine:
    return _engine([item.formula for item in DOCUMENTED], _APART)


@pytest.mark.parametrize("place, item", list(enumerate(DOCUMENTED)), ids=[item.formula for item in DOCUMENTED])
def test_newer_functions_give_what_is_documented(place: int, item: Documented, documented: Engine) -> None:
    row = 1 + place * _APART
    high, wide = documented.spill("Calc", row, 2)
    found = documented.values("Calc", row, 2, row + high - 1, 1 + wide)
    assert item.source
    assert _agree(found if isinstance(item.value, list) else found[0][0], item.value), found


def test_there_are_enough_formulas_and_few_are_blocked() -> None:
    assert len(ORDINARY) >= 300
    assert len({item.formula for item in ORDINARY}) == len(ORDINARY)
    assert len(_BLOCKED) <= 6
    assert not [item.formula for item in DOCUMENTED if prepare(item.formula).blocked]
