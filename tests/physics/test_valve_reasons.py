"""What LP_WHY says of valves and indices: every sentence is reached by a case, and stays away from others."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from lowpoint import functions
from lowpoint.cells import OMITTED, CellError, call, reason
from lowpoint.declare import declarations
from registry_cases import example

MODULES = ("fittings", "sizing", "nonturbulent", "travel", "typical", "indices", "limits", "regime")

Case = tuple[str, dict[str, Any], CellError | None, str]

_WATER = {"p1": 10.0, "p2": 6.0, "pv": 0.023, "pc": 220.6, "density": 998.0, "fl": 0.9}
_SIZED = {"flow": 100.0, **_WATER}
_VALVE = {"coefficient": 60.0, **_WATER}
_FIXED = {"valve_size": 100.0, "pipe_in": 150.0, "pipe_out": 200.0}
_TIGHT = {"valve_size": 105.0, "pipe_in": 102.3, "pipe_out": 102.3}
_OVERSIZED = {"valve_size": 150.0, "pipe_in": 102.3, "pipe_out": 150.0}
_GAIN = {"coefficient": 600.0, "valve_size": 100.0, "pipe_in": 100.0, "pipe_out": 141.0}
_OIL = {"viscosity": 900.0, "fd": 0.46, "trim": "full", "valve_size": 100.0}
_PITCH = {**_OIL, "viscosity": 5e7}
_TABLE = {"travels": [[10], [40], [70]], "coefficients": [[10], [33], [81]], "fls": [[0.95], [0.9], [0.8]]}
_CHOKE = {"p1": 10.0, "pv": 0.023, "pc": 220.6, "fl": 0.9}
_NUM, _NA, _VALUE = CellError.NUM, CellError.NA, CellError.VALUE

LARGER = "the valve is more than 1.1 times as large as a pipe beside it"
LITTLE = "taken as line size"
CAPACITY = "C/(N18 d^2) is above 0.047"
GAINED = "the pressure regained in the outlet expander exceeds all losses"
SLOW = "the flow is not turbulent (valve Reynolds number below 10 000)"
NO_ROOT = "found no root"
NO_VALVE = "no valve of this size passes the flow"
ENDS = "outside 10 to 90 per cent of travel"
ABOVE_ONE = "the limit must be above 1 in upstream form"


def _without(case: dict[str, Any], *names: str) -> dict[str, Any]:
    return {name: value for name, value in case.items() if name not in names}


CASES: list[Case] = [
    ("FP", {"coefficient": 60.0, **_OVERSIZED}, _NUM, LARGER),
    ("FP", _GAIN, _NUM, GAINED),
    ("FP", {"coefficient": 60.0, **_TIGHT}, None, LITTLE),
    ("FP", {"coefficient": 500.0, **_FIXED}, None, CAPACITY),
    ("FLP", {"fl": 0.9, "coefficient": 60.0, "valve_size": 150.0, "pipe_in": 102.3}, _NUM, "as large as the pipe"),
    ("FLP", {"fl": 0.9, "coefficient": 60.0, "valve_size": 105.0, "pipe_in": 102.3}, None, LITTLE),
    ("FLP", {"fl": 0.9, "coefficient": 500.0, "valve_size": 100.0, "pipe_in": 150.0}, None, CAPACITY),
    *[
        (name, {**_CHOKE, **more}, error, said)
        for name in ("CHOKED_DROP", "SIGMA_CHOKED")
        for more, error, said in (
            ({"coefficient": 60.0, **_OVERSIZED}, _NUM, LARGER),
            (_GAIN, _NUM, GAINED),
            ({"coefficient": 60.0, **_TIGHT}, None, LITTLE),
            ({"coefficient": 500.0, **_FIXED}, None, CAPACITY),
        )
    ],
    ("COEFFICIENT", {**_SIZED, **_OVERSIZED}, _NUM, LARGER),
    ("COEFFICIENT", {**_SIZED, "flow": 1e4, **_FIXED}, _NUM, NO_VALVE),
    ("COEFFICIENT", {**_SIZED, "flow": 800.0, "p1": 37.7, "p2": 11.2, "fl": 0.6, "valve_size": 50.0,
                     "pipe_in": 50.13, "pipe_out": 97.5}, _NUM, GAINED),
    ("COEFFICIENT", {**_SIZED, **_PITCH}, _NUM, NO_ROOT),
    ("COEFFICIENT", {**_SIZED, **_TIGHT}, None, LITTLE),
    ("COEFFICIENT", {**_SIZED, "p2": 1.0, "pv": 2.0}, None, "the liquid flashes"),
    ("COEFFICIENT", {**_SIZED, "p2": 0.1}, None, "sized on the choked drop"),
    ("COEFFICIENT", {**_SIZED, "flow": 900.0, "valve_size": 80.0}, None, CAPACITY),
    ("COEFFICIENT", {**_SIZED, **_OIL}, None, SLOW),
    ("FLOW", {**_VALVE, **_OVERSIZED}, _NUM, LARGER),
    ("FLOW", {**_VALVE, **_GAIN}, _NUM, GAINED),
    ("FLOW", {**_VALVE, **_PITCH, "viscosity": 1e12}, _NUM, NO_ROOT),
    ("FLOW", {**_VALVE, **_TIGHT}, None, LITTLE),
    ("FLOW", {**_VALVE, **_FIXED, "coefficient": 500.0}, None, CAPACITY),
    ("FLOW", {**_VALVE, **_OIL}, None, SLOW),
    ("FLOW", {**_VALVE, "p2": 1.0}, None, "the flow is choked: a lower outlet pressure gives no more flow"),
    ("DROP", {**_without(_SIZED, "p2"), "coefficient": 60.0, **_OVERSIZED}, _NUM, LARGER),
    ("DROP", {**_without(_SIZED, "p2"), "coefficient": 30.0}, _NUM, "more than the valve passes choked"),
    ("DROP", {**_without(_SIZED, "p2"), **_GAIN}, _NUM, GAINED),
    ("DROP", {**_without(_SIZED, "p2"), "coefficient": 60.0, **_OIL, "viscosity": 1e6}, _NUM, "not below the inlet"),
    ("DROP", {**_without(_SIZED, "p2"), "coefficient": 60.0, **_TIGHT}, None, LITTLE),
    ("DROP", {**_without(_SIZED, "p2"), "coefficient": 500.0, **_FIXED}, None, CAPACITY),
    ("DROP", {**_without(_SIZED, "p2"), "coefficient": 60.0, **_OIL}, None, SLOW),
    ("VALVE_REYNOLDS", {"flow": 10.0, "coefficient": 10.0, "viscosity": 900.0, "density": 900.0, "fl": 0.9, "fd": 0.46,
                        "pipe_in": 100.0}, None, "below 10 000 the flow is not turbulent"),
    ("THROAT_PRESSURE", {"p1": 10.0, "p2": 1.0, "fl": 0.8}, _NUM, "the throat pressure would be negative"),
    ("THROAT_PRESSURE", {"p1": 10.0, "p2": 8.0, "fl": 0.8}, None, "is no evidence of no cavitation"),
    ("THROAT_PRESSURE", {"p1": 10.0, "p2": 1.0, "fl": 0.8, "pv": 0.023, "pc": 220.6}, None, "stays at FF pv"),
    ("TRAVEL", {"coefficient": 30.0, "rated": 100.0, "characteristic": "equal percentage"}, _NA,
     "rangeability must be given"),
    ("TRAVEL", {"coefficient": 130.0, "rated": 100.0, "characteristic": "linear"}, _NUM, "above what the valve has"),
    ("TRAVEL", {"coefficient": 1.0, "rated": 100.0, "characteristic": "equal percentage", "rangeability": 50.0}, _NUM,
     "below what the valve controls"),
    ("TRAVEL", {"coefficient": 2.1, "rated": 100.0, "characteristic": "equal percentage", "rangeability": 50.0}, None,
     "below 5 % opening"),
    ("TRAVEL", {"coefficient": 30.0, "rated": 100.0, "characteristic": "linear"}, None, "may deviate by"),
    ("TRAVEL", {"coefficient": 97.0, "rated": 100.0, "characteristic": "linear"}, None, ENDS),
    ("AT_TRAVEL", {"travel": 80.0, "travels": _TABLE["travels"], "values": _TABLE["fls"]}, _NUM, "extrapolated"),
    ("OPERATING_TRAVEL", {**_without(_SIZED, "fl"), **_TABLE, "fls": [[0.95], [1.9], [0.8]]}, _NUM, "fls is 0 or"),
    ("OPERATING_TRAVEL", {**_without(_SIZED, "fl"), **_TABLE, **_OVERSIZED}, _NUM, LARGER),
    ("OPERATING_TRAVEL", {**_without(_SIZED, "fl"), "flow": 1e4, **_TABLE, **_FIXED}, _NUM, NO_VALVE),
    ("OPERATING_TRAVEL", {**_without(_SIZED, "fl"), "flow": 300.0, **_TABLE}, _NUM, "the valve is too small"),
    ("OPERATING_TRAVEL", {**_without(_SIZED, "fl"), "flow": 3.0, **_TABLE}, _NUM, "less open than the table's first"),
    ("OPERATING_TRAVEL", {**_without(_SIZED, "fl"), **_TABLE, **_TIGHT}, None, LITTLE),
    ("OPERATING_TRAVEL", {**_without(_SIZED, "fl"), **_TABLE, "p2": 1.0, "pv": 2.0}, None, "the liquid flashes"),
    ("OPERATING_TRAVEL", {**_without(_SIZED, "fl"), **_TABLE, "travels": [[2], [4], [9]]}, None, ENDS),
    ("TYPICAL", {"style": "globe single port, contoured plug", "property": "fl"}, _NA, "direction must be given"),
    ("TYPICAL", {"style": "globe single port, contoured plug", "property": "fl", "direction": "inward"}, _VALUE,
     "direction must be one that the style has"),
    ("TYPICAL", {"style": "multistage multipath, 3 stages", "property": "fd"}, _NUM, "the table has no such value"),
    ("SIGMA", {"p1": 10.0, "p2": 1.0, "pv": 1.0}, None, "the liquid flashes"),
    ("SIGMA_FORM", {"value": -1.5, "from": "downstream", "to": "upstream"}, _NUM, "impossible in its form"),
    ("MARGIN", {"sigma": 1.5, "limit": 1.5}, None, "at or beyond the limit"),
    ("MARGIN", {"sigma": 0.95, "limit": 0.6}, None, "sigma is at or below 1"),
    ("MARGIN", {"sigma": 1.5, "limit": 0.6}, None, "the limit is at or below 1"),
    ("ALLOWED_DROP", {"p1": 10.0, "pv": 1.0, "limit": 0.8}, _NUM, ABOVE_ONE),
    ("ALLOWED_OUTLET", {"p1": 10.0, "pv": 1.0, "limit": 1.8, "form": "xf"}, _NUM, ABOVE_ONE),
    ("ALLOWED_INLET", {"p2": 5.0, "pv": 1.0, "limit": 1.0}, _NUM, ABOVE_ONE),
    ("SIGMA_SCALED", {"limit": 0.9, "size": 200.0, "size_ref": 100.0, "head": 10.0, "head_ref": 5.0,
                      "size_exponent": 0.1, "head_exponent": 0.1}, _NUM, "the limit must be above 1"),
    ("SIGMA_SCALED", {"limit": 1.9, "size": 50.0, "size_ref": 100.0, "head": 10.0, "head_ref": 5.0,
                      "size_exponent": 0.0, "head_exponent": 0.0}, None, "no credit is given"),
    ("SIGMA_SCALED", {"limit": 1.9, "size": 200.0, "size_ref": 100.0, "head": 10.0, "head_ref": 5.0,
                      "size_exponent": 0.1, "head_exponent": 0.0}, None, "exponents belong to one method"),
    ("SIGMA_SCALED", {"limit": 1.9, "size": 200.0, "size_ref": 100.0, "head": 10.0, "head_ref": 5.0,
                      "size_exponent": 0.0, "head_exponent": 0.0, "method": "tullis"}, None, "from memory"),
    ("LIMIT_INSTALLED", {"limit": 1.5, "coefficient": 60.0, **_OVERSIZED}, _NUM, LARGER),
    ("LIMIT_INSTALLED", {"limit": 1.5, **_GAIN}, _NUM, GAINED),
    ("LIMIT_INSTALLED", {"limit": 0.9, "coefficient": 60.0, **_FIXED}, None, "the limit is at or below 1"),
    ("LIMIT_INSTALLED", {"limit": 1.5, "coefficient": 60.0, **_TIGHT}, None, LITTLE),
    ("LIMIT_INSTALLED", {"limit": 1.5, "coefficient": 500.0, **_FIXED}, None, CAPACITY),
    ("REGIME", {"sigma": 2.0, "damage": 0.9}, _NUM, "another form was meant"),
    ("REGIME", {"sigma": 2.0}, _NA, "at least one limit must be given"),
    ("REGIME", {"sigma": 2.0, "damage": 1.4}, None, "no incipient limit is given"),
    ("REGIME", {"sigma": 2.0, "incipient": 1.3, "damage": 1.4}, None, "not in their usual order"),
]  # fmt: skip

QUIET = {
    "VALVE_REYNOLDS": {"flow": 10.0, "coefficient": 10.0, "viscosity": 1.0, "density": 900.0, "fl": 0.9, "fd": 0.46,
                       "pipe_in": 100.0},
}  # fmt: skip
"""Cases without a caution where the example in the working range has one."""

NAMES = sorted({name for name, *_ in CASES})


def _args(name: str, given: dict[str, Any]) -> list[Any]:
    unknown = set(given) - {p.name for p in functions[name].parameters}
    assert not unknown, unknown
    return [given.get(p.name, OMITTED) for p in functions[name].parameters]


@pytest.mark.parametrize(("bare", "given", "error", "said"), CASES, ids=[f"{c[0]}: {c[3]}" for c in CASES])
def test_sentence(bare: str, given: dict[str, Any], error: CellError | None, said: str) -> None:
    """The sentence comes with its case, as the whole reason of an error or as a caution; never from the example."""
    name = f"LP_{bare}"
    args = _args(name, given)
    words, answer = reason(name, args), call(name, args)
    if error is None:
        assert not isinstance(answer, CellError), words
        assert f"caution: {next(c.text for c in declarations[bare].cautions if said in c.text)}" in words
    else:
        assert answer is error, words
        # A reason: name, what is wrong, full stop. Nothing of it stands in the middle of another sentence.
        assert words.startswith(f"{name}: ")
        assert words.endswith(".")
    assert said in words


@pytest.mark.parametrize(("bare", "given", "error", "said"), CASES, ids=[f"{c[0]}: {c[3]}" for c in CASES])
def test_sentence_stays_away_from_others(bare: str, given: dict[str, Any], error: CellError | None, said: str) -> None:
    """Some other case of the same function, or its example in the working range, is without it."""
    name = f"LP_{bare}"
    others = [reason(name, _args(name, case)) for other, case, *_ in CASES if other == bare and case is not given]
    quiet = _args(name, QUIET[bare]) if bare in QUIET else example(name)
    assert any(said not in words for words in [*others, reason(name, quiet)])


def test_every_sentence_has_a_case() -> None:
    missing = []
    for bare, declaration in declarations.items():
        if declaration.kernel.__module__.rpartition(".")[2] not in MODULES:
            continue
        texts = [x.text for x in (*declaration.no_answer, *declaration.cautions)]
        told = [said for name, _, _, said in CASES if name == bare]
        missing += [(bare, text) for text in texts if not any(said in text for said in told)]
    assert missing == []


@pytest.mark.parametrize("bare", NAMES)
def test_a_column_tells_each_row_its_own(bare: str) -> None:
    """All cases of a function in one column from Python: the same sentences, whatever the neighbours leave out."""
    name = f"LP_{bare}"
    function = functions[name]
    tables = {p.name for p in function.parameters if p.is_table}
    cases = [given for other, given, *_ in CASES if other == bare]
    if tables:
        cases = [given for given in cases if all(given[t] == cases[0][t] for t in tables)]
    columns: dict[str, Any] = {}
    for p in function.parameters:
        if p.is_table:
            columns[p.name] = cases[0][p.name]
        elif any(p.name in given for given in cases):
            columns[p.name] = np.array([given.get(p.name) for given in cases], object)
    assert function.why(**columns).tolist() == [reason(name, _args(name, given)) for given in cases]


def test_a_row_that_lacks_something_does_not_break_its_neighbours() -> None:
    """The only row with a viscosity is refused (no fd); the reason of the others must still be found."""
    why = functions["LP_COEFFICIENT"].why(**_SIZED, viscosity=np.array([5.0, np.nan]), valve_size=100.0, trim="full")
    assert "fd (" in why[0]
    assert why[1] == "ok"
    why = functions["LP_THROAT_PRESSURE"].why(p1=10.0, p2=8.0, fl=0.9, pv=np.array([0.1, np.nan]))
    assert "pc (" in why[0]
    assert "no evidence" in why[1]
    why = functions["LP_CHOKED_DROP"].why(**_CHOKE, coefficient=np.array([60.0, np.nan]))
    assert "valve_size (" in why[0]
    assert why[1] == "ok"


@pytest.mark.parametrize(
    ("bare", "given", "said"),
    [
        ("COEFFICIENT", {**_SIZED, "p2": 12.0}, "p2 must be below p1 = 10 bar, got 12 bar. The outlet pressure must"),
        ("COEFFICIENT", {**_SIZED, "pv": 11.0}, "pv must be below p1 = 10 bar, got 11 bar. The liquid would boil"),
        ("FLOW", {**_VALVE, "pc": 0.01}, "pv must be below pc = 0.01 bar, got 0.023 bar."),
        ("THROAT_PRESSURE", {"p1": 2.0, "p2": 1.0, "fl": 0.9, "pv": 3.0, "pc": 200.0}, "The liquid would boil"),
        ("ALLOWED_INLET", {"p2": 1.0, "pv": 1.0, "limit": 2.0}, "the liquid flashes at any inlet pressure"),
        ("SIGMA", {"p1": 5.0, "p2": 5.0, "pv": 1.0}, "p2 must be below p1"),
    ],
)
def test_relations(bare: str, given: dict[str, Any], said: str) -> None:
    name = f"LP_{bare}"
    assert call(name, _args(name, given)) is CellError.NUM
    assert said in reason(name, _args(name, given))


@pytest.mark.parametrize(
    ("bare", "given", "lacking"),
    [
        ("COEFFICIENT", {**_SIZED, "pipe_in": 100.0}, "valve_size"),
        ("COEFFICIENT", {**_SIZED, "pipe_out": 100.0}, "valve_size"),
        ("COEFFICIENT", {**_SIZED, "viscosity": 5.0, "fd": 0.4, "trim": "full"}, "valve_size"),
        ("COEFFICIENT", {**_SIZED, "viscosity": 5.0, "valve_size": 100.0, "trim": "full"}, "fd"),
        ("FLOW", {**_VALVE, "viscosity": 5.0, "valve_size": 100.0, "fd": 0.4}, "trim"),
        ("DROP", {**_without(_SIZED, "p2"), "coefficient": 60.0, "pipe_in": 100.0}, "valve_size"),
        ("CHOKED_DROP", {**_CHOKE, "coefficient": 60.0}, "valve_size"),
        ("SIGMA_CHOKED", {**_CHOKE, "valve_size": 60.0}, "coefficient"),
        ("THROAT_PRESSURE", {"p1": 10.0, "p2": 8.0, "fl": 0.9, "pv": 0.1}, "pc"),
        ("OPERATING_TRAVEL", {**_without(_SIZED, "fl"), **_TABLE, "pipe_in": 100.0}, "valve_size"),
    ],
)
def test_what_needs_something_else_is_not_available_without(bare: str, given: dict[str, Any], lacking: str) -> None:
    name = f"LP_{bare}"
    assert call(name, _args(name, given)) is CellError.NA
    assert f"{lacking} (" in reason(name, _args(name, given))
    assert "must be given where" in reason(name, _args(name, given))
