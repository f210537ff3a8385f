"""Statements in rows and columns: read for every case, judged by the index, never confirmed without an incipient limit.

Numbers by hand: (9 - 0.7018)/(9 - 2) = 1.185; choked drop of FL 0.9 (IEC 60534-2-1), pc 220.64 bar:
0.81 (9 - (0.96 - 0.28 (0.7018/220.64)^0.5) 0.7018) = 6.753 bar, below the drop of 7 bar.
"""

from __future__ import annotations

from pathlib import Path

import pytest

from lowpoint.audit.auditing import audit_document
from lowpoint.audit.model import Claim
from lowpoint.audit.reading import read_sheet

HEAD = """Tag;61-TV-5;;
Case;Minimum;Normal;Maximum
Fluid;Water;;
Flow m3/h;20;40;60
P1 bar(a);9;8,5;8
P2 bar(a);2;5,2;5,6
T deg C;90;90;90
Pv bar(a);0,7018;0,7018;0,7018
FL;0,9;0,9;0,9
"""


def statements(folder: Path, text: str) -> dict[str | None, list[Claim]]:
    path = folder / "sheet.csv"
    path.write_text(text, encoding="utf-8")
    found: dict[str | None, list[Claim]] = {}
    for claims in audit_document(read_sheet(path)).claims:
        for claim in claims:
            if claim.quantity == "statement":
                found.setdefault(claim.case, []).append(claim)
    return found


def test_a_row_of_statements_is_read_for_every_case(tmp_path: Path) -> None:
    found = statements(tmp_path, HEAD + "Cavitation;no cavitation;no cavitation;no cavitation\n")
    assert list(found) == ["Minimum", "Normal", "Maximum"]
    assert [[c.claimed_word for c in claims] for claims in found.values()] == [["no cavitation"]] * 3
    assert [claims[0].verdict for claims in found.values()] == ["differs", "unchecked", "unchecked"]
    false = found["Minimum"][0]
    assert "the state is choked, index 1.19" in false.text
    assert "choking" in false.basis
    assert all("no incipient limit" in claims[0].text for case, claims in found.items() if case != "Minimum")


@pytest.mark.parametrize("label", ["Flashing", "Choked flow", "Cavitation"])
def test_a_row_of_bare_answers_is_read_for_every_case(tmp_path: Path, label: str) -> None:
    found = statements(tmp_path, HEAD + f"{label};yes;no;no\n")
    words = [claims[0].claimed_word for claims in found.values()]
    assert list(found) == ["Minimum", "Normal", "Maximum"]
    assert words[1] == words[2]
    assert words[0] != words[1]
    assert found["Minimum"][0].verdict == ("differs" if label == "Flashing" else "agrees")


def test_a_row_without_the_cell_of_the_unit(tmp_path: Path) -> None:
    """As many statements as cases, one column to the left of their names."""
    shifted = HEAD.replace("Case;", "Case;;").replace("P1 bar(a)", "P1;bar(a)").replace("P2 bar(a)", "P2;bar(a)")
    shifted = shifted.replace("Pv bar(a)", "Pv;bar(a)").replace("FL;", "FL;;").replace("T deg C", "T;deg C")
    found = statements(tmp_path, shifted + "Cavitation;cavitating;no cavitation;no cavitation\n")
    assert {case: [c.claimed_word for c in claims] for case, claims in found.items()} == {
        "Minimum": ["cavitating"], "Normal": ["no cavitation"], "Maximum": ["no cavitation"],
    }  # fmt: skip


def test_a_row_of_states_belongs_to_its_label(tmp_path: Path) -> None:
    """``choked`` reads like a label, and is a value."""
    found = statements(tmp_path, HEAD + "Flow regime;choked;cavitating;non-choked\n")
    assert [[c.claimed_word for c in claims] for claims in found.values()] == [
        ["choked"], ["cavitating"], ["not choked"],
    ]  # fmt: skip


def test_two_questions_in_a_row_are_two(tmp_path: Path) -> None:
    found = statements(tmp_path, "P1 bar(a);9\nP2 bar(a);7.2\nPv bar(a);0.7\nCavitation;no;Flashing;no\n")
    assert [c.claimed_word for claims in found.values() for c in claims] == ["no cavitation", "no flashing"]


def test_heads_of_columns_are_no_statements(tmp_path: Path) -> None:
    text = ("Case;P1 bar(a);P2 bar(a);Pv bar(a);Cavitation;Flashing;Choked flow\n"
            "Min;9;7.2;0.7;no;no;no\nMax;9;7.1;0.7;yes;no;no\n")  # fmt: skip
    found = statements(tmp_path, text)
    assert {case: [c.claimed_word for c in claims] for case, claims in found.items()} == {
        "Min": ["no cavitation", "no flashing", "not choked"], "Max": ["cavitating", "no flashing", "not choked"],
    }  # fmt: skip


def test_without_a_limit_nothing_is_confirmed_and_with_one_it_is_by_index(tmp_path: Path) -> None:
    """6.32 is (8.5 - 0.7018)/(8.5 - 7.266): far above any inception, and still not confirmed."""
    quiet = "P1 bar(a);8.5\nP2 bar(a);7.266\nPv bar(a);0.7018\nFL;0.9\nCavitation;no\n"
    open_one = statements(tmp_path, quiet)[None][0]
    assert (open_one.verdict, open_one.missing) == ("unchecked", ("sigma_incipient",))
    for limit, verdict in (("5.5", "agrees"), ("7.5", "differs")):
        judged = statements(tmp_path, f"{quiet}Incipient cavitation index;{limit}\n")[None][0]
        assert judged.verdict == verdict
        assert f"incipient {limit}" in judged.basis
        assert "6.32" in judged.text
