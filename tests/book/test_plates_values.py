"""The numbers in the book of plates: identities, the design core beside them, and a second way of working."""

from __future__ import annotations

import csv
import math
from functools import cache
from itertools import pairwise
from typing import Any

import pytest
from iapws.iapws97 import _TSat_P

import lowpoint
from book.plates_by_hand import Line, constant_limit, staged, thickness, vapour
from book.plates_sample import DUTY_SHEETS, NAME, duty_of, plates
from book.starters import WORKBOOKS
from lowpoint import cells
from lowpoint.cells import OMITTED
from lowpoint.design import Cases, Liquid, Plate, PlateSet, rate
from lowpoint.design import Line as Pipe
from lowpoint.starter.plates_data import DUTIES, Duty
from lowpoint.starter.plates_margin import designed

each = pytest.mark.parametrize("duty", DUTIES, ids=lambda duty: duty.tag)


# --- identities --------------------------------------------------------------------------------------------------
@each
def test_equal_index_identity(duty: Duty) -> None:
    """Plates of one ratio of heads have one index, 1/(1 - r) with r^n = (p2-pv)/(p1-pv); one plate fewer is too few."""
    sheet = duty.sheet
    pv, count = plates().input(sheet, "Vapour pressure pv"), plates().input(sheet, "Plates in liquid, least number")
    assert duty.design.p2 is not None
    share = (duty.design.p2 - pv) / (duty.design.p1 - pv)
    index = plates().column(sheet, "design", "Index sigma")
    assert index == pytest.approx([1.0 / (1.0 - share ** (1.0 / count))] * count, rel=1e-9)
    assert min(index) >= duty.target
    assert 1.0 / (1.0 - share ** (1.0 / (count - 1))) < duty.target


@each
@pytest.mark.parametrize("table", ["design", "other"])
def test_margins_are_index_over_the_limit_to_keep(duty: Duty, table: str) -> None:
    names = ("Index sigma", "Constant limit", "Margin to the limit to keep")
    index, limit, margin = (plates().column(duty.sheet, table, name) for name in names)
    assert plates().input(duty.sheet, "Limit to keep") == "constant"
    assert margin == pytest.approx([s / c - 1.0 for s, c in zip(index, limit, strict=True)], abs=1e-12)


@each
def test_bores_take_their_drops_and_net_drops_are_below_tap_drops(duty: Duty) -> None:
    names = ("Net drop", "Net drop of that bore", "Drop between flange taps")
    drop, net, tap = (plates().column(duty.sheet, "design", name) for name in names)
    assert net == pytest.approx(drop, rel=1e-9)
    assert all(a < b for a, b in zip(net, tap, strict=True))
    assert sum(drop) == pytest.approx(duty.design.p1 - (duty.design.p2 or 0.0), rel=1e-12)


@each
def test_the_march_closes_and_every_plate_carries_the_flow(duty: Duty) -> None:
    """The pressure before the first plate is p1; each plate by itself, between its own pressures, passes the flow."""
    sheet = duty.sheet
    passed = plates().input(sheet, "Flow that the set passes")
    assert plates().input(sheet, "Check: pressure before plate 1, less p1") == pytest.approx(0.0, abs=1e-9)
    assert plates().column(sheet, "other", "Flow through the plate alone") == pytest.approx(
        [passed] * len(duty.bores), rel=1e-9
    )


@each
def test_the_march_in_cells_is_that_of_the_design_core(duty: Duty) -> None:
    """The same set through lowpoint.design: the flow, the pressures, the limits and the states."""
    flow = duty.other
    salty = OMITTED if duty.salinity is None else duty.salinity
    liquid = Liquid.in_units(
        density=cells.call("LP_DENSITY", [duty.fluid, flow.t, flow.p1, salty]),
        pv=cells.call("LP_VAPOUR_PRESSURE", [duty.fluid, flow.t, salty]),
        pc=cells.call("LP_CRITICAL_PRESSURE", [duty.fluid]),
    )
    case = Cases.in_units(flow=flow.flow, p1=flow.p1, p2=flow.end, liquid=liquid, held="both")
    built = tuple(Plate.in_units(bore=bore, bore_length=duty.edge) for bore in duty.bores)
    rating = rate(PlateSet(Pipe.in_units(pipe=duty.pipe), built), case)
    assert plates().input(duty.sheet, "Flow that the set passes") == pytest.approx(3600.0 * rating.flow[0], rel=1e-9)

    def column(heading: str) -> list[Any]:
        return plates().column(duty.sheet, "other", heading)

    assert column("Pressure after the plate") == pytest.approx((1e-5 * rating.pressures[1:, 0]).tolist(), rel=1e-9)
    for heading, values in (
        ("Index sigma", rating.sigma), ("Incipient limit", rating.incipient), ("Constant limit", rating.constant),
        ("Choked limit", rating.choked_limit), ("Drop between flange taps", 1e-5 * rating.tap_drop),
    ):  # fmt: skip
        assert column(heading) == pytest.approx(values[:, 0].tolist(), rel=1e-8), heading
    assert column("State of the flow") == rating.regime[:, 0].tolist()


@each
def test_equal_margin_beside_it_is_better_and_says_where_it_is_from(duty: Duty) -> None:
    done, sheet = designed(duty), duty.sheet
    words = [str(cell.value) for cell in plates().values[sheet]["A"]]
    assert f"Plates of equal margin, from lowpoint.design, version {lowpoint.__version__}: plain values" in words
    count = done.found.count
    columns, rows = plates().table(sheet, "margin")
    for row in rows.values():
        for column in columns.values():
            assert plates().formulas[sheet].cell(row, column).data_type != "f"
    margins = plates().column(sheet, "margin", "Margin,\ndesign")
    assert min(margins[:count]) >= duty.margin - 1e-4
    assert margins == pytest.approx(done.rating.margin[:, 0].tolist(), rel=1e-5)
    # With as many plates, the least margin before rounding to drills is not below that of equal index.
    if count == plates().input(sheet, "Plates in liquid, least number"):
        assert done.found.sized.margin > min(plates().column(sheet, "design", "Margin to the limit to keep"))
    assert plates().input(sheet, "Do these values still hold?") == "yes: computed for the inputs above"


def test_what_the_cases_are_there_to_show() -> None:
    """Equal index crosses a limit where equal margin does not; a plate chokes; a plate flashes and says so."""
    pump, _, blowdown = DUTY_SHEETS
    assert plates().column(pump, "design", "Margin to the limit to keep")[-1] < 0.0
    assert plates().column(pump, "other", "State of the flow")[-1] == "choked"
    columns, rows = plates().table(blowdown, "design")
    row = rows["plate at the flash vessel"]
    assert plates().values[blowdown].cell(row, columns["State of the flow"]).value == "flashing"
    assert plates().column(blowdown, "other", "State of the flow")[-1] == "flashing"
    words = " ".join(str(cell.value) for cell in plates().values[blowdown]["A"])
    assert "The last plate flashes" in words
    assert "Practice: the flashing plate at the nozzle of the vessel" in words
    said = " ".join(str(cell.value) for cell in plates().values[blowdown]["B"])
    assert "the liquid flashes after the plate" in said


# --- by another route ---------------------------------------------------------------------------------------------
@cache
def line_of(duty: Duty, case: str) -> Line:
    flow = duty.design if case == "design" else duty.other
    return Line.of(flow.t, flow.p1, duty.salinity, duty.pipe, duty.edge)


@each
def test_the_design_worked_out_a_second_way(duty: Duty) -> None:
    """From typed inputs: IAPWS by the library iapws, C of ISO 5167-2 by the library fluids, bores by bisection."""
    line, flow = line_of(duty, "design"), duty.design
    assert flow.p2 is not None
    count, pressures = staged(flow.p1, flow.p2, line.pv, duty.target)
    # Two equations of state of water (0.02 %), two of brine (0.17 % in density).
    close = {"rel": 2e-3 if duty.salinity else 4e-4}
    assert plates().column(duty.sheet, "design", "Pressure after the plate") == pytest.approx(pressures[1:], **close)
    bores = [line.bore(flow.flow, *pair) for pair in pairwise(pressures)]
    assert len(bores) == count
    load = max(f.p1 - f.end for f in (duty.design, duty.other))
    for heading, answer in (
        ("Bore", bores),
        ("Loss coefficient K", [line.loss(bore) for bore in bores]),
        ("FL", [line.fl(bore) for bore in bores]),
        ("Drop between flange taps", [line.tap_drop(flow.flow, bore) for bore in bores]),
        ("Constant limit", [constant_limit(line, bore) for bore in bores]),
        ("Thickness needed", [thickness(load, duty.support, bore, duty.stress) for bore in bores]),
    ):
        assert plates().column(duty.sheet, "design", heading) == pytest.approx(answer, **close), heading


@each
def test_the_march_worked_out_a_second_way(duty: Duty) -> None:
    """The flow of the drilled set by bisection on the march backwards, choking in force."""
    line, flow = line_of(duty, "other"), duty.other
    passed = line.passed(duty.bores, flow.p1, flow.end)
    close = {"rel": 2e-3 if duty.salinity else 4e-4}
    assert plates().input(duty.sheet, "Flow that the set passes") == pytest.approx(passed, **close)
    before = plates().column(duty.sheet, "other", "Pressure before the plate")
    assert before == pytest.approx(line.before(passed, duty.bores, flow.end)[:-1], **close)


def expected_rows() -> list[dict[str, str]]:
    with (WORKBOOKS / "expected.csv").open(encoding="utf-8", newline="") as source:
        return [line for line in csv.DictReader(source) if line["book"] == NAME]


def test_there_are_expected_values_of_each_duty() -> None:
    assert len(expected_rows()) >= 8
    assert {line["tag"] for line in expected_rows()} == {duty.tag for duty in DUTIES}


rows_of_csv = pytest.mark.parametrize(
    "line", expected_rows(), ids=lambda e: f"{e['tag']} {e['case']} {e['heading']}"
)  # fmt: skip


@rows_of_csv
def test_expected_values(line: dict[str, str]) -> None:
    duty, (case, _, plate) = duty_of(line["tag"]), line["case"].partition(", ")
    if plate:
        columns, rows = plates().table(duty.sheet, case)
        name: Any = plate if plate in rows else int(plate.removeprefix("plate "))
        value = plates().values[duty.sheet].cell(rows[name], columns[line["heading"]]).value
    else:
        value = plates().input(duty.sheet, line["heading"], case)
    assert value == pytest.approx(float(line["expected"]), rel=float(line["relative_tolerance"]))
    assert line["source"]
    assert line["working"]


@rows_of_csv
def test_expected_values_hold_by_the_second_route(line: dict[str, str]) -> None:
    """Each number of the file, worked out again without the package: to half a unit of its last digit, or so."""
    duty, (case, _, plate) = duty_of(line["tag"]), line["case"].partition(", ")
    second, flow = line_of(duty, case), duty.design if case == "design" else duty.other
    count, pressures = staged(duty.design.p1, duty.design.p2 or 0.0, second.pv, duty.target)
    if plate.startswith("plate at"):
        p1, p2 = duty.design.p2 or 0.0, duty.design.end
    else:
        number = int(plate.removeprefix("plate ") or 1)
        p1, p2 = pressures[number - 1], pressures[number]
    bore = second.bore(flow.flow, p1, p2)
    load = max(f.p1 - f.end for f in (duty.design, duty.other))
    answer = {
        "Vapour pressure pv": lambda: second.pv,
        "Density": lambda: second.rho,
        "Plates in liquid, least number": lambda: count,
        "Pressure after the plate": lambda: p2,
        "Index sigma": lambda: (p1 - second.pv) / (p1 - p2),
        "Bore": lambda: bore,
        "Drop between flange taps": lambda: second.tap_drop(flow.flow, bore),
        "Constant limit": lambda: constant_limit(second, bore),
        "Thickness needed": lambda: thickness(load, duty.support, bore, duty.stress),
        "Flow that the set passes": lambda: second.passed(duty.bores, flow.p1, flow.end),
        "Vapour after the plate, mass share": lambda: vapour(flow.t, p1, duty.design.end)
        if plate else vapour(flow.t, duty.design.p2 or math.nan, duty.design.end),
        "Boiling temperature in the vessel": lambda: _TSat_P(duty.design.end / 10.0) - 273.15,
    }[line["heading"]]()  # fmt: skip
    assert float(line["expected"]) == pytest.approx(answer, rel=2e-5)
