"""The audit's mistakes against ``datasheet_mistakes.csv``: what each one turns a base case into (rows marked C).

The values were computed independently, from the equations of IEC 60534-2-1, Kv in kPa and m3/h; they check the coding
of each mistake's formula, not the method.
"""

from __future__ import annotations

from typing import Any

import pytest

from audit_memory import value, with_values
from lowpoint.audit.asking import asking
from lowpoint.audit.auditing import audit_sheet
from lowpoint.audit.checking import check
from lowpoint.audit.inputs import inputs_of
from lowpoint.audit.mistakes import catalogue
from lowpoint.audit.model import SheetReading
from lowpoint.units import KV
from published.rows import read

ROWS = read("datasheet_mistakes")
KEYS = {
    "ER-01": "gauge_as_absolute_both", "ER-02": "atmosphere_twice_both", "ER-03": "pv_at_20_c",
    "ER-04": "pv_at_t_of_warm", "ER-05": "pv_at_t_of_hot", "ER-06": "fl_of_warm", "ER-07": "fl_default_0.9",
    "ER-08": "no_fittings", "ER-09": "relative_density_1", "ER-10": "flow_at_15_c",
}  # fmt: skip
"""What each row's mistake is called; its other temperatures and FL are those of other cases of the sheet."""
UNITS = {"Kv": KV, "dp_choked": 1e3, "sigma1": 1.0}
CASES = ("base", "warm", "hot")


def base(printed: dict[str, float], case: str = "base") -> SheetReading:
    """The base case as a sheet, with two more cases that differ by temperature and FL."""
    given: dict[str, Any] = ROWS["ER-00-Kv"].inputs["base"]
    values = [value("fluid", None, 0.0, 0, word="water")]
    for key, name, unit, decimals in (("d", "valve_size", "mm", 1), ("D1", "pipe_in", "mm", 1),
                                      ("D2", "pipe_out", "mm", 1), ("pc", "pc", "kPa", 1)):  # fmt: skip
        values.append(value(name, None, given[key], decimals, unit))
    for name, t, fl in (("base", 90.0, given["FL"]), ("warm", 70.0, 0.60), ("hot", 110.0, given["FL"])):
        values += [
            value("flow", name, given["Q"], 2, "m3/h"), value("p1", name, given["p1"], 2, "kPa"),
            value("p2", name, given["p2"], 2, "kPa"), value("pv", name, given["pv"], 2, "kPa"),
            value("t", name, t, 1, "deg C"), value("density", name, given["rho"], 2, "kg/m3"),
            value("fl", name, fl, 3),
        ]  # fmt: skip
    units = {"coefficient": "Kv", "dp_choked": "kPa", "sigma": ""}
    values += [value(quantity, case, number, 4, units[quantity], form="upstream" if quantity == "sigma" else None)
               for quantity, number in printed.items()]  # fmt: skip
    return SheetReading("Sheet1", "LV-102", CASES, tuple(values), atmosphere=101325.0, atmosphere_from="sheet")


def printed(number: str) -> dict[str, float]:
    return {quantity: ROWS[f"{number}-{name}"].value
            for quantity, name in (("coefficient", "Kv"), ("dp_choked", "dp_choked"), ("sigma", "sigma1"))}  # fmt: skip


def test_the_base_case_agrees() -> None:
    checked = check(asking(inputs_of(base(printed("ER-00")))))
    verdicts = {claim.quantity: claim.verdict for claim in checked.claims if claim.case == "base"}
    assert {verdicts[name] for name in ("coefficient", "dp_choked", "sigma")} == {"agrees"}


@pytest.mark.parametrize("number", KEYS)
def test_what_a_mistake_makes_of_it(number: str) -> None:
    """Every row's Kv, choked drop and index, to 0.1 % or the digits of its vapour pressure."""
    asked = asking(inputs_of(base(printed("ER-00"))))
    mistake = next(m for m in catalogue(asked.inputs) if m.key == KEYS[number])
    state = asked.state(1)
    mistake.apply(state, [0])
    numbers = dict(zip((claim.kind for claim in asked.claims if claim.place == 0), [
        x for x, claim in zip(asked.numbers(state)[0].tolist(), asked.claims, strict=True) if claim.place == 0
    ], strict=True))  # fmt: skip
    for kind, name in (("coefficient", "Kv"), ("dp_choked", "dp_choked"), ("sigma", "sigma1")):
        row = ROWS[f"{number}-{name}"]
        assert abs(numbers[kind] / UNITS[name] - row.value) <= row.allowed, kind


@pytest.mark.parametrize("number", KEYS)
def test_it_is_named_first(number: str) -> None:
    """The vendor's three numbers of one case lead back to the mistake, alone or with what is the same number."""
    found = audit_sheet(base(printed(number)))
    wrong = [claim for claim in found if claim.verdict == "differs" and claim.quantity in
             ("coefficient", "dp_choked", "sigma")]  # fmt: skip
    assert wrong
    for claim in wrong:
        first = claim.suspects[0]
        named = [s.mistakes for s in claim.suspects if s.explains == first.explains and s.equal == first.equal]
        assert (KEYS[number],) in named, claim.text


def test_whether_it_chokes_is_the_row_s_word() -> None:
    """Catalogue FL 0.60 makes the base case choke (row ER-06), the right one does not (row ER-00)."""
    assert ROWS["ER-06-choked"].expected == "true"
    assert ROWS["ER-00-choked"].expected == "false"
    said = value("statement", "base", 0.0, 0, word="choked")
    judged = next(c for c in audit_sheet(with_values(base(printed("ER-00")), said)) if c.quantity == "statement")
    assert judged.verdict == "differs"
