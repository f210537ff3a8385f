"""What a vendor's sheet says, line by line, before it is laid out: labels, units, numbers of each case."""

from __future__ import annotations

import random
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

from vendor_slips import Item, Printed
from vendor_words import CASE_WORDS, LABELS, Unit, units_of

__all__ = ["GROUPS", "Line", "Wording", "line_of", "lines_of"]

GROUPS = {
    "head": "General",
    "valve": "Sizes and piping",
    "process": "Operating conditions",
    "results": "Calculated results",
}
_KINDS = {
    "atmosphere": "absolute", "valve_size": "size", "pipe_in": "size", "pipe_out": "size", "rated": "coefficient",
    "rangeability": "ratio", "pc": "absolute", "flow": "flow", "p1": "pressure", "p2": "pressure", "dp": "drop",
    "t": "t", "pv": "absolute", "density": "density", "fl": "ratio", "coefficient": "coefficient", "fp": "ratio",
    "ff": "ratio", "flp": "ratio", "dp_choked": "drop", "sigma": "ratio", "sigma_choked": "ratio", "travel": "share",
    "velocity_in": "speed", "velocity_out": "speed", "bore": "size", "bore_length": "size", "plates": "ratio",
}  # fmt: skip
_DECIMALS = {
    "atmosphere": 3, "valve_size": 1, "pipe_in": 1, "pipe_out": 1, "rated": 1, "rangeability": 0, "pc": 2, "flow": 1,
    "p1": 2, "p2": 2, "dp": 2, "t": 1, "pv": 4, "density": 1, "fl": 2, "coefficient": 2, "fp": 3, "ff": 3, "flp": 3,
    "dp_choked": 2, "sigma": 2, "sigma_choked": 2, "travel": 1, "velocity_in": 2, "velocity_out": 2, "bore": 2,
    "bore_length": 1, "plates": 0,
}  # fmt: skip
"""In plain units."""


@dataclass(frozen=True)
class Wording:
    """The ways of one vendor: everything that may differ from sheet to sheet."""

    labels: dict[str, tuple[str, str]]
    """Label and symbol."""
    units: dict[str, Unit]
    case_words: tuple[str, ...] = CASE_WORDS[0]
    shuffled: bool = False
    comma: bool = False
    more: tuple[str, ...] = ()
    """Quantities printed besides the usual ones: ff, flp, sigma_choked, dp, velocity_out."""
    fine: int = 0
    """More decimals of the results."""
    site: bool = True
    seed: int = 0

    @classmethod
    def drawn(cls, rng: random.Random, item: Item, *, comma: bool = False, more: Sequence[str] = ()) -> Wording:
        labels = {key: rng.choice(ways) for key, ways in LABELS.items()}
        pick = rng.randrange(12)
        units = {key: units_of(kind, pick, us=item.us, pressure=item.pressure_unit, gauge=item.gauge)
                 for key, kind in _KINDS.items()}  # fmt: skip
        options = [key for key in ("ff", "dp", "velocity_out", "sigma_choked", "flp") if rng.random() < 0.4]
        return cls(labels, units, rng.choice(CASE_WORDS), rng.random() < 0.6, comma, tuple({*options, *more}),
                   rng.choice((0, 1)), seed=rng.randrange(1 << 30))  # fmt: skip


@dataclass
class Line:
    """One quantity with the numbers of its cases (None: of the item), or a word; without a key nobody's number."""

    key: str
    group: str
    label: str
    symbol: str = ""
    unit: str = ""
    numbers: dict[str | None, float] = field(default_factory=dict)
    decimals: int = 0
    word: str = ""


def lines_of(item: Item, printed: Sequence[Printed], wording: Wording) -> list[Line]:
    """All lines of a sheet, in the order of their groups, shuffled within them where the vendor does so."""
    lines = [*_head(item, wording), *_valve(item, wording), *_process(item, printed, wording),
             *_results(item, printed, wording)]  # fmt: skip
    if wording.shuffled:
        rng = random.Random(wording.seed)
        groups = [[line for line in lines if line.group == group] for group in GROUPS]
        for group in groups:
            rng.shuffle(group)
        lines = [line for group in groups for line in group]
    return lines


def line_of(key: str, group: str, item: Item, wording: Wording, numbers: Mapping[Any, float]) -> Line:
    """A line with its label, symbol and unit, the numbers turned from plain units into the printed one."""
    label, symbol = wording.labels[key]
    c = "Cv" if item.us else "Kv"
    unit = wording.units[key]
    if _KINDS[key] == "coefficient" and "{C}" not in label:
        unit = replace(unit, sign=c)  # else nothing on the sheet would say which
    shown = {case: _shown(key, unit, x) for case, x in numbers.items()}
    fine = wording.fine if group == "results" else 0
    return Line(key, group, label.format(C=c), symbol.format(C=c), unit.sign, shown,
                max(0, _DECIMALS[key] + unit.more + fine))  # fmt: skip


def _shown(key: str, unit: Unit, number: float) -> float:
    return number * unit.per + 32.0 if key == "t" and unit.per == 1.8 else number * unit.per


def _head(item: Item, wording: Wording) -> list[Line]:
    words = {"tag": item.tag, "service": item.service, "fluid": "Water"}
    lines = [Line(key, "head", wording.labels[key][0], word=word) for key, word in words.items()]
    if wording.site and item.gauge:
        lines.append(line_of("atmosphere", "head", item, wording, {None: item.atmosphere}))
    return lines


def _valve(item: Item, wording: Wording) -> list[Line]:
    case = item.cases[0]
    plain = {"valve_size": case.d, "pipe_in": case.d1, "pipe_out": case.d2, "rated": case.rated,
             "rangeability": case.rangeability, "pc": case.pc}  # fmt: skip
    lines = [line_of(key, "valve", item, wording, {None: number}) for key, number in plain.items()]
    words = {"characteristic": "equal percentage", "style": item.style}
    lines += [Line(key, "valve", wording.labels[key][0], word=word) for key, word in words.items() if word]
    return lines


def _process(item: Item, printed: Sequence[Printed], wording: Wording) -> list[Line]:
    zero = item.atmosphere if item.gauge else 0.0
    cases = list(zip(item.names, item.cases, printed, strict=True))
    plain: dict[str, dict[str | None, float]] = {
        "flow": {n: c.flow for n, c, _ in cases}, "p1": {n: c.p1 - zero for n, c, _ in cases},
        "p2": {n: c.p2 - zero for n, c, _ in cases}, "t": {n: c.t for n, c, _ in cases},
        "pv": {n: p.pv for n, _, p in cases}, "density": {n: c.density for n, c, _ in cases},
        "fl": {n: c.fl for n, c, _ in cases},
    }  # fmt: skip
    if "dp" in wording.more:
        plain["dp"] = {n: p.drop for n, _, p in cases}
    return [line_of(key, "process", item, wording, numbers) for key, numbers in plain.items()]


def _results(item: Item, printed: Sequence[Printed], wording: Wording) -> list[Line]:
    named = list(zip(item.names, printed, strict=True))
    plain: dict[str, dict[str | None, float]] = {
        "coefficient": {n: p.claims.kv for n, p in named}, "fp": {n: p.claims.fp for n, p in named},
        "dp_choked": {n: p.claims.dp_choked for n, p in named}, "sigma": {n: p.claims.sigma for n, p in named},
        "travel": {n: p.claims.travel for n, p in named}, "velocity_in": {n: p.claims.velocity for n, p in named},
        "ff": {n: p.ff for n, p in named}, "flp": {n: p.flp for n, p in named},
        "sigma_choked": {n: p.sigma_choked for n, p in named}, "velocity_out": {n: p.velocity_out for n, p in named},
    }  # fmt: skip
    optional = {"ff", "flp", "sigma_choked", "velocity_out"} - set(wording.more)
    return [line_of(key, "results", item, wording, numbers) for key, numbers in plain.items() if key not in optional]
