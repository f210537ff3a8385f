"""What cures an item that fails: each kind of remedy in a module of its own, tried by the core that judged the item.

>>> from lowpoint.survey import survey_list
>>> from lowpoint.survey.remedies import remedies_of
>>> survey = survey_list("valves.xlsx", elevation=16.0)  # doctest: +SKIP
>>> remedies_of(survey)["24-FCV-402"][0].text  # doctest: +SKIP
"""

from __future__ import annotations

from lowpoint.survey.remedies.ranking import remedies_of

__all__ = ["remedies_of"]
