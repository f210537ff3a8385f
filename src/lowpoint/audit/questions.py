"""What to ask the vendor, in plain sentences: one for each number that does not hold, and what is missing."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence

from lowpoint.audit.checking import WORDS
from lowpoint.audit.model import Claim, SheetReading

__all__ = ["questions_of"]

NAMES = {
    "sigma_incipient": "the index at which cavitation begins", "fl": "FL at the operating travel", "fd": "Fd",
    "pv": "the vapour pressure at the inlet temperature", "pc": "the critical pressure", "p1": "the inlet pressure",
    "p2": "the outlet pressure", "density": "the density at flowing conditions", "flow": "the flow",
    "rated": "the rated flow coefficient", "characteristic": "the inherent characteristic", "fluid": "the liquid",
    "pipe_in": "the inside diameter of the inlet pipe", "pipe_out": "the inside diameter of the outlet pipe",
    "pipe_wall": "the wall thickness of the outlet pipe", "valve_size": "the nominal size of the valve",
    "t": "the temperature", "viscosity": "the viscosity", "sound_speed": "the speed of sound in the liquid",
    "test report": "the test that the limits come from",
}  # fmt: skip


def questions_of(reading: SheetReading, claims: Iterable[Claim]) -> tuple[str, ...]:
    """The questions of one sheet, each once, contradictions first, then what differs, then what is missing."""
    claims = tuple(claims)
    asked = [*_contradicting(claims), *_differing(claims), *_missing(claims)]
    item = f"{reading.tag}: " if reading.tag else ""
    return tuple(f"{item}{sentence}" for sentence in dict.fromkeys(asked))


def _where(claims: Sequence[Claim]) -> str:
    cells = ", ".join(dict.fromkeys(claim.cell for claim in claims if claim.cell))
    cases = ", ".join(dict.fromkeys(claim.case for claim in claims if claim.case))
    said = "; ".join(part for part in (cells, f"case {cases}" if cases else "") if part)
    return f" ({said})" if said else ""


def _contradicting(claims: Iterable[Claim]) -> Iterator[str]:
    for claim in claims:
        if claim.verdict == "contradicts":
            yield f"{claim.text}{_where((claim,))}. Which is right?"


def _differing(claims: Iterable[Claim]) -> Iterator[str]:
    """One question for all cases of a quantity that one mistake would explain."""
    groups: dict[tuple[object, ...], list[Claim]] = {}
    for claim in claims:
        if claim.verdict == "differs":
            first = claim.suspects[0].mistakes if claim.suspects else ()
            # A sentence stands alone: what it rests on differs from case to case.
            own = claim.cell if claim.claimed_word else ""
            groups.setdefault((claim.quantity, claim.unit, first, own), []).append(claim)
    for group in groups.values():
        yield _words(group[0]) if group[0].claimed_word else f"{_numbers(group)}{_suspected(group)}"


def _words(claim: Claim) -> str:
    found = claim.text.partition(": ")[2]
    return f"You state '{claim.claimed_word}'{_where((claim,))}; but {found}. What does your statement rest on?"


def _numbers(group: Sequence[Claim]) -> str:
    unit = f" {group[0].unit}" if group[0].unit else ""
    what = WORDS.get(group[0].quantity, group[0].quantity)
    stated = ", ".join(f"{claim.claimed:.6g}" for claim in group)
    computed = ", ".join(f"{claim.computed:.4g}" for claim in group)
    return (f"You state for the {what} {stated}{unit}{_where(group)}; from the sheet's own inputs we get "
            f"{computed}{unit}. How was this calculated?")  # fmt: skip


def _suspected(group: Sequence[Claim]) -> str:
    if not group[0].suspects:
        return ""
    first = group[0].suspects[0]
    others = " (other slips would give the same)" if first.equal else ""
    return f" Could it be that {first.text.partition(' follows if ')[2]}{others}?"


def _missing(claims: tuple[Claim, ...]) -> Iterator[str]:
    wanted = dict.fromkeys(name for claim in claims if claim.verdict == "unchecked" for name in claim.missing)
    if wanted:
        listed = "; ".join(NAMES.get(name, name) for name in wanted)
        yield f"Please give, so that the sheet can be checked: {listed}."
