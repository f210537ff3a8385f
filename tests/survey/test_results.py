"""Items by their worst case, and the survey for machines."""

from __future__ import annotations

import json
import math
from pathlib import Path
from typing import Any

import pytest

from lowpoint.survey import Survey, survey_list
from lowpoint.survey.as_json import as_json
from lowpoint.survey.items import ORDER
from survey_lists import GOOD, HEADINGS, kestrel_rows, write_csv, write_xlsx

PROMISED = ("tag", "case", "kind", "coefficient", "travel", "choked_drop", "sigma", "limits", "regime", "choked",
            "flashing", "margin", "basis", "cautions", "remedies", "errors")  # fmt: skip
"""The keys that every object of a case has, by promise."""


def _cases(tmp_path: Path, *changes: dict[str, Any]) -> Survey:
    rows = []
    for number, change in enumerate(changes):
        row = dict(zip(HEADINGS, GOOD, strict=True)) | {"Case": f"case {number}"} | change
        rows.append(list(row.values()))
    return survey_list(write_csv(tmp_path / "list.csv", HEADINGS, rows))


def test_the_least_margin_is_the_worst_case(tmp_path: Path) -> None:
    survey = _cases(tmp_path, {}, {"p2 [bar a]": 3.5}, {"p2 [bar a]": 4.0})
    item = survey.items[0]
    assert (item.rows, item.worst, item.regime, item.fails, item.unanswered) == ((0, 1, 2), 1, "clear", False, 0)
    # By hand: (5.8 - 0.0234)/(5.8 - 3.5) = 2.5116, over the limit 2.1 less one 19.6 %.
    assert item.why == ("case 'case 1': clear (tested): index 2.512 is above the incipient limit 2.1, margin +19.6 %; "
                        "the worst of 3 cases")  # fmt: skip
    assert item.margin == pytest.approx(2.5116 / 2.1 - 1.0, abs=2e-4)


def test_a_failure_is_worse_than_a_smaller_margin(tmp_path: Path) -> None:
    """A valve that is too small fails with a good margin; the other case keeps its limit by little."""
    headings = (*HEADINGS, "Kvs")
    rows = [[*GOOD, 30], [*GOOD[:1], "maximum", *GOOD[2:6], 3.1, *GOOD[7:], 60]]
    survey = survey_list(write_csv(tmp_path / "list.csv", headings, rows))
    item = survey.items[0]
    assert survey.findings.margin[0] > survey.findings.margin[1] > 0.0
    assert (item.worst, item.fails) == (0, True)
    assert "the flow does not pass: 121 % of the rated coefficient is needed" in item.why


def test_flashing_is_the_worst_of_all(tmp_path: Path) -> None:
    survey = _cases(tmp_path, {"p2 [bar a]": 0.5}, {"Temperature [deg C]": 150, "p2 [bar a]": 4.2})
    assert survey.findings.regime.tolist() == ["choked", "flashing"]
    assert survey.items[0].worst == 1


def test_an_item_with_a_case_without_an_answer(tmp_path: Path) -> None:
    survey = _cases(tmp_path, {}, {"FL": None})
    item = survey.items[0]
    assert (item.worst, item.unanswered, item.fails) == (0, 1, False)
    # The case without an answer may be the worst: the item is not called clear for the sake of the other.
    assert (item.regime, item.basis) == (None, None)
    assert "1 without an answer" in item.why
    assert survey.exit_code == 1
    nothing = _cases(tmp_path, {"FL": None}).items[0]
    assert (nothing.worst, nothing.regime, nothing.why) == (-1, None, "no case has an answer")
    assert math.isnan(nothing.margin)


def test_the_objects_of_the_cases(tmp_path: Path) -> None:
    headings, rows = kestrel_rows()
    data = as_json(survey_list(write_xlsx(tmp_path / "list.xlsx", headings, rows)))
    assert json.loads(json.dumps(data, allow_nan=False)) == data
    assert len(data["cases"]) == len(rows)
    for case in data["cases"]:
        assert set(PROMISED) <= set(case)
        assert case["units"] == "metric"
        assert case["regime"] in (*ORDER, None)
        assert (case["regime"] is None) == bool(case["errors"])
        assert all(isinstance(x, str) for key in ("cautions", "errors") for x in case[key])
        assert list(case["limits"]) == ["incipient", "constant", "damage", "vibration", "choked"]
        for key in ("coefficient", "travel", "choked_drop", "sigma", "margin", *case["limits"]):
            value = case["limits"].get(key, case.get(key))
            assert value is None or isinstance(value, float), key
        assert isinstance(case["choked"], bool)
        assert isinstance(case["flashing"], bool)
    assert data["units"]["coefficient"] == "Kv"
    assert data["units"]["pressure"] == "bar"


def test_the_same_numbers_in_us_units(tmp_path: Path) -> None:
    survey = _cases(tmp_path, {})
    metric, us = (as_json(survey, system)["cases"][0] for system in ("metric", "us"))
    # 1 bar is 14.5037738 psi, 1 Kv is 1.156 Cv (exact definitions; IEC 60534-1), dimensionless numbers stay.
    assert us["choked_drop"] == pytest.approx(14.5037738 * metric["choked_drop"], rel=1e-8)
    assert us["coefficient"] == pytest.approx(1.156 * metric["coefficient"], rel=1e-12)
    assert us["inputs"]["t"] == pytest.approx(68.0)
    assert us["sigma"] == metric["sigma"]
    assert as_json(survey, "us")["units"]["pressure"] == "psi"


def test_sources_of_the_properties(tmp_path: Path) -> None:
    columns = dict(zip(HEADINGS, GOOD, strict=True)) | {"pv [bar a]": 0.02, "Mass flow [t/h]": 46}
    del columns["Flow [m3/h]"]
    survey = survey_list(write_csv(tmp_path / "list.csv", list(columns), [list(columns.values())]))
    case = as_json(survey)["cases"][0]
    assert case["sources"]["pv"] == "given"
    assert case["sources"]["density"] == case["sources"]["pc"] == case["sources"]["flow"] == "computed"
    assert case["inputs"]["pv"] == pytest.approx(0.02)
    # 46 t/h of water at 20 C and 5.8 bar, 998.4 kg/m3 (IAPWS-95, as in the tests of liquids).
    assert case["inputs"]["flow"] == pytest.approx(46_000 / 998.42, rel=1e-4)


def test_running_twice_gives_the_same(tmp_path: Path) -> None:
    headings, rows = kestrel_rows()
    path = write_xlsx(tmp_path / "list.xlsx", headings, rows)
    assert as_json(survey_list(path)) == as_json(survey_list(path))
    assert len(survey_list(path).reading.fingerprint) == 64
