"""Cautions of a plate or a set: where the method ends, each with the plate and the cases that it holds for."""

from __future__ import annotations

import inspect
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from lowpoint.declare import Caution
from lowpoint.design.checks import told
from lowpoint.design.plates import CLEAR_OF_EACH_OTHER
from lowpoint.physics.plate_cautions import (
    BEYOND_ISO,
    BY_BOTH,
    BY_IDELCHIK,
    BY_ISO,
    LARGEST_DROP,
    REATTACHING,
    SHORT,
    SLOW_TEXT,
    THICK,
    slow,
)

if TYPE_CHECKING:
    from lowpoint.design.rating import Rating

__all__ = ["Note", "notes", "rules"]

ATMOSPHERE = 101325.0
GAS_SHARE = 0.7
"""Share of the pressure at which a liquid took up its gas below which the gas comes out notably (common practice)."""
NOTABLE = 0.01
"""Share of the flow that drill sizes leave uncertain anyway."""
FIT = (0.2, 0.6)
"""Root of the open share for which the published limits were measured."""


@dataclass(frozen=True)
class Note:
    """A caution: ``topic`` is a fixed word for programs, ``plate`` its number (0: the set), ``cases`` their names."""

    topic: str
    text: str
    plate: int = 0
    cases: tuple[str, ...] = ()

    def __str__(self) -> str:
        where = f"plate {self.plate}: " if self.plate else ""
        when = f" [{', '.join(self.cases)}]" if self.cases else ""
        return where + self.text + when


RULES = (BY_ISO, BY_IDELCHIK, BY_BOTH)
OF_PLATES = (
    ("ISO", BY_IDELCHIK), ("ISO", BY_BOTH), ("ISO", BEYOND_ISO), ("reattachment", REATTACHING), ("thick", THICK),
)  # fmt: skip
"""Cautions of the kernels that depend on a plate alone."""


def _of_geometry(rating: Rating, caution: Caution) -> Any:
    """For which plates a caution of the kernels holds."""
    plates = rating.plates
    values = {name: plates.column(name) for name in ("bore", "bore_length", "holes")}
    values["pipe"] = np.full(plates.count, plates.pipe)
    wanted = inspect.signature(caution.when).parameters
    return np.broadcast_to(caution.when(*(values[name] for name in wanted)), (plates.count,))


def rules(rating: Rating) -> tuple[str, ...]:
    """Which rule gave the loss of each plate's thin form, in words."""
    holding = [(rule.text, _of_geometry(rating, rule)) for rule in RULES]
    return tuple(next(text for text, holds in holding if holds[i]) for i in range(rating.plates.count))


def notes(rating: Rating) -> tuple[Note, ...]:
    """Every caution of a rating: each plate's, then the set's."""
    return (*_each(rating), *_whole(rating))


def _each(rating: Rating) -> Iterator[Note]:
    found = [(topic, caution.text, _of_geometry(rating, caution)) for topic, caution in OF_PLATES]
    found += [("plugging", *_plugging(rating)), *(("limits", text, holds) for text, holds in _of_limits(rating))]
    for number in range(rating.plates.count):
        for topic, text, holds in found:
            if holds[number]:
                yield Note(topic, text, number + 1)
        yield from _in_cases(rating, number)


def _plugging(rating: Rating) -> tuple[str, Any]:
    least = rating.criteria.plugging
    text = f"the bore is below {told(least, 'size', rating.cases.system)} and easily plugged"
    return text, rating.plates.column("bore") < least


def _of_limits(rating: Rating) -> list[tuple[str, Any]]:
    """Where the published limits were not measured."""
    bore, length, holes = (rating.plates.column(name) for name in ("bore", "bore_length", "holes"))
    outside = (rating.beta < FIT[0] * (1.0 - 1e-9)) | (rating.beta > FIT[1] * (1.0 + 1e-9))
    return [
        (f"bore over pipe is outside {FIT[0]:g} to {FIT[1]:g}, for which incipient and constant cavitation were "
         "measured; the fit's end rule was continued", outside),
        ("incipient and constant cavitation were measured on thin plates; with a long bore they begin at a higher "
         "index: an estimate", np.nan_to_num(length / bore) > SHORT),
        ("incipient and constant cavitation were measured on plates with one hole", holes > 1.0),
    ]  # fmt: skip


def _in_cases(rating: Rating, plate: int) -> Iterator[Note]:
    """What depends on the flow."""
    cases, system = rating.cases, rating.cases.system
    steep = rating.net_drop[plate] > LARGEST_DROP
    if steep.any():
        most, limit = told(rating.net_drop[plate].max(), "pressure", system), told(LARGEST_DROP, "pressure", system)
        yield Note("ISO", f"the drop, up to {most}, is above the {limit} of ISO 5167-2", plate + 1,
                   _named(rating, steep))  # fmt: skip
    pipe = rating.plates.pipe
    creeping = slow(cases.reynolds(rating.flow, pipe), rating.plates.plates[plate].bore, pipe)
    creeping = np.broadcast_to(creeping, steep.shape)
    if creeping.any():
        yield Note("ISO", SLOW_TEXT, plate + 1, _named(rating, creeping))
    if rating.choked[plate].any():
        yield Note("choked", "the flow is choked: a lower pressure after the plate gives no more flow", plate + 1,
                   _named(rating, rating.choked[plate]))  # fmt: skip
    after = rating.pressures[plate + 1]
    flashing = (after <= cases.liquid.pv) & (plate + 1 < rating.plates.count)
    if flashing.any():
        yield Note("flashing", "the liquid flashes between this plate and the next: the method ends here, and so does "
                   "what is said of the plates after it", plate + 1, _named(rating, flashing))  # fmt: skip
    yield from _gas(rating, plate, after)


def _gas(rating: Rating, plate: int, after: Any) -> Iterator[Note]:
    given = rating.cases.liquid.gas_pressure
    saturated = ATMOSPHERE if given is None else given
    comes_out = (after < GAS_SHARE * saturated) & (after > rating.cases.liquid.pv)
    if comes_out.any():
        assumed = ", if it took that up at 1 atm (no gas_pressure was given)" if given is None else ""
        text = "the pressure after the plate is below 0.7 of that at which the liquid took up its gas: dissolved gas "
        yield Note("gas", f"{text}comes out, most in long runs at that pressure{assumed}", plate + 1,
                   _named(rating, comes_out))  # fmt: skip


def _named(rating: Rating, mask: Any) -> tuple[str, ...]:
    """Names of the cases of a mask; none where it holds in all."""
    if mask.all():
        return ()
    return tuple(name for name, holds in zip(rating.cases.names, mask, strict=True) if holds)


def _whole(rating: Rating) -> Iterator[Note]:
    plates, cases = rating.plates, rating.cases
    apart = plates.line.apart
    if plates.count > 1 and apart < CLEAR_OF_EACH_OTHER * plates.pipe * (1.0 - 1e-9):
        yield Note("spacing", f"the plates are {apart / plates.pipe:.3g} pipe diameters apart, less than 6: they "
                   "interact, and their losses do not add up")  # fmt: skip
    flashing = rating.pressures[-1] <= cases.liquid.pv
    if flashing.any():
        yield Note("flashing", "the liquid flashes after the last plate: no plate cures that; raise the back-pressure "
                   "or cool the liquid", 0, _named(rating, flashing))  # fmt: skip
    if plates.line.free_discharge:
        text = "the last plate discharges freely: nothing is recovered after it, so its drop is that to the vena "
        text += f"contracta and it passes only {rating.fl[-1].min():.3g} of the flow (FL)"
        yield Note("free discharge", text)
    yield from _flow(rating)


def _flow(rating: Rating) -> Iterator[Note]:
    """Where the plates pass notably less than is wanted, or so much that something else must take a part."""
    cases, system = rating.cases, rating.cases.system
    share = rating.passed / cases.flow
    short, over = share < 1.0 - NOTABLE, share > 1.0 + NOTABLE
    if short.any():
        worst = int(np.argmin(share))
        passing, wanted = (told(x[worst], "flow", system) for x in (rating.passed, cases.flow))
        text = f"the plates do not pass the wanted flow, but {passing} of {wanted} in {cases.names[worst]}"
        yield Note("flow", text, 0, _named(rating, short))
    if over.any():
        worst = int(np.argmax(share))
        passing = f"the plates pass {told(rating.passed[worst], 'flow', system)} in {cases.names[worst]}"
        if cases.held == "both":
            text = f"{passing}, where {told(cases.flow[worst], 'flow', system)} is wanted"
        else:
            text = f"something else in the line must take up to {told(rating.left.max(), 'pressure', system)}; "
            text += f"without it {passing}"
        yield Note("flow", text, 0, _named(rating, over))
