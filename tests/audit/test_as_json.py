"""Audits as JSON: exactly the promised keys, no NaN, and the findings of the reading among them."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from audit.outputs import planted, sheet, small, small_csv
from lowpoint.audit.as_json import audit_json, claims_json, failure_json, reading_json
from lowpoint.audit.model import Finding

KEYS = ["quantity", "case", "cell", "claimed", "computed", "unit", "tolerance", "basis", "verdict", "suspects"]
"""As the project promises them."""
VERDICTS = {"agrees", "differs", "unchecked", "contradicts"}


def plain(value: Any) -> Any:
    """Through JSON and back; NaN is an error."""
    return json.loads(json.dumps(value, allow_nan=False))


@pytest.mark.parametrize("layout", ["ledger", "boxes", "letter", "semicolons"])
def test_every_claim_has_the_promised_keys(tmp_path: Path, layout: str) -> None:
    audit = sheet(planted(tmp_path, layout, "gauge_as_absolute_both"))
    claims = plain(claims_json(audit.claims[0], audit.document.sheets[0].findings))
    assert claims
    for claim in claims:
        assert list(claim) == KEYS
        assert claim["verdict"] in VERDICTS
        for suspect in claim["suspects"]:
            assert list(suspect) == ["mistakes", "value", "explains"]
            assert {"quantity": claim["quantity"], "case": claim["case"]} in suspect["explains"]
    assert any(claim["verdict"] == "differs" and claim["suspects"] for claim in claims)


def test_a_number_that_differs(tmp_path: Path) -> None:
    entry = plain(audit_json(sheet(small(tmp_path, sigma=3.25))))[0]
    claim = next(claim for claim in entry["claims"] if claim["quantity"] == "sigma")
    # By hand: (6.0 - 0.5)/(6.0 - 4.0) = 2.75.
    assert (claim["case"], claim["cell"], claim["claimed"], claim["unit"]) == (None, "Data!B8", 3.25, "")
    assert claim["computed"] == pytest.approx(2.75)
    assert claim["verdict"] == "differs"
    assert 0.0 < claim["tolerance"] < 0.5
    assert "practice" in claim["basis"]
    assert entry["sheet"] == "Data"


def test_what_is_unchecked_says_what_is_missing(tmp_path: Path) -> None:
    path = small_csv(tmp_path, extra="Choked pressure drop;3.1;bar\n")
    claims = plain(claims_json(sheet(path).claims[0]))
    claim = next(claim for claim in claims if claim["quantity"] == "dp_choked")
    assert claim["verdict"] == "unchecked"
    assert claim["computed"] is None
    assert claim["tolerance"] is None
    assert "fl" in claim["basis"]


def test_a_statement_keeps_its_words(tmp_path: Path) -> None:
    path = small_csv(tmp_path, extra="Flow condition;flashing;\n")
    claims = plain(claims_json(sheet(path).claims[0]))
    claim = next(claim for claim in claims if claim["quantity"] == "statement")
    assert claim["claimed"] == "flashing"
    assert claim["verdict"] == "differs"  # p2 is far above pv


def test_findings_stand_behind_the_claims() -> None:
    found = plain(claims_json((), [Finding("ambiguous", "Data!B9", "'P' may be p1 or p2", "Ask which.")]))
    assert [list(entry) for entry in found] == [KEYS]
    assert found[0]["quantity"] is None
    assert found[0]["verdict"] == "unchecked"
    assert found[0]["basis"] == "'P' may be p1 or p2. Ask which."
    assert found[0]["cell"] == "Data!B9"


def test_entries_of_several() -> None:
    assert failure_json("x.pdf", "no text") == {"file": "x.pdf", "sheet": None, "claims": [], "error": "no text"}


def test_what_was_read(tmp_path: Path) -> None:
    found = plain(reading_json(sheet(small(tmp_path)).document))
    values = {value["quantity"]: value for value in found["sheets"][0]["values"]}
    assert values["p1"]["cell"] == "Data!B3"
    assert values["p1"]["si"] == pytest.approx(6e5)
    assert values["service"]["number"] is None
