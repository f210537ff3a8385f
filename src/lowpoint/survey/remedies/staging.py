"""Staged trim: the fewest stages of equal index such that every stage of every case keeps the item's limit.

Pressures between the stages by the rule of LP_STAGE_PRESSURES, ``p_i - pv = r (p_(i-1) - pv)``; each stage is judged
as a valve of its own with the limits of this one, carried to the head before the stage. The trim has one number of
stages in all cases.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import numpy as np

from lowpoint.physics.stages import MOST, stage_pressures
from lowpoint.survey.limiting import LIMITS, stated
from lowpoint.survey.model import Cases
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.remedies import wording
from lowpoint.survey.remedies.failing import Failing
from lowpoint.survey.remedies.trying import Trial, advice, tried

__all__ = ["staged", "staged_trims"]

_VENDOR = "the number of stages is an estimate: the vendor of a staged trim must confirm it, its limits and FL by test"
_SIZE = "each stage was judged as a bare valve with this one's FL and limits; the trim's coefficient is {}"
_REDUCERS = "the reducers stand before and behind the whole trim and were left out of its stages"
_START = "start-up, shut-in and a blocked stage load single stages with more than their share"
_TOO_MANY = (
    f"staged trim: more than {MOST} stages of equal index would be needed in {{}}, which are not built; raise the "
    "outlet pressure as well"
)


def staged_trims(failing: Failing) -> Iterator[tuple[int, Remedy]]:
    """Number of an item and its remedy, for valves that do not flash: staging cannot help flashing."""
    wanted = failing.any(failing.bad) & ~failing.any(failing.found.flashing | (failing.cases.kind != "valve"))
    numbers, failing = np.flatnonzero(wanted), failing.only(wanted)
    if not failing.count:
        return
    count = _counts(failing)
    for item in np.flatnonzero(count > MOST).tolist():
        rows = failing.rows_of(item)
        worst = rows.start + int(np.argmin(failing.found.margin[rows]))
        yield int(numbers[item]), advice(failing, item, "staged trim", _TOO_MANY.format(failing.name(worst)))
    possible = count <= MOST
    numbers, failing, count = numbers[possible], failing.only(possible), count[possible]
    if not failing.count:
        return
    trial = _tried(failing, count)
    for item in range(failing.count):
        yield int(numbers[item]), _remedy(trial, failing, item, int(count[item]))


def _remedy(trial: Trial, failing: Failing, item: int, count: int) -> Remedy:
    rows = trial.rows_of(item)
    worst = rows.start + int(np.argmin(trial.found.margin[rows]))
    of = int(trial.of[worst])
    mine = np.flatnonzero(trial.of[rows] == of) + rows.start
    pressures = [float(failing.cases.p1[of]), *(float(p) for p in trial.cases.p2[mine])]
    index = float(trial.found.sigma[worst])
    shown = " to ".join([*(wording.absolute(p, bare=True) for p in pressures[:-1]), wording.absolute(pressures[-1])])
    brief = f"staged trim of {count} stages"
    what = f"{brief}, each with an index of {index:.3g} in {failing.name(of)} ({shown})"
    figures = {"stages": (float(count), "ratio"), "index of each stage": (index, "ratio")}
    figures |= {f"pressure after stage {i}" if i else "pressure before the trim": (p, "pressure")
                for i, p in enumerate(pressures)}  # fmt: skip
    needed = float(failing.found.coefficient[failing.rows_of(item)].max())
    figures["coefficient of the whole trim"] = (needed, "coefficient")
    cautions = [_VENDOR, _SIZE.format(wording.kv(needed)), _START]
    piped = ~np.isnan(failing.cases.pipe_in[of]) or ~np.isnan(failing.cases.pipe_out[of])
    cautions += [_REDUCERS] if piped else []
    return trial.remedy(item, "staged trim", what, figures, cautions, brief=brief)


def _counts(failing: Failing) -> Any:
    """Fewest stages of each item; one above the most where these do not do. More stages never do worse."""
    low, high = np.ones(failing.count, int), np.full(failing.count, MOST + 1)
    step = np.full(failing.count, MOST)
    while (open_ := high - low > 1).any():
        part = failing.only(open_)
        good = _tried(part, step[open_]).cures
        high[open_] = np.where(good, step[open_], high[open_])
        low[open_] = np.where(good, low[open_], step[open_])
        step = (low + high) // 2
    return high


def _tried(failing: Failing, count: Any) -> Trial:
    cases, of = staged(failing, count[failing.owner])
    return tried(failing, cases, of)


def staged(failing: Failing, count: Any) -> tuple[Cases, Any]:
    """Every case as ``count`` (one a row) cases of its stages, and the row that each stands for."""
    cases, found = failing.cases, failing.found
    between = stage_pressures(cases.p1, cases.p2, cases.pv, count.astype(float))
    of = np.repeat(np.arange(cases.count), count)
    stage = np.arange(len(of)) - np.repeat(np.cumsum(count) - count, count)
    rows = cases.take(of)
    limits = stated(cases, found.travel)
    none, nothing = np.array(None, object), np.full(len(of), np.nan)
    columns: dict[str, Any] = {name: limits[name][of] for name in LIMITS}
    columns |= dict.fromkeys(("pipe_in", "pipe_out", "rated", "pipe_wall"), nothing)
    columns |= {name: np.broadcast_to(none, len(of)).copy() for name in ("form", "table", "characteristic", "outlet")}
    tags = [f"{tag} stage {number}" for tag, number in zip(rows.tag, (stage + 1).tolist(), strict=True)]
    columns["tag"] = np.array(tags, object)
    columns |= {"p1": between[of, stage], "p2": between[of, stage + 1], "fl": found.fl[of]}
    xfz = np.where(np.isnan(rows.xfz), _xfz_at_travel(failing)[of], rows.xfz)
    source = {**rows.source, "fl": np.broadcast_to(np.array("given", object), len(of)).copy()}
    return replace(rows, **columns, xfz=xfz, source=source), of


def _xfz_at_travel(failing: Failing) -> Any:
    """xFz of the valve's table at the opening, which a stage, having no table, must be given."""
    found = np.full(failing.cases.count, np.nan)
    for name, table in failing.cases.tables.items():
        if table.xfz is not None:
            found = np.where(failing.cases.table == name, table.at("xfz", failing.found.travel), found)
    return found
