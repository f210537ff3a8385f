"""Several items on one sheet, and several values of one quantity: none is judged by the numbers of another.

Indices by hand: (8 - 1.987)/1.5 = 4.009, (9 - 1.987)/4 = 1.753.
"""

from __future__ import annotations

from pathlib import Path

import openpyxl
import pytest

from lowpoint.audit.auditing import audit_document
from lowpoint.audit.layout import layout_text
from lowpoint.audit.model import Audit
from lowpoint.audit.reading import read_sheet
from lowpoint.errors import LowpointError

LABELS = ("Tag", "P1 bar(a)", "P2 bar(a)", "Pv bar(a)", "Sigma (p1-pv)/(p1-p2)")
ITEMS = (("21-FV-1", 8, 6.5, 1.987, 4.009), ("21-FV-2", 9, 5, 1.987, 1.753))


def blocks(folder: Path, places: tuple[tuple[int, int], ...]) -> Path:
    """Two blocks of labels with values, each from its own corner."""
    book = openpyxl.Workbook()
    sheet = book.active
    sheet["A1"] = "Kestrel Bay: two valves"
    for (row, column), values in zip(places, ITEMS, strict=True):
        for step, (label, value) in enumerate(zip(LABELS, values, strict=True)):
            sheet.cell(row + step, column, label)
            sheet.cell(row + step, column + 1, value)
    path = folder / "two.xlsx"
    book.save(path)
    return path


def text(folder: Path, lines: str) -> Path:
    path = folder / "sheet.csv"
    path.write_text(lines, encoding="utf-8")
    return path


def audited(path: Path) -> Audit:
    return audit_document(read_sheet(path))


@pytest.mark.parametrize("places", [((3, 1), (3, 5)), ((3, 1), (10, 1))])
def test_items_side_by_side_and_one_below_the_other(tmp_path: Path, places: tuple[tuple[int, int], ...]) -> None:
    audit = audited(blocks(tmp_path, places))
    assert [sheet.tag for sheet in audit.document.sheets] == ["21-FV-1", "21-FV-2"]
    assert [[c.verdict for c in claims if c.quantity == "sigma"] for claims in audit.claims] == [["agrees"]] * 2
    assert any("2 items stand there (21-FV-1, 21-FV-2)" in note.text for note in audit.document.notes)
    assert audit.exit_code == 0


def test_items_in_columns_behind_common_labels(tmp_path: Path) -> None:
    rows = zip(LABELS, *ITEMS, strict=True)
    audit = audited(text(tmp_path, "\n".join(";".join(map(str, row)) for row in rows)))
    assert [sheet.tag for sheet in audit.document.sheets] == ["21-FV-1", "21-FV-2"]
    assert [[c.computed for c in claims if c.quantity == "sigma"] for claims in audit.claims] == [
        [pytest.approx(4.009, abs=1e-3)], [pytest.approx(1.753, abs=1e-3)],
    ]  # fmt: skip


def test_a_second_tag_of_one_item_parts_nothing(tmp_path: Path) -> None:
    path = text(tmp_path, "Tag;21-FV-1\nP1 bar(a);8\nP2 bar(a);6.5\nPv bar(a);1.987\nTag;21-FY-9\nService;positioner\n")
    (sheet,) = read_sheet(path).sheets
    assert {value.quantity for value in sheet.values} >= {"p1", "p2", "pv"}
    assert [finding.kind for finding in sheet.findings] == ["several"]


def test_no_layout_is_made_of_two_items(tmp_path: Path) -> None:
    document = read_sheet(blocks(tmp_path, ((3, 1), (3, 5))))
    with pytest.raises(LowpointError, match="needs a sheet of one item"):
        layout_text(document)


def test_a_nominal_size_beside_the_bore_is_no_contradiction(tmp_path: Path) -> None:
    """DN 100 of schedule 40 has a bore of 102.3 mm (ASME B36.10M, from memory), which is what is computed with."""
    path = text(tmp_path, "Tag;1-FV-1\nLine size;DN 100\nPipe inside diameter mm;102.3\nP1 bar(a);8\nP2 bar(a);6.5\n")
    audit = audited(path)
    assert not audit.claims[0]
    bore = audit.document.sheets[0].of("pipe_in", None)
    assert bore is not None
    assert bore.raw == "102.3"


def test_a_nominal_size_that_cannot_be_is_one(tmp_path: Path) -> None:
    path = text(tmp_path, "Tag;1-FV-1\nLine size;DN 100\nPipe inside diameter mm;154.1\nP1 bar(a);8\nP2 bar(a);6.5\n")
    (claim,) = audited(path).claims[0]
    assert claim.verdict == "contradicts"
    assert claim.text == "DN 100 in row 2, column 2 and 154.1 mm in row 3, column 2 are not the same pipe_in"


def test_coefficients_of_named_cases(tmp_path: Path) -> None:
    """``Max. Cv`` beside ``Normal Cv`` is what the largest flow needs; alone it is the rated one."""
    lines = "Tag;1-FV-1\nMax Cv;110\nMin Cv;20\nNormal Cv;60\nP1 bar(a);8\nP2 bar(a);6.5\n"
    (sheet,) = read_sheet(text(tmp_path, lines)).sheets
    found = {(v.quantity, v.case): v.number for v in sheet.values if v.unit == "Cv"}
    assert found == {("coefficient", "Maximum"): 110, ("coefficient", "Minimum"): 20, ("coefficient", "Normal"): 60}
    (sheet,) = read_sheet(text(tmp_path, lines.replace("Normal Cv;60\n", ""))).sheets
    assert [(v.quantity, v.number) for v in sheet.values if v.unit == "Cv"] == [("rated", 110)]
    assert "'Min Cv' may be" in sheet.findings[0].text


WATER = """Tag;1-FV-1
Fluid;Water
Valve size;mm;80
{pipe}
Flow;m3/h;40
P1;bar(a);8.00
P2;bar(a);6.50
Density;kg/m3;943.4
Vapour pressure;bar(a);1.987
FL;;0.9
Required Kv;;31.75
"""


@pytest.mark.parametrize(
    ("pipe", "basis"),
    [
        ("Pipe inside diameter;mm;102.3", "every input stands on the sheet"),
        ("Inlet pipe inside diameter;mm;102.3", "pipe_out assumed"),
        ("Line size;;DN 100", "pipe_in assumed; pipe_out assumed"),
    ],
)  # fmt: skip
def test_what_is_known_of_the_pipes(tmp_path: Path, pipe: str, basis: str) -> None:
    """One bore of "the pipe" is that of both sides; one of the inlet is not; a nominal size is no bore.

    Kv by hand (IEC 60534-2-1): 40 (0.9443/1.5)^0.5 = 31.74 over FP 0.998.
    """
    found = audited(text(tmp_path, WATER.format(pipe=pipe))).claims[0]
    (claim,) = [c for c in found if c.quantity == "coefficient"]
    assert claim.basis.endswith(basis)
    assert claim.computed == pytest.approx(31.8, abs=0.03)
