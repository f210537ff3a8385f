"""The vendors' sheets of ``workbooks/datasheets``: current, read whole, and found to be wrong where they are planted.

What is expected stands in ``expected.csv``, which plain arithmetic wrote.
"""

from __future__ import annotations

import csv
import sys
import zipfile
from pathlib import Path

import pytest

from lowpoint.audit.auditing import audit_document
from lowpoint.audit.model import Audit
from lowpoint.audit.reading import pages_of, read_sheet
from vendor_layouts import LAYOUTS
from vendor_samples import SAMPLES, Sample

FOLDER = Path(__file__).parents[2] / "workbooks" / "datasheets"
STALE = "stale: run python workbooks/build.py"
EVERY = pytest.mark.parametrize("sample", SAMPLES, ids=lambda sample: sample.name)


@pytest.fixture(scope="module")
def fresh(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with the sheets as ``workbooks/build.py`` writes them now."""
    sys.path.insert(0, str(FOLDER.parent))
    try:
        from build import build_datasheets
    finally:
        sys.path.remove(str(FOLDER.parent))
    folder = tmp_path_factory.mktemp("datasheets")
    build_datasheets(folder)
    return folder


def audit_of(sample: Sample) -> Audit:
    return audit_document(read_sheet(FOLDER / sample.file))


def expected(sample: Sample) -> dict[tuple[str, str], dict[str, str]]:
    with (FOLDER / "expected.csv").open(encoding="utf-8", newline="") as file:
        rows = [row for row in csv.DictReader(file) if row["file"] == sample.file]
    return {(row["quantity"], row["cell"]): row for row in rows}


@EVERY
def test_the_sheets_are_current(sample: Sample, fresh: Path) -> None:
    new, old = fresh / sample.file, FOLDER / sample.file
    if sample.file.endswith(".xlsx"):
        with zipfile.ZipFile(old) as one, zipfile.ZipFile(new) as other:
            assert one.namelist() == other.namelist(), STALE
            for name in one.namelist():
                assert one.read(name) == other.read(name), f"{name} is {STALE}"
    elif sample.file.endswith(".csv"):
        assert old.read_bytes() == new.read_bytes(), STALE
    else:  # other versions of the library write other bytes of the same page
        texts = [
            [(cell.address, cell.text) for page in pages_of(path)[2] for cell in page.cells] for path in (old, new)
        ]
        assert texts[0] == texts[1], STALE


def test_the_expected_findings_are_current(fresh: Path) -> None:
    assert (fresh / "expected.csv").read_text("utf-8") == (FOLDER / "expected.csv").read_text("utf-8"), STALE
    assert {path.name for path in FOLDER.iterdir()} == {path.name for path in fresh.iterdir()}


@EVERY
def test_every_quantity_is_read_in_its_cell(sample: Sample) -> None:
    (sheet,) = read_sheet(FOLDER / sample.file).sheets
    found = {(value.quantity, value.cell) for value in sheet.values}
    places = sample.grid().addresses(LAYOUTS[sample.layout].kind)
    assert {(key, cell) for (key, _), cell in places.items()} <= found
    assert sheet.findings == ()
    assert sheet.tag == sample.item.tag


@EVERY
def test_what_is_planted_is_found_and_nothing_else(sample: Sample) -> None:
    audit = audit_of(sample)
    (claims,) = audit.claims
    wrong = {(claim.quantity, claim.cell): claim for claim in claims if claim.verdict in ("differs", "contradicts")}
    rows = expected(sample)
    assert set(wrong) == set(rows)
    assert audit.exit_code == (1 if rows else 0)
    for place, row in rows.items():
        claim = wrong[place]
        assert claim.claimed == float(row["printed"])
        assert claim.computed == pytest.approx(float(row["right"]), rel=2e-3)
        assert claim.suspects, claim.text
        assert set(claim.suspects[0].mistakes) <= set(row["mistakes"].split(" + "))
    named = {mistake for claim in wrong.values() for mistake in claim.suspects[0].mistakes}
    assert named == set(sample.slips)


def test_some_are_right_some_are_plates_and_there_is_one_pdf() -> None:
    assert sum(not expected(sample) for sample in SAMPLES) == 2
    assert sum(sample.plate is not None for sample in SAMPLES) == 2
    assert sorted(sample.file.rpartition(".")[2] for sample in SAMPLES) == ["csv", "pdf", *["xlsx"] * 4]
    assert len({sample.layout for sample in SAMPLES}) == len(SAMPLES) == 6
