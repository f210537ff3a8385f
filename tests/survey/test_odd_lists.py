"""Lists with anything anywhere: never a crash, a regime exactly where nothing is wrong, never clear without a limit."""

from __future__ import annotations

import json
import random
from pathlib import Path

import pytest

from lowpoint.survey import survey_list
from lowpoint.survey.as_json import as_json
from survey_lists import GOOD, HEADINGS, kestrel_rows, write_csv, write_xlsx

MORE = ("Kind", "Outlet into", "Rise to the place [m]", "Pressure there [bar g]", "Bore [mm]", "Bores [mm]", "Holes",
        "Viscosity [cSt]", "Trim", "Form", "Scale method", "Table", "xFz", "Pipe wall [mm]")  # fmt: skip
ANYTHING = (None, 0, -1, 1e300, 1e-300, "x", "", "-", "typical", "estimate", "valve", "plates", "orifice", "submerged",
            "free jet", "falling leg", "12;14", "1,5", True, 5, 1.0, 100, "full", "reduced", "downstream", "xf",
            "tullis", "#N/A", "=1+1", "water", "30;40")  # fmt: skip


@pytest.mark.parametrize("seed", range(12))
def test_anything_anywhere(seed: int, tmp_path: Path) -> None:
    chance = random.Random(seed)
    headings, good = kestrel_rows()
    headings = [*headings, *MORE]
    rows = []
    for _ in range(25):
        row = [*chance.choice(good), *[None] * len(MORE)]
        for _ in range(chance.randint(1, 8)):
            row[chance.randrange(len(row))] = chance.choice(ANYTHING)
        rows.append(row)
    write = write_csv if seed % 2 else write_xlsx
    survey = survey_list(write(tmp_path / ("list.csv" if seed % 2 else "list.xlsx"), headings, rows))
    data = json.loads(json.dumps(as_json(survey), allow_nan=False))
    assert len(data["cases"]) == 25
    for case in data["cases"]:
        assert (case["regime"] is None) == bool(case["errors"]), case
        assert case["regime"] != "clear" or case["limits"]["incipient"] is not None
        assert not (case["fails"] and case["errors"])
    assert {i for item in survey.items for i in item.rows} == set(range(25))


def test_a_sheet_named_example_is_read_where_it_is_the_only_list(tmp_path: Path) -> None:
    survey = survey_list(write_xlsx(tmp_path / "list.xlsx", HEADINGS, [GOOD], "Example"))
    assert survey.findings.regime.tolist() == ["clear"]
