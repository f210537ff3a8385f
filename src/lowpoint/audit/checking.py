"""Every claim of a sheet computed again from the sheet's own inputs, and what the comparison says."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from lowpoint.audit.asking import INDICES, Asked, Asking
from lowpoint.audit.equations import predict
from lowpoint.audit.inputs import MISSING
from lowpoint.audit.model import Claim
from lowpoint.audit.tolerances import PRACTICE, rests_on, rounding, uncertain

__all__ = ["Checked", "check", "digits", "number_text"]

WORDS = {
    "coefficient": "required flow coefficient", "fp": "piping factor FP", "flp": "FLP", "ff": "FF",
    "dp": "pressure drop", "dp_choked": "choked drop", "sigma": "cavitation index", "sigma_choked": "index at choking",
    "travel": "opening", "velocity_in_valve": "velocity in the valve's bore", "velocity_in": "inlet velocity",
    "velocity_out": "outlet velocity",
    "pv": "vapour pressure", "density": "density", "pc": "critical pressure", "noise": "noise", "bore": "bore",
    "flash_share": "vapour share", "viscosity": "viscosity", "stages": "number of stages", "mass_flow": "mass flow",
    "statement": "statement", "choked": "choked",
}  # fmt: skip
FORM_WORDS = {"upstream": "(p1-pv)/(p1-p2)", "downstream": "(p2-pv)/(p1-p2)", "xf": "(p1-p2)/(p1-pv)"}


@dataclass(frozen=True, eq=False)
class Checked:
    """The numeric claims with their verdicts, and what the search for suspects needs of them."""

    asking: Asking
    computed: Any
    """SI, one element a claim, NaN where it cannot be computed."""
    spread: Any
    """SI, what the rounding of the inputs can move it by."""
    claims: tuple[Claim, ...]


def check(asking: Asking) -> Checked:
    """Verdict of every numeric claim: agrees, differs or unchecked, with tolerance and basis."""
    state = asking.state(1)
    computed, forms = asking.numbers_in(state)
    forms = None if forms is None else np.tile(forms, len(asking.perturbed))
    spread = asking.spread(computed, asking.numbers(asking.nudged(state), forms))[0]
    choked = predict(state, asking.inputs, asking.slow)["choked"][0] == 1.0
    claims = [
        _judged(asking, claim, float(computed[0, k]), float(spread[k]), bool(choked[claim.place]))
        for k, claim in enumerate(asking.claims)
    ]
    return Checked(asking, computed[0], spread, tuple(_on_wrong_properties(asking, claims, choked)))


def _on_wrong_properties(asking: Asking, claims: list[Claim], choked: Any) -> list[Claim]:
    """What rests on a property of the sheet that itself differs says so; and what the right one would turn."""
    wrong = {(c.quantity, a.place) for c, a in zip(claims, asking.claims, strict=True)
             if c.verdict == "differs" and c.quantity in ("pv", "density")}  # fmt: skip
    if not wrong:
        return claims
    state = asking.state(1)
    state["pv"], state["density"] = state["pv_fluid"], state["density_fluid"]
    turned = (predict(state, asking.inputs, asking.slow)["choked"][0] == 1.0) != choked
    return [_noted(claim, asked, wrong, turned) for claim, asked in zip(claims, asking.claims, strict=True)]


def _noted(claim: Claim, asked: Asked, wrong: set[tuple[str, int]], turned: Any) -> Claim:
    if (claim.quantity, asked.place) in wrong:
        note = "; with the computed value the flow turns from choked to not choked, or the reverse"
        return replace(claim, text=claim.text + note) if turned[asked.place] else claim
    on = [name for name in rests_on(asked.kind, True) if (name, asked.place) in wrong]
    return replace(claim, basis=f"{claim.basis}; rests on the sheet's {', '.join(on)}, which differs") if on else claim


def digits(half: float) -> int:
    """Decimals of a number whose last digit is twice ``half``."""
    return max(0, round(-math.log10(2.0 * half))) if half > 0.0 else 4


def number_text(claim: Asked, si: float) -> str:
    """A number in the unit and with the digits of the claim, one more where the claim is short."""
    if not math.isfinite(si):
        return "no number"
    return f"{claim.shown(si):.{digits(claim.value.half)}f}"


def _judged(asking: Asking, claim: Asked, computed: float, spread: float, choked: bool) -> Claim:
    value, inputs = claim.value, asking.inputs
    unsure = uncertain(inputs, rests_on(claim.kind, choked), claim.place)
    case = inputs.cases[claim.place] if inputs.count > 1 and claim.kind != "pc" else value.case
    blank = Claim(value.quantity, case, value.cell, value.number, math.nan, value.unit, math.nan, "", "unchecked", "")
    if not math.isfinite(computed):
        return _unchecked(blank, claim, unsure)
    practice = _practice(claim, computed, not unsure)
    own = float(rounding(value.si, value.half * claim.slope))
    tolerance = practice + own + spread
    miss = abs(computed - value.si)
    turned = "" if miss <= own + spread else _turned(asking, claim, computed)
    verdict = "differs" if miss > tolerance or turned else "agrees"
    return replace(
        blank, computed=claim.shown(computed), tolerance=tolerance / claim.slope,
        basis=_basis(claim, practice, own, spread, unsure), verdict=verdict,
        text=_sentence(claim, computed, verdict, turned),
    )  # fmt: skip


def _practice(claim: Asked, computed: float, certain: bool) -> float:
    """The tolerance of practice; that of an index is a share of its upstream form, whatever form is printed."""
    usual = PRACTICE[claim.kind]
    if claim.kind in INDICES and claim.form == "downstream":
        return usual.of(1.0 + computed, certain)
    return usual.of(computed, certain)


def _unchecked(blank: Claim, claim: Asked, unsure: dict[str, str]) -> Claim:
    missing = tuple(name for name, word in unsure.items() if word == MISSING)
    what = WORDS[claim.kind]
    text = (
        f"the {what} cannot be computed: {', '.join(missing)} missing" if missing
        else f"the {what} cannot be computed: its inputs allow no answer (look for contradictions among them)"
    )  # fmt: skip
    return replace(blank, text=text, missing=missing, basis="nothing to compare with")


def _turned(asking: Asking, claim: Asked, computed: float) -> str:
    """What the claimed number would turn in the verdict, beyond rounding; empty where nothing turns."""
    c, at = asking.inputs.columns, claim.place
    drop = c["p1"][at] - c["p2"][at]
    if claim.kind == "dp_choked" and (drop >= claim.value.si) != (drop >= computed):
        return "choked by one of the two numbers and not by the other"
    if claim.kind != "sigma":
        return ""
    for name in ("incipient", "constant", "damage", "vibration"):
        limit = asking.inputs.reading.of(f"sigma_{name}", asking.inputs.cases[at])
        if limit is None or not math.isfinite(limit.si) or (limit.form or claim.form) != claim.form:
            continue
        if (claim.value.si <= limit.si) != (computed <= limit.si):
            return f"the {name} limit {limit.number:g} lies between the two numbers"
    return ""


def _sentence(claim: Asked, computed: float, verdict: str, turned: str) -> str:
    what = WORDS[claim.kind] + (f" {FORM_WORDS[claim.form]}" if claim.kind in INDICES else "")
    unit = f" {claim.value.unit}" if claim.value.unit else ""
    text = f"{what}: {claim.value.raw} stated, {number_text(claim, computed)}{unit} computed"
    if verdict == "differs" and claim.value.si and computed:
        text += f", {(claim.value.si / computed - 1.0) * 100.0:+.1f} %"
    if claim.kind in INDICES and claim.value.form is None:
        text += "; the sheet does not say in which form, it fits this one best"
    return f"{text}; {turned}" if turned else text


def _basis(claim: Asked, practice: float, own: float, spread: float, unsure: dict[str, str]) -> str:
    k = claim.slope
    parts = f"practice {practice / k:.3g}, rounding of the claim {own / k:.3g}, of the inputs {spread / k:.3g}"
    notes = [f"{name} {word or 'not given'}" for name, word in unsure.items()]
    return f"{parts}; {'; '.join(notes) or 'every input stands on the sheet'}"
