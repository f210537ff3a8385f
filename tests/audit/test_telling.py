"""What an audit says on a terminal: groups, suspects as what would follow, ties, and no line beyond its width."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import pytest

from audit.outputs import planted, sheet, small
from lowpoint.audit.explaining import explanations
from lowpoint.audit.model import Audit, Claim, Document, Finding, SheetReading, Suspect
from lowpoint.audit.telling import audit_lines, statement, suspect_lines, tally

FIRST = Suspect(("p1_gauge",), "3.2 follows if p1 was read as gauge", 3.2, (("sigma", "Normal"), ("dp", "Normal")), 1,
                ("3.2", "1.9"))  # fmt: skip
SECOND = replace(FIRST, mistakes=("other",), text="3.2 follows if the pump ran backwards")
THIRD = Suspect(("third",), "3.1 follows if something else", 3.1, (("sigma", "Normal"),), 0, ("3.1",))
CLAIM = Claim("sigma", "Normal", "Data!B8", 3.2, 2.75, "", 0.07, "practice 0.01", "differs",
              f"cavitation index: 3.2 stated, 2.75 computed, +16.4 %; {FIRST.text} (1 more would explain it as well)",
              (FIRST, SECOND, THIRD))  # fmt: skip


def audit_of(*claims: Claim, findings: tuple[Finding, ...] = ()) -> Audit:
    reading = SheetReading("Data", "21-FCV-110", ("Normal",), (), findings)
    return Audit(Document("offer.xlsx", "xlsx", "", (reading,)), (claims,), ((),))


def test_the_sentence_of_a_claim_is_told_once() -> None:
    assert statement(CLAIM) == "cavitation index: 3.2 stated, 2.75 computed, +16.4 %"
    text = "\n".join(audit_lines(audit_of(CLAIM)))
    assert text.count("3.2 stated") == 1


def test_suspects_that_explain_equally_well_say_so() -> None:
    assert suspect_lines(CLAIM) == [
        "3.2 follows if p1 was read as gauge (and so does 1 more)",
        "equally well: 3.2 follows if the pump ran backwards (and so does 1 more)",
        "3.1 follows if something else",
    ]


def test_no_suspect_is_stated_as_a_fact() -> None:
    said = audit_lines(audit_of(CLAIM))
    named = [line for line in said if "gauge" in line or "backwards" in line]
    assert len(named) == 2
    assert all("would follow if" in line for line in named)


def test_each_suspect_is_told_once_with_all_that_would_follow() -> None:
    """Two claims of one mistake: one sentence, with the number of each; the claims name its letter."""
    other = replace(CLAIM, quantity="dp", cell="Data!B7")
    said = audit_lines(audit_of(CLAIM, other))
    start = said.index("What would explain it, which only the vendor can tell") + 2
    assert said[start : start + 6] == [
        "  A  2 of 2 that differ would follow if p1 was read as gauge:",
        "       sigma: Normal 3.2; dp: Normal 1.9",
        "  B  equally well, 2 of 2 that differ would follow if the pump ran backwards:",
        "       sigma: Normal 3.2; dp: Normal 1.9",
        "  C  1 of 2 that differ would follow if something else:",
        "       sigma: Normal 3.1",
    ]
    assert "  sigma, Normal (Data!B8): 3.2 stated, 2.75 computed, +16.4 %; would follow: A, B, C" in said


def test_equal_suspects_that_are_not_named_are_counted() -> None:
    alone = replace(FIRST, equal=4)
    text = "\n".join(audit_lines(audit_of(replace(CLAIM, suspects=(alone,)))))
    assert "(4 more would explain as much, and cannot be told apart by the numbers)" in text


def test_what_no_mistake_gives_and_what_was_not_tried_is_said() -> None:
    bare = replace(CLAIM, suspects=(), text="cavitation index: 3.2 stated, 2.75 computed, +16.4 %; none gives it")
    noise = replace(bare, quantity="noise", tried=False)
    said = audit_lines(audit_of(bare, noise))
    assert "  -  1 of 2 that differ follows from none of the usual mistakes, alone or in pairs" in said
    assert "  -  not tried: the usual mistakes on noise" in said


def test_the_most_explaining_comes_first() -> None:
    """What is first of no claim stands behind; ties stand together, with letters in that order."""
    alone = replace(CLAIM, suspects=(THIRD,))
    more = (("sigma", "Normal"), ("x", None), ("y", None))
    lesser = replace(THIRD, text="3.1 follows if the moon was full", explains=more, numbers=("3.1", "1", "2"))
    found = explanations([alone, CLAIM, replace(CLAIM, suspects=(FIRST, lesser))])
    assert [one.phrase for one in found] == [
        "p1 was read as gauge", "the pump ran backwards", "something else", "the moon was full",
    ]  # fmt: skip
    assert [one.equal for one in found] == [False, True, False, False]
    assert [one.letter for one in found] == ["A", "B", "C", "D"]


@pytest.mark.parametrize(
    ("verdicts", "said"),
    [
        ((), "0 claims"),
        (("agrees",), "1 claim: 1 agrees"),
        (("agrees", "differs", "agrees"), "3 claims: 1 differs, 2 agree"),
        (("contradicts", "unchecked"), "2 claims: 1 contradicts itself, 1 not checked"),
    ],
)
def test_tally(verdicts: tuple[str, ...], said: str) -> None:
    assert tally([replace(CLAIM, verdict=verdict) for verdict in verdicts]) == said


def test_what_is_missing_in_every_case_is_told_once() -> None:
    blank = replace(CLAIM, verdict="unchecked", computed=math.nan, suspects=(), text="FL cannot be computed: t missing")
    lines = audit_lines(audit_of(blank, replace(blank, case="Maximum", cell="Data!C8")))
    assert "  sigma, Normal, Maximum (Data!B8; Data!C8)" in lines
    assert lines.count("      FL cannot be computed: t missing") == 1


def test_findings_of_the_sheet_are_told() -> None:
    finding = Finding("ambiguous", "Data!B9", "'P' may be p1 or p2", "Ask which.")
    text = "\n".join(audit_lines(audit_of(findings=(finding,))))
    assert "  - ambiguous: Data!B9: 'P' may be p1 or p2. Ask which." in text


def test_agreeing_claims_are_listed_when_asked_for(tmp_path: Path) -> None:
    audit = sheet(small(tmp_path))
    short, long = audit_lines(audit), audit_lines(audit, every=True)
    assert "Agrees" not in short
    assert "Agrees" in long
    assert any("(p1-pv)/(p1-p2) 2.75 stated, 2.75 computed" in line for line in long)


@pytest.mark.parametrize("width", [60, 100])
def test_no_line_is_wider(tmp_path: Path, width: int) -> None:
    """But for the name of the file, which is where it is."""
    audit = sheet(planted(tmp_path, "boxes", "gauge_as_absolute_both"))
    lines = audit_lines(audit, every=True, width=width)
    assert len(lines) > 20
    assert max(len(line) for line in lines if str(tmp_path) not in line) <= width
