"""Vendors' sheets as files, in six layouts that the reader was not written with: read, judged, suspected.

Mistakes are planted by plain arithmetic (``vendor_slips``), never by the core that looks for them. The large population
is in the benchmark (``tests/benchmarks/run.py --only audit``).
"""

from __future__ import annotations

import random
from pathlib import Path

import pytest

from lowpoint.audit.inputs import inputs_of
from lowpoint.audit.mistakes import catalogue
from lowpoint.audit.reading import read_sheet
from vendor_layouts import LAYOUTS
from vendor_population import (
    Result,
    audited,
    drawn_pairs,
    label_table,
    plain,
    population,
    result,
    same_print,
    suspect_table,
    twins,
)
from vendor_sheets import Sheet, made
from vendor_slips import SLIPS, able, printed


@pytest.fixture(scope="module")
def correct() -> list[Result]:
    return list(population(7, 2, [()]))


@pytest.fixture(scope="module")
def singles() -> list[Result]:
    """Every mistake once, the layouts in turn."""
    return list(population(7, 1, [(name,) for name in SLIPS], rotating=True))


def sheet_of(layout: str, slips: tuple[str, ...] = (), seed: int = 1) -> Sheet:
    rng = random.Random(f"{layout} {seed}")
    return next(sheet for _ in range(20) if (sheet := made(rng, layout, slips)) is not None)


def test_quantities_are_read_in_their_cells(correct: list[Result], singles: list[Result]) -> None:
    """Aim of the project: 98 % over layouts that were not used while writing the reader."""
    results = [*correct, *singles]
    asked = sum(len(one.sheet.places) for one in results)
    assert asked > 2500
    assert {one.sheet.layout for one in results} == set(LAYOUTS)
    assert sum(one.right for one in results) >= 0.98 * asked, label_table(results)


def test_correct_sheets_are_left_alone(correct: list[Result]) -> None:
    assert len(correct) == 2 * len(LAYOUTS)
    assert [one.false for one in correct] == [()] * len(correct)


def test_single_mistakes_are_named_first(singles: list[Result]) -> None:
    """Aim of the project: 95 % of those that numbers can tell; which they cannot, plain arithmetic proves."""
    wrong = [one for one in singles if one.trial.wrong]
    assert [one.sheet.slips for one in singles if plain(one.sheet) and not one.trial.wrong] == []
    told = [one for one in wrong if one.trial.first or not one.proved]
    assert len(wrong) > 35
    assert len(told) > 0.85 * len(wrong)
    assert sum(one.trial.first for one in told) >= 0.95 * len(told), suspect_table(singles)
    assert sum(one.trial.in_three for one in wrong) >= 0.95 * len(wrong), suspect_table(singles)


def test_pairs_of_mistakes() -> None:
    results = [one for one in population(7, 1, drawn_pairs(7, 24), rotating=True) if one.trial.wrong]
    told = [one for one in results if one.trial.first or not one.proved]
    assert len(results) > 18
    assert sum(one.trial.first for one in told) >= 0.8 * len(told), suspect_table(results)


def test_what_plain_arithmetic_cannot_tell_apart(correct: list[Result]) -> None:
    """999.1 kg/m3 is water at 15 deg C and relative density 1; cold water hardly boils, at 15 as at 25 deg C."""
    found = twins([one.sheet for one in correct])
    assert found[("relative_density_1", "density_at_15_c")] == 1.0
    assert found[("pv_at_15_c", "pv_at_25_c")] > 0.8
    assert ("gauge_as_absolute_both", "atmosphere_twice_both") not in found
    assert ("cv_printed_as_kv", "kv_printed_as_cv") not in found


def test_same_print_tells_what_differs() -> None:
    sheet = sheet_of("ledger", ("gauge_as_absolute_both",))
    assert not same_print(sheet, "atmosphere_twice_both")
    assert same_print(sheet, "gauge_as_absolute_both")
    assert not same_print(sheet, "no such mistake")


@pytest.mark.parametrize("layout", LAYOUTS)
def test_any_mistake_goes_into_any_layout(layout: str) -> None:
    """Planted numbers stand on the sheet: what is read back is what the vendor's sums gave."""
    for name in ("gauge_as_absolute_p2", "kv_printed_as_cv", "other_characteristic"):
        sheet = sheet_of(layout, (name,))
        assert able(sheet.item, (name,))
        wrong, right = printed(sheet.item, (name,)), printed(sheet.item)
        assert wrong is not None
        assert right is not None
        assert [line.claims for line in wrong] != [line.claims for line in right]


def test_the_slips_are_named_as_the_audit_names_them(tmp_path: Path) -> None:
    """A mistake of another name could never be found; every name must occur in the catalogue of some sheet."""
    known: set[str] = set()
    for seed, slips in enumerate([(), ("lb_ft3_as_kg_m3",), ("kgfcm2_as_bar",), ("stated_drop",), ("bar_as_psi",),
                                  ("atmosphere_of_sea_level",), ("flow_of_normal",)]):  # fmt: skip
        for layout in ("ledger", "semicolons"):
            sheet = sheet_of(layout, slips, seed)
            audit = audited(sheet, tmp_path)
            (reading,) = audit.document.sheets
            cases = dict(zip(reading.cases, sheet.item.names, strict=True))
            for mistake in catalogue(inputs_of(reading)):
                head, of, case = mistake.key.partition("_of_")
                known.add(f"{head}{of}{cases.get(case, case)}")
    assert set(SLIPS) - known == set()


@pytest.mark.parametrize("layout", LAYOUTS)
def test_sheets_are_the_same_bytes_on_every_run(layout: str) -> None:
    assert sheet_of(layout).data == sheet_of(layout).data


def test_a_result_counts_what_is_missing(tmp_path: Path) -> None:
    """The measure itself: a place that nothing stands in is a miss."""
    sheet = sheet_of("twin")
    broken = Sheet(sheet.layout, sheet.kind, sheet.slips, sheet.item, sheet.data,
                   {**sheet.places, ("noise", ""): "Specification!Z99"}, sheet.wording)  # fmt: skip
    sound, counted = (result(one, audited(one, tmp_path)) for one in (sheet, broken))
    assert set(counted.missed) - set(sound.missed) == {"noise"}
    assert counted.right == sound.right
    assert read_sheet(tmp_path / "sheet.xlsx").sheets
