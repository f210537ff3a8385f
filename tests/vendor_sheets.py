"""Vendors' sheets with any mistake, or pair of mistakes, in any layout: the bytes, and where everything stands."""

from __future__ import annotations

import random
from collections.abc import Sequence
from dataclasses import dataclass, replace

from audit_arithmetic import Case
from audit_memory import drawn
from vendor_layouts import LAYOUTS
from vendor_rows import Wording, lines_of
from vendor_slips import CASES, Item, able, printed
from vendor_words import LABELS

__all__ = ["NEEDS", "Sheet", "drawn_item", "made"]

NEEDS = {"cold_index_at_choking": ("sigma_choked",), "stated_drop": ("dp",)}
"""What must be printed for a mistake to show."""
SITES = (1.013, 1.013, 1.013, 1.001, 0.902, 0.845)
"""bar, of sheets with gauge pressures, which print it; on others it is the usual one, printed or not."""
STANDARD = 1.01325


@dataclass(frozen=True)
class Sheet:
    """A vendor's sheet as a file."""

    layout: str
    kind: str
    slips: tuple[str, ...]
    item: Item
    data: bytes
    places: dict[tuple[str, str | None], str]
    """The cell of every quantity in every case."""
    wording: Wording


def drawn_item(rng: random.Random, layout: str, slips: Sequence[str] = ()) -> Item:
    """A valve that the layout has room for, and on whose sheet these mistakes can be made (if any can)."""
    us = rng.random() < 0.3
    unit = "psi" if us else rng.choice(("bar", "bar", "bar", "kPa", "MPa", "kgf/cm2"))
    for name in slips:
        before = name.partition("_as_")[0]
        unit = {"kgfcm2": "kgf/cm2", "bar": "bar", "psi": "psi"}.get(before, unit)
        us = us or name == "lb_ft3_as_kg_m3"
    us = us if unit in ("psi", "bar") and not (unit == "bar" and us and "lb_ft3_as_kg_m3" not in slips) else False
    cases = _rising(rng)
    gauge = rng.random() < 0.5
    site = rng.choice(SITES) if gauge else STANDARD
    if "atmosphere_of_sea_level" in slips:
        gauge, site = True, rng.choice(SITES[-2:])
    single = LAYOUTS[layout].one or rng.random() < 0.25
    if any(name.endswith(CASES) for name in slips):
        single = LAYOUTS[layout].one
    kept, names = (cases[1:2], ("",)) if single else (cases, CASES)
    tag = f"{rng.choice(('FCV', 'LV', 'PCV', 'TV'))}-{rng.randrange(100, 999)}"
    return Item(tuple(kept), names, tag, rng.choice(("feed water", "brine let-down", "return line", "desuperheater")),
                us=us, gauge=gauge, atmosphere=site, pressure_unit=unit)  # fmt: skip


def _rising(rng: random.Random) -> list[Case]:
    """Three cases whose flows rise, as their names say."""
    while True:
        cases = drawn(rng)
        if cases[0].flow < cases[1].flow < cases[2].flow:
            return cases


def made(rng: random.Random, layout: str, slips: Sequence[str] = ()) -> Sheet | None:
    """A sheet in a layout with these mistakes; None where they cannot be made on what was drawn."""
    item = drawn_item(rng, layout, slips)
    if not able(item, slips):
        return None
    lines = printed(item, slips)
    if lines is None:
        return None
    style = LAYOUTS[layout]
    comma = style.comma and rng.random() < 0.7
    wording = Wording.drawn(rng, item, comma=comma, more=[m for s in slips for m in NEEDS.get(s, ())])
    if any(name.startswith("index_") for name in slips):  # without a stated form any form would be right
        wording = replace(wording, labels={**wording.labels, "sigma": LABELS["sigma"][0]})
    grid = style.draw(lines_of(item, lines, wording), item.names, wording, rng, f"Control valve {item.tag}: data sheet")
    return Sheet(
        layout, style.kind, tuple(slips), item, style.file(grid, looks=False), grid.addresses(style.kind), wording
    )
