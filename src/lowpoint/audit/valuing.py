"""From what was found to values: unit, gauge or absolute, SI and confidence of each, and what is doubtful about it."""

from __future__ import annotations

import math
from dataclasses import dataclass, field, replace

from lowpoint.audit.found import Claimed, Found
from lowpoint.audit.model import Finding, Value
from lowpoint.audit.statements import canonical
from lowpoint.audit.unitsigns import Sign, to_si, unit_sign
from lowpoint.audit.vocabulary import BY_KEY, PRESSURES, becomes, fits
from lowpoint.physics.unitnames import PRESSURE

__all__ = ["Valued", "value_of_pin", "values_of"]

ABSOLUTE = frozenset({"pv", "pc", "atmosphere"})
"""Absolute by their nature, whatever their unit does not say."""
PLAIN_KINDS = frozenset({"ratio", "count", "share", "level"})
_FLOW = "m3 s-1"
NAN = float("nan")


@dataclass(eq=False)
class Valued:
    """The values of a page and the findings about them; pressures still wait for the atmosphere."""

    values: list[tuple[Value, Sign | None]] = field(default_factory=list)
    findings: list[Finding] = field(default_factory=list)


def values_of(found: Found) -> Valued:
    """Every value with its unit; SI is made later, when the site's atmosphere is known."""
    valued = Valued()
    without: dict[str, list[Claimed]] = {}
    unsaid: list[tuple[Claimed, str]] = []
    for claimed in found.values:
        if claimed.word is not None:
            valued.values.append((_word(claimed), None))
            continue
        number = claimed.taken.number
        if number is None or not math.isfinite(number.value):
            continue
        sign, source, problem = _unit(claimed)
        if problem:
            valued.findings.append(problem)
        key = becomes(claimed.label.key, sign.meaning) if sign else claimed.label.key
        sign, gauge = _reference(key, claimed, sign, found)
        note = ""
        if sign is None and BY_KEY[key].kind == "share" and number.value > 1.0:
            sign, source, note = unit_sign("%"), "quantity", "no unit is given; above 1 it is in per cent"
        if sign is None and (BY_KEY[key].kind not in PLAIN_KINDS or key == "travel"):
            without.setdefault(claimed.label.text, []).append(claimed)
        if key in PRESSURES and sign is not None and gauge is None:
            unsaid.append((claimed, sign.label))
        value = _number(claimed, key, sign, source, gauge)
        valued.values.append((replace(value, note=value.note or note), sign))
    for label, many in without.items():
        cells = ", ".join(dict.fromkeys(c.taken.cell.address for c in many[:4]))
        valued.findings.append(Finding("unit", cells, f"'{_short(label)}' has a value and no unit that is understood",
                                       "Ask for the unit, or name it in a layout."))  # fmt: skip
    _gauge_findings(valued, unsaid)
    return valued


def _gauge_findings(valued: Valued, unsaid: list[tuple[Claimed, str]]) -> None:
    """One finding for each label whose pressures are neither said to be gauge nor absolute."""
    seen: dict[str, list[str]] = {}
    for claimed, unit in unsaid:
        seen.setdefault(f"{claimed.label.text}\0{unit}", []).append(claimed.taken.cell.address)
    for name, cells in seen.items():
        label, _, unit = name.partition("\0")
        valued.findings.append(Finding(
            "gauge", cells[0], f"'{_short(label)}' is in {unit}, and whether gauge or absolute is not said",
            f"Ask the vendor; in a layout write {unit} g or {unit} a."))  # fmt: skip


def _short(text: str) -> str:
    text = " ".join(text.split())
    return text if len(text) <= 50 else text[:47] + "..."


def _unit(claimed: Claimed) -> tuple[Sign | None, str, Finding | None]:
    """The unit of a number, where it stands, and a finding where two places do not agree or none fits."""
    key, label = claimed.label.key, claimed.label
    kind = BY_KEY[key].kind
    near = (claimed.taken.sign, claimed.taken.unit_from) if claimed.taken.sign else (None, "")
    places = [near, (label.unit, "label"), (claimed.head, "head")]
    if label.inherent:
        places.append((unit_sign(label.inherent), "quantity"))
    problem = None
    chosen: tuple[Sign | None, str] = (None, "")
    for sign, source in places:
        if sign is None:
            continue
        if kind == "coefficient" and sign.meaning.dimension == _FLOW:
            sign = unit_sign("Cv" if "gal" in sign.label else "Kv")
            assert sign is not None
        if not (sign.level if kind == "level" else fits(kind, sign.meaning)):
            if source in ("beside", "cell") and kind not in ("count",):
                problem = Finding("unit", claimed.taken.cell.address,
                                  f"'{sign.label}' is no unit of {BY_KEY[key].meaning}",
                                  "Ask for the right unit.")  # fmt: skip
            continue
        if chosen[0] is None:
            chosen = (sign, source)
        elif (
            source == "label"
            and kind != "coefficient"
            and (sign.label, sign.gauge) != (chosen[0].label, chosen[0].gauge)
            and not _same(sign, chosen[0])
        ):
            problem = Finding("unit", claimed.taken.cell.address,
                              f"'{_short(label.text)}' names {sign.label} and its value {chosen[0].label}; "
                              f"{chosen[0].label} was taken", "Ask which of the two holds.")  # fmt: skip
        elif sign.gauge is not None and chosen[0].gauge is None and _same(sign, chosen[0]):
            chosen = (sign, source)
    return (*chosen, problem)


def _same(one: Sign, other: Sign) -> bool:
    """Two signs of which one only says more than the other (bar, bar g), or a second unit of one number."""
    if one.meaning.dimension != other.meaning.dimension:
        return True
    return one.meaning.factor == other.meaning.factor and (
        one.gauge is None or other.gauge is None or one.gauge == other.gauge
    )


def _reference(key: str, claimed: Claimed, sign: Sign | None, found: Found) -> tuple[Sign | None, bool | None]:
    """The unit with its reference, and whether it is gauge: of the unit itself, the label, the sheet, the quantity."""
    if sign is None or sign.meaning.dimension != PRESSURE:
        return sign, None
    gauge = sign.gauge
    if gauge is None and key in PRESSURES:
        gauge = claimed.label.gauge
        if gauge is None and key in ABSOLUTE:
            return sign, False
        if gauge is None:
            gauge = found.gauge
        if gauge is not None:
            sign = sign._replace(
                label=f"{sign.label} {'g' if gauge else 'a'}", meaning=sign.meaning._replace(gauge=gauge), gauge=gauge
            )
    return sign, gauge


def _confidence(claimed: Claimed, sign: Sign | None) -> float:
    """Label's score, less for a missing unit, a value farther off, and a meaning found in a roundabout way."""
    score = claimed.label.score * claimed.factor
    kind = BY_KEY[claimed.label.key].kind
    if claimed.word is None and sign is None and kind not in ("ratio", "count"):
        score *= 0.8
    if claimed.taken.steps > 1 and claimed.case is None:
        score *= 0.98
    return round(score, 2)


def _number(claimed: Claimed, key: str, sign: Sign | None, source: str, gauge: bool | None) -> Value:
    number = claimed.taken.number
    assert number is not None
    label, cell = claimed.label, claimed.taken.cell
    if sign is None and BY_KEY[key].kind in ("share",) and claimed.taken.number is not None:
        source = ""
    note = f"'{number.rest}' stands behind it" if number.rest else "a bound, as is written" if number.bounded else ""
    return Value(
        quantity=key, case=claimed.case, cell=cell.address, label=label.text, label_cell=claimed.role.cell.address,
        raw=cell.text, number=number.value, unit=sign.label if sign else "", unit_from=source if sign else "",
        gauge=gauge, half=number.half, si=NAN, confidence=_confidence(claimed, sign), form=_form(claimed, key),
        note=note,
    )  # fmt: skip


def _form(claimed: Claimed, key: str) -> str | None:
    """Of an index, the form that its label states, or that the symbol is by definition."""
    if key == "sigma" and "@xf" in claimed.label.words:
        return "xf"
    return claimed.label.form


def _word(claimed: Claimed) -> Value:
    label, cell = claimed.label, claimed.taken.cell
    word = claimed.word if label.key == "statement" else canonical(label.key, claimed.word or "")
    return Value(
        quantity=label.key, case=claimed.case, cell=cell.address, label=label.text,
        label_cell=claimed.role.cell.address, raw=cell.text, number=NAN, unit="", unit_from="", gauge=None, half=NAN,
        si=NAN, confidence=_confidence(claimed, None), word=word,
    )  # fmt: skip


def si_of(value: Value, sign: Sign | None, atmosphere: float) -> float:
    """A value in coherent SI; NaN for a word, a missing unit, a pressure that does not say its reference."""
    if value.word is not None:
        return NAN
    kind = BY_KEY[value.quantity].kind
    if sign is None:
        if kind in ("ratio", "count", "level"):
            return value.number
        return value.number if kind == "share" and value.quantity == "flash_share" and value.number <= 1.0 else NAN
    if sign.level:
        return value.number
    if value.quantity in PRESSURES and value.gauge is None:
        return NAN
    if kind == "drop":  # a difference has no reference, even where its unit has one
        return value.number * sign.meaning.factor
    return to_si(value.number, sign, atmosphere)


def value_of_pin(quantity: str, case: str | None, cell: str, raw: str, number: float, half: float, sign: Sign | None,
                 word: str | None, label: str, form: str | None) -> Value:  # fmt: skip
    """The value of a cell that a layout names."""
    key = becomes(quantity, sign.meaning) if sign else quantity
    gauge = sign.gauge if sign and key in PRESSURES else None
    if key in ABSOLUTE and sign is not None and gauge is None:
        gauge = False
    return Value(key, case, cell, label, "", raw, number, sign.label if sign else "", "layout" if sign else "", gauge,
                 half, NAN, 1.0, word, form)  # fmt: skip
