"""The working behind an audit, redone by hand from its lines: it comes to what the claims were judged by."""

from __future__ import annotations

import ast
import math
import random
from dataclasses import replace
from pathlib import Path

import pytest

from audit.outputs import sheet, small, small_csv
from lowpoint.audit.working import sheet_workings
from lowpoint.survey.outcome import Working
from vendor_layouts import LAYOUTS
from vendor_sheets import made


def workings(path: Path) -> tuple[Working, ...]:
    audit = sheet(path)
    return sheet_workings(audit.document.sheets[0], audit.claims[0])


def by_hand(numbers: str) -> float:
    """The arithmetic of a line by Python itself, not by the house's own reader of such lines."""
    names = {"sqrt": math.sqrt, "ln": math.log, "log10": math.log10, "min": min, "max": max}
    tree = ast.parse(numbers.replace("^", "**"), mode="eval")
    return float(eval(compile(tree, "line", "eval"), {"__builtins__": {}}, names))


def drawn(folder: Path, layout: str, seed: int) -> Path:
    rng = random.Random(seed)
    one = next(x for x in iter(lambda: made(rng, layout), object()) if x is not None)
    path = folder / f"{layout}.{one.kind}"
    path.write_bytes(one.data)
    return path


@pytest.mark.parametrize("layout", list(LAYOUTS))
def test_every_line_is_redone_by_hand(tmp_path: Path, layout: str) -> None:
    lines = 0
    for paper in workings(drawn(tmp_path, layout, 3)):
        for step in paper.steps():
            if step.numbers and step.value not in ("yes", "no"):
                assert by_hand(step.numbers) == pytest.approx(float(step.value), rel=1e-6, abs=1e-12), step
                lines += 1
    assert lines > 15


@pytest.mark.parametrize("layout", list(LAYOUTS))
def test_the_steps_come_to_what_the_claims_were_judged_by(tmp_path: Path, layout: str) -> None:
    """Two ways to one number: the survey's working from printed lines, and the audit's vectorised equations."""
    papers = workings(drawn(tmp_path, layout, 4))
    assert papers
    assert not [text for paper in papers for text in paper.cautions]
    assert any(step.source.startswith("step ") for paper in papers for step in paper.steps())


def test_a_step_that_differs_is_told(tmp_path: Path) -> None:
    """The comparison above can fail: a number that is 1 % off is a caution."""
    audit = sheet(small(tmp_path))
    claims = [replace(claim, computed=1.01 * claim.computed) for claim in audit.claims[0]]
    paper = sheet_workings(audit.document.sheets[0], claims)[0]
    assert any("Step sigma comes to 2.75 and the comparison of Data!B8 rests on 2.7775" in c for c in paper.cautions)


def test_inputs_stand_with_their_cells(tmp_path: Path) -> None:
    path = small_csv(tmp_path)
    path.write_text(path.read_text().replace("6.0;bar a", "5.0;bar g"), encoding="utf-8")
    inputs = {step.symbol: step for step in reversed(workings(path)[0].steps()) if not step.equation}
    assert inputs["pv"].source == "row 5, column 2: 0.5 bar a"
    # 5.0 bar g over the standard atmosphere, 1.01325 bar (ISO 2533).
    assert float(inputs["p1"].value) == pytest.approx(6.01325, rel=1e-6)
    assert "row 3, column 2: 5.0 bar g, over an atmosphere of 1.01325 bar (assumed" in inputs["p1"].source
    assert inputs["p1"].note == "the atmosphere is assumed"


def test_what_is_missing_leaves_the_rest(tmp_path: Path) -> None:
    """Without FL nothing is known of choking; the index is worked out all the same."""
    symbols = {step.symbol for step in workings(small(tmp_path))[0].steps()}
    assert "sigma" in symbols
    assert "dp_choked" not in symbols
