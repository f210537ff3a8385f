"""Where p2 is at or below the vapour pressure: no remedy for cavitation helps, and what practice does instead."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from lowpoint.survey.outcome import Remedy
from lowpoint.survey.remedies import wording
from lowpoint.survey.remedies.failing import Failing
from lowpoint.survey.remedies.trying import advice

__all__ = ["flashing_advice"]

_TEXT = (
    "flashing: staging cannot help, nor a higher FL or a plate behind the valve, since p2 {} is not above pv {} in {}"
)
_BRIEF = "flashing: staging cannot help; hardened trim, an angle valve into the vessel, a wide outlet (common practice)"
PRACTICE = (
    "live with the vapour: hardened trim and outlet, an angle valve that blows straight into the vessel, its outlet "
    "and the pipe behind it wide enough for the velocity of the mixture (common practice)",
    "place the valve at the nozzle of the receiving or flash vessel, so that the liquid boils there and not in a pipe "
    "(common practice)",
    "end it: p2 above pv by a higher back-pressure, or a cooler liquid; see those remedies where they are named, and "
    "keep in mind that what stops flashing may still cavitate (common practice)",
)


def flashing_advice(failing: Failing) -> Iterator[tuple[int, Remedy]]:
    """Number of an item and the advice, for every item with a case that flashes."""
    for item in np.flatnonzero(failing.any(failing.found.flashing)).tolist():
        rows = failing.rows_of(item)
        p2, pv = failing.cases.p2[rows], failing.cases.pv[rows]
        worst = int(np.argmin(np.where(failing.found.flashing[rows], p2 - pv, np.inf)))
        text = _TEXT.format(wording.absolute(float(p2[worst])), wording.absolute(float(pv[worst])),
                            failing.name(rows.start + worst))  # fmt: skip
        yield item, advice(failing, item, "flashing", text, PRACTICE, _BRIEF)
