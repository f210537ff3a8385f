"""The sheets of ``workbooks/datasheets``: six invented vendors' sheets for Kestrel Bay, and what is wrong with them.

Right numbers and wrong ones are plain arithmetic (``audit_arithmetic``, ``vendor_plates``), never the package's.
"""

from __future__ import annotations

import csv
import io
import random
from collections.abc import Sequence
from dataclasses import dataclass

from audit_arithmetic import Case, saturation
from vendor_grid import Grid
from vendor_layouts import LAYOUTS
from vendor_plates import Plate, plate_lines
from vendor_rows import Line, Wording, lines_of
from vendor_slips import CASES, Item, printed

__all__ = ["COLUMNS", "SAMPLES", "Sample", "expected_csv", "expected_rows", "written"]

PC = 220.64
COLUMNS = ("file", "quantity", "case", "cell", "printed", "right", "unit", "mistakes", "working")
VALVE_WORKING = "smallest coefficient that passes the flow by bisection, IEC 60534-2-1; pv IAPWS-IF97"
PLATE_WORKING = "bore by bisection on ISO 5167-2 (5.3.2.1, 5.4), corner taps, Re 1e6"


@dataclass(frozen=True)
class Sample:
    """One sheet: a valve with its cases, or a plate."""

    name: str
    layout: str
    item: Item
    slips: tuple[str, ...] = ()
    plate: Plate | None = None
    comma: bool = False
    seed: int = 1

    @property
    def file(self) -> str:
        return f"{self.name}.{LAYOUTS[self.layout].kind}"

    @property
    def title(self) -> str:
        what = "Control valve" if self.plate is None else "Restriction orifice"
        return f"{what} {self.item.tag}, Kestrel Bay: data sheet"

    def wording(self) -> Wording:
        drawn = Wording.drawn(random.Random(f"{self.name} {self.seed}"), self.item, comma=self.comma)
        return Wording(drawn.labels, drawn.units, drawn.case_words, False, self.comma, drawn.more, 1)

    def lines(self, *, right: bool = False) -> list[Line]:
        """As printed, or as a right sheet would have it."""
        slips = () if right else self.slips
        wording = self.wording()
        if self.plate is not None:
            return plate_lines(self.plate, self.item, wording, slips)
        found = printed(self.item, slips)
        if found is None:
            raise ValueError(f"{self.name}: the vendor's sums have no answer")
        return lines_of(self.item, found, wording)

    def grid(self) -> Grid:
        return LAYOUTS[self.layout].draw(self.lines(), self.item.names, self.wording(),
                                         random.Random(f"{self.name} {self.seed}"), self.title)  # fmt: skip


def _case(flow: float, p1: float, p2: float, t: float, density: float, fl: float, valve: Sequence[float]) -> Case:
    d, d1, d2, rated, ratio = valve
    return Case(flow, p1, p2, float(f"{saturation(t):.4f}"), PC, density, fl, d, d1, d2, rated, ratio, t)


DRAIN = (80.0, 102.3, 154.1, 82.0, 50.0)
RETURN = (125.0, 254.5, 254.5, 330.0, 50.0)
FEED = (100.0, 154.1, 154.1, 160.0, 50.0)
STORE = (80.0, 128.2, 128.2, 96.0, 50.0)
SAMPLES = (
    Sample("heater-drain", "ledger", Item(
        (_case(21.5, 11.2, 7.9, 118.0, 944.8, 0.88, DRAIN), _case(34.0, 10.9, 7.6, 121.0, 942.3, 0.86, DRAIN),
         _case(47.5, 10.4, 7.2, 124.0, 939.7, 0.83, DRAIN)),
        CASES, "41-LCV-118", "feed-water heater drain, boiler house"), seed=3),
    Sample("feed-water-us", "twin", Item(
        (_case(96.0, 18.72, 11.84, 104.0, 955.2, 0.84, FEED),), ("",), "41-FCV-204", "feed water to boiler 2",
        us=True, gauge=True, atmosphere=1.011, pressure_unit="psi"), ("gauge_as_absolute_both",), seed=2),
    Sample("district-return", "crossed", Item(
        (_case(205.0, 8.35, 6.1, 62.0, 982.1, 0.88, RETURN), _case(300.0, 8.1, 5.4, 66.0, 979.9, 0.85, RETURN),
         _case(400.0, 7.85, 4.6, 70.0, 977.7, 0.80, RETURN)),
        CASES, "61-TCV-310", "district heating return", gauge=True, atmosphere=0.996, pressure_unit="kPa"),
        ("no_fittings", "index_downstream"), seed=5),
    Sample("pump-minimum-flow", "boxes", Item(
        (), ("",), "33-RO-021", "minimum flow of permeate pump", gauge=True, atmosphere=1.012),
        plate=Plate(62.0, 14.512, 9.212, 102.3, 996.5, 0.0357, PC, 27.0), seed=5),
    Sample("heat-store", "letter", Item(
        (_case(23.0, 9.6, 6.8, 128.0, 936.2, 0.87, STORE), _case(36.5, 9.3, 6.4, 131.0, 933.6, 0.84, STORE),
         _case(52.0, 9.1, 6.1, 134.0, 930.9, 0.80, STORE)),
        CASES, "61-PCV-402", "heat store charging"), ("pv_at_20_c",), seed=4),
    Sample("brine-let-down", "semicolons", Item((), ("",), "33-RO-044", "rinse water let-down"),
           ("gauge_as_absolute_p2",), Plate(118.0, 11.8, 7.3, 154.1, 997.0, 0.0317, PC, 25.0), comma=True, seed=1),
)  # fmt: skip


def written(sample: Sample) -> bytes:
    """The file of a sample; the same bytes on every run."""
    return LAYOUTS[sample.layout].file(sample.grid())


def expected_rows(sample: Sample) -> list[dict[str, str]]:
    """Every number of the sheet that is not what a right one would print, beyond a careful calculation's share."""
    places = sample.grid().addresses(LAYOUTS[sample.layout].kind)
    right = {line.key: line for line in sample.lines(right=True)}
    rows = []
    for line in sample.lines():
        for case, number in line.numbers.items():
            other = right[line.key].numbers[case]
            room = 5.0 if line.key == "travel" else 0.01 * abs(other) + 10.0**-line.decimals
            if abs(number - other) > room:
                texts = (sample.file, line.key, case or "", places[line.key, case], f"{number:.{line.decimals}f}",
                         f"{other:.{line.decimals}f}", line.unit, " + ".join(sample.slips),
                         VALVE_WORKING if sample.plate is None else PLATE_WORKING)  # fmt: skip
                rows.append(dict(zip(COLUMNS, texts, strict=True)))
    return rows


def expected_csv() -> str:
    """The expected findings of all samples."""
    out = io.StringIO()
    writer = csv.DictWriter(out, COLUMNS, lineterminator="\n")
    writer.writeheader()
    for sample in SAMPLES:
        writer.writerows(expected_rows(sample))
    return out.getvalue()
