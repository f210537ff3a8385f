"""Claims that are computed one by one: noise, vapour share, viscosity, stages, and limits that stand alone."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import replace
from typing import Any

import numpy as np

from lowpoint.audit.asking import Asked, Asking
from lowpoint.audit.checking import WORDS, number_text
from lowpoint.audit.inputs import Inputs, slope
from lowpoint.audit.model import Claim, Value
from lowpoint.audit.tolerances import NEEDED, PRACTICE, rounding
from lowpoint.kinds import Floats

__all__ = ["check_others"]

LIMITS = ("sigma_incipient", "sigma_constant", "sigma_damage", "sigma_vibration")


def check_others(asking: Asking) -> tuple[Claim, ...]:
    """Verdicts of the claims that no search for suspects follows."""
    computed: dict[str, Callable[[Inputs, Asking], Floats]] = {
        "noise": _noise, "flash_share": _flash, "viscosity": _viscosity,
    }  # fmt: skip
    found: list[Claim] = []
    for quantity, compute in computed.items():
        values = [v for v in asking.inputs.reading.values if v.quantity == quantity and math.isfinite(v.si)]
        if values and _asked_for(asking.inputs, quantity):
            numbers = compute(asking.inputs, asking)
            found += [_judged(asking.inputs, value, at, numbers[at]) for value in values
                      for at in _places(asking.inputs, value, numbers)]  # fmt: skip
    return (*found, *_limits(asking.inputs), *_stages(asking.inputs), *_sets(asking.inputs))


def _asked_for(inputs: Inputs, quantity: str) -> bool:
    """A viscosity is a claim only where the sheet gives what it follows from."""
    if quantity == "viscosity":
        return inputs.fluid is not None and not np.isnan(inputs.columns["t"]).all()
    return True


def _places(inputs: Inputs, value: Value, numbers: Floats) -> Iterator[int]:
    """The case of a value; of one that stands for all cases the nearest."""
    place = inputs.case_of(value)
    if place is None:
        miss = np.abs(numbers - value.si)
        place = 0 if np.isnan(miss).all() else int(np.nanargmin(miss))
    yield place


def _judged(inputs: Inputs, value: Value, at: int, number: float) -> Claim:
    case = inputs.cases[at] if inputs.count > 1 else value.case
    what = WORDS[value.quantity]
    blank = Claim(value.quantity, case, value.cell, value.number, math.nan, value.unit, math.nan, "", "unchecked", "")
    if not math.isfinite(number):
        known = {name for name in NEEDED[value.quantity] if _known(inputs, name, at)}
        missing = tuple(name for name in NEEDED[value.quantity] if name not in known)
        reason = f"{', '.join(missing)} missing" if missing else "the method has no answer for these inputs"
        return replace(blank, text=f"the {what} cannot be computed: {reason}", missing=missing,
                       basis="nothing to compare with")  # fmt: skip
    asked = Asked(value, value.quantity, at, "upstream", slope(value))
    tolerance = PRACTICE[value.quantity].of(number, False) + float(rounding(value.si, value.half * asked.slope))
    verdict = "agrees" if abs(number - value.si) <= tolerance else "differs"
    text = f"{what}: {value.raw} stated, {number_text(asked, number)} {value.unit} computed".rstrip()
    return replace(blank, computed=asked.shown(number), tolerance=tolerance / asked.slope, verdict=verdict, text=text,
                   basis=f"practice and rounding {tolerance / asked.slope:.3g} {value.unit}".rstrip())  # fmt: skip


def _known(inputs: Inputs, name: str, at: int) -> bool:
    if name == "fluid":
        return inputs.fluid is not None
    return name not in inputs.columns or bool(np.isfinite(inputs.columns[name][at]))


def _row(inputs: Inputs, *names: str) -> list[Any]:
    return [inputs.columns[name] for name in names]


def _noise(inputs: Inputs, asking: Asking) -> Floats:
    from lowpoint.audit.equations import predict
    from lowpoint.physics.liquids import sound_speed
    from lowpoint.physics.noise import valve_noise

    c = inputs.columns
    computed = predict(asking.state(1), inputs, asking.slow)["coefficient"][0]
    coefficient = np.where(np.isnan(asking.coefficients), computed, asking.coefficients)
    sound = c["sound_speed"]
    if inputs.fluid is not None and np.isnan(sound).any() and not np.isnan(c["t"]).any():
        sound = np.where(np.isnan(sound), sound_speed(np.array([inputs.fluid] * inputs.count), c["t"], c["p1"]), sound)
    whole = ~np.isnan(np.array([*_row(inputs, "flow", "p1", "p2", "pv", "density", "fl", "fd", "valve_size",
                                      "pipe_out", "pipe_wall"), coefficient, sound])).any(axis=0)  # fmt: skip
    levels = np.full(inputs.count, np.nan)
    rows = np.flatnonzero(whole)
    if len(rows):
        state = (*_row(inputs, "flow", "p1", "p2", "pv", "density"), sound, coefficient)
        valve = _row(inputs, "fl", "fd", "valve_size", "pipe_out", "pipe_wall", "xfz")
        levels[rows] = valve_noise(*(x[rows] for x in (*state, *valve)))
    return levels


def _flash(inputs: Inputs, asking: Asking) -> Floats:
    from lowpoint.physics.flashing import flash_share

    t, p1, p2 = _row(inputs, "t", "p1", "p2")
    shares = np.full(inputs.count, np.nan)
    rows = np.flatnonzero(~np.isnan(t + p1 + p2))
    if inputs.fluid is not None and len(rows):
        shares[rows] = flash_share(np.array([inputs.fluid] * len(rows)), t[rows], p1[rows], p2[rows])
    return shares


def _viscosity(inputs: Inputs, asking: Asking) -> Floats:
    from lowpoint.physics.liquids import NORMAL_SALINITY, liquid_viscosity

    t, salinity = _row(inputs, "t", "salinity")
    salt = np.where(np.isnan(salinity), NORMAL_SALINITY / 1000.0, salinity)
    found = np.full(inputs.count, np.nan)
    rows = np.flatnonzero(~np.isnan(t))
    names = np.array([inputs.fluid] * len(rows))
    found[rows] = liquid_viscosity(names, t[rows], np.full(len(rows), np.nan), salt[rows])
    return found


def _limits(inputs: Inputs) -> Iterator[Claim]:
    """A limit is the vendor's test: it can be believed, not computed."""
    for value in inputs.reading.values:
        if value.quantity in LIMITS and math.isfinite(value.si):
            yield Claim(
                value.quantity, value.case, value.cell, value.number, math.nan, value.unit, math.nan,
                "a limit comes from a test", "unchecked",
                f"{value.label or value.quantity}: {value.raw} is the vendor's value; ask for the test it comes from",
                missing=("test report",),
            )  # fmt: skip


def _sets(inputs: Inputs) -> Iterator[Claim]:
    """Several numbers in one cell, of plates or stages in series: said to be there, and not computed."""
    for value in inputs.reading.values:
        if value.quantity in ("bores", "stage_pressures"):
            yield Claim(
                value.quantity, value.case, value.cell, math.nan, math.nan, value.unit, math.nan,
                "nothing to compare with", "unchecked",
                f"{value.raw}: numbers of a set in series are not computed again; give each plate its own sheet",
            )  # fmt: skip


def _stages(inputs: Inputs) -> Iterator[Claim]:
    """Stages of equal index that keep every stage at or above the mildest limit that the sheet gives."""
    from lowpoint.physics.indices import to_upstream
    from lowpoint.physics.stages import stage_count

    c = inputs.columns
    for value in inputs.reading.values:
        if value.quantity != "stages" or not math.isfinite(value.number):
            continue
        limit = next((v for name in LIMITS if (v := inputs.reading.of(name, None)) is not None), None)
        target = math.nan if limit is None else float(to_upstream(limit.si, limit.form or "upstream"))
        rows = np.flatnonzero((c["p2"] > c["pv"]) & (c["p2"] < c["p1"]))
        counts = stage_count(c["p1"][rows], c["p2"][rows], c["pv"][rows], np.full(len(rows), target))
        yield _of_stages(value, target, float(np.max(counts, initial=-math.inf)))


def _of_stages(value: Value, target: float, needed: float) -> Claim:
    if not math.isfinite(needed):
        return Claim("stages", value.case, value.cell, value.number, math.nan, "", 0.0, "nothing to compare with",
                     "unchecked", "the number of stages cannot be judged without a limit of the index, and pressures "
                     "above boiling", missing=LIMITS[:1])  # fmt: skip
    every = f"every stage at or above {target:.3g}"
    return Claim("stages", value.case, value.cell, value.number, needed, "", 0.0, f"equal index in {every}",
                 "agrees" if value.number >= needed else "differs",
                 f"number of stages: {value.raw} stated, {needed:.0f} needed to keep {every}")  # fmt: skip
