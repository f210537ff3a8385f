"""A plain list of items and operating cases in; verdicts, margins and what is wrong with the list out.

>>> from lowpoint.survey import survey_list
>>> survey = survey_list("valves.xlsx", elevation=16.0)  # doctest: +SKIP
>>> [(item.tag, item.regime, item.why) for item in survey.items if item.fails]  # doctest: +SKIP
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

__all__ = ["Survey", "survey_list"]

if TYPE_CHECKING:
    from lowpoint.survey.model import Survey
    from lowpoint.survey.surveying import survey_list


def __getattr__(name: str) -> Any:
    # The form of a list needs the names of its columns only, not the physics behind them.
    if name == "survey_list":
        from lowpoint.survey.surveying import survey_list

        return survey_list
    if name == "Survey":
        from lowpoint.survey.model import Survey

        return Survey
    raise AttributeError(f"module 'lowpoint.survey' has no attribute {name!r}")
