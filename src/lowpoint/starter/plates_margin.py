"""The table of equal margin: what :mod:`lowpoint.design` gives for the same line, as plain values that say so."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import lowpoint
from lowpoint import cells
from lowpoint.design import (
    Cases,
    Construction,
    Criteria,
    Line,
    Liquid,
    PlateSet,
    Rating,
    SetDesign,
    design_plate,
    design_set,
    rate,
)
from lowpoint.starter.columns import Column
from lowpoint.starter.plates_columns import CASES, GIVEN
from lowpoint.starter.plates_data import KEEP, Duty, Flow
from lowpoint.starter.plates_page import Page

__all__ = ["COLUMNS", "Designed", "designed", "write"]


def _both(key: str, heading: str, dimension: str, fmt: str) -> tuple[Column, Column]:
    design, other = (Column(key + tail, "", f"{heading},\n{case}", "", dimension, fmt, 11.0)
                     for tail, case in (("", "design"), ("_other", "other")))  # fmt: skip
    return design, other


_JUDGED = (
    _both("after", "After", "pressure", "pressure"), _both("sigma", "Index", "", "index"),
    _both("constant", f"{KEEP.capitalize()} limit", "", "index"), _both("margin", "Margin", "", "percent"),
    _both("state", "State", "", "verdict"),
)  # fmt: skip
COLUMNS: tuple[Column, ...] = (
    Column("plate", "", "Plate", fmt="whole"),
    Column("bore", "", "Bore, drilled", dimension="size", fmt="working", width=11.0),
    Column("thickness", "", "Thickness as made", dimension="size", fmt="one", width=11.0),
    Column("k", "", "Loss coefficient K", fmt="flow", width=11.0),
    Column("fl", "", "FL", fmt="index", width=11.0),
    *(pair[0] for pair in _JUDGED),
    *(pair[1] for pair in _JUDGED),
)


@dataclass(frozen=True, eq=False)
class Designed:
    """A set of equal margin for the design case, and both cases rated with it, the plate that flashes included."""

    found: SetDesign
    rating: Rating

    @property
    def flashes(self) -> bool:
        """Is there one more plate than those of equal margin?"""
        return self.rating.plates.count > self.found.count


def _liquid(duty: Duty, *flows: Flow) -> Liquid:
    """The liquid in these cases, as the cells of the sheet compute it."""
    salty = cells.OMITTED if duty.salinity is None else duty.salinity
    return Liquid.in_units(
        density=[cells.call("LP_DENSITY", [duty.fluid, flow.t, flow.p1, salty]) for flow in flows],
        pv=[cells.call("LP_VAPOUR_PRESSURE", [duty.fluid, flow.t, salty]) for flow in flows],
        pc=cells.call("LP_CRITICAL_PRESSURE", [duty.fluid]),
    )


def designed(duty: Duty) -> Designed:
    """The design of a duty: fewest plates that keep the margin in the design case; then both cases, with drills."""
    one, both = duty.design, (duty.design, duty.other)
    cases = Cases.in_units(flow=[f.flow for f in both], p1=[f.p1 for f in both], p2=[f.end for f in both], held="both",
                           names=tuple(f.name for f in both), liquid=_liquid(duty, *both))  # fmt: skip
    line, criteria = Line.in_units(pipe=duty.pipe), Criteria(kind=KEEP, margin=duty.margin)
    load = max(flow.p1 - flow.end for flow in both)
    made = Construction.in_units(stress=duty.stress, support_diameter=duty.support, bevelled=True, edge=duty.edge,
                                 differential=load)  # fmt: skip
    liquid = _liquid(duty, one)
    in_liquid = Cases.in_units(flow=one.flow, p1=one.p1, p2=one.p2, held="both", liquid=liquid)
    found = design_set(in_liquid, line, made, criteria)
    plates = found.plates.plates
    if one.vessel is not None:
        last = Cases.in_units(flow=one.flow, p1=one.p2, p2=one.vessel, held="both", liquid=liquid)
        plates += (design_plate(last, line, made, criteria).plate,)
    return Designed(found, rate(PlateSet(line, plates), cases, criteria))


def write(page: Page, row: int) -> int:
    """Add the table; gives the row after it."""
    done = designed(page.duty)
    row = page.band(row, f"Plates of equal margin, from lowpoint.design, version {lowpoint.__version__}: plain values")
    wanted = f"The fewest plates that keep a margin of {page.duty.margin:.0%} to the {KEEP} limit in the design case, "
    wanted += f"split by equal margin (before drilling {done.found.sized.margin:.1%} each), bores rounded to drills; "
    wanted += "then both cases marched through them, with nothing else in the line."
    if done.flashes:
        wanted += " The last plate is the one that flashes at the vessel: it has no margin to share."
    row = page.text(row, wanted)
    page.put(row, 1, "Do these values still hold?")
    page.verdict(row, f'=IF({_same(page)},"yes: computed for the inputs above","no: the inputs have changed")', "no")
    row += 1
    for case, flow in zip(("design case", "other case"), done.rating.flow.tolist(), strict=True):
        page.put(row, 1, f"Flow that the set passes, {case}, m³/h")
        page.put(row, 2, _plain(3600.0 * flow), "working")
        row += 1
    first = row = page.headings(row, COLUMNS)
    for plate in range(done.rating.plates.count):
        for place, (column, value) in enumerate(zip(COLUMNS, _line(done.rating, plate), strict=True), start=1):
            page.put(row, place, value, column.fmt)
        row += 1
    page.mark(COLUMNS, first, row - 1)
    return row + 1


def _plain(value: float) -> float:
    """Six digits: more would differ from machine to machine."""
    return float(f"{value:.6g}")


def _line(rating: Rating, plate: int) -> list[Any]:
    built, found = rating.plates.plates[plate], [rating.at(plate, case) for case in (0, 1)]
    line: list[Any] = [plate + 1, 1e3 * built.bore, 1e3 * (built.thickness or 0.0), found[0].k, found[0].fl]
    for state in found:
        line += [1e-5 * state.p_out, state.sigma, getattr(state, KEEP), state.margin, state.regime]
    return [_plain(value) if isinstance(value, float) else value for value in line]


def _same(page: Page) -> str:
    """Are the typed cells still those that the design was made for?"""
    duty, tests = page.duty, []
    for column in CASES:
        for flow, tail in ((duty.design, ""), (duty.other, "_other")):
            value = getattr(flow, column.key, None)
            if value is not None:
                tests.append(f"{page.places[column.key + tail]}={value!r}")
    for column in GIVEN:
        value = KEEP if column.key == "keep" else getattr(duty, column.key, None)
        if column.key != "target" and value is not None:
            tests.append(f'{page.places[column.key]}="{value}"' if isinstance(value, str)
                         else f"{page.places[column.key]}={value!r}")  # fmt: skip
    return f"AND({','.join(tests)})"
