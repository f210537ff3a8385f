"""Each remedy applied passes when surveyed again; just short of its number, it does not. Drawn items, several cases."""

from __future__ import annotations

import tempfile
from collections import Counter
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from lowpoint.survey import Survey, survey_list
from lowpoint.survey.items import ORDER
from lowpoint.survey.model import Cases, Item
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.remedies import remedies_of
from lowpoint.survey.surveying import surveyed
from lowpoint.units import GRAVITY
from survey_lists import write_csv

CASES = ("minimum", "normal", "maximum")
WITHOUT_TRIAL = ("flashing",)


def _items() -> st.SearchStrategy[dict[str, Any]]:
    """What an item has once: a valve with some limits, size effects and reducers, or a plate."""
    valve = st.fixed_dictionaries({
        "Kind": st.just("valve"), "FL": st.floats(0.6, 0.95).map(lambda x: round(x, 3)),
        "Incipient": st.sampled_from([None, 2.2, 3.1]), "Constant": st.sampled_from([None, 1.9]),
        "Damage": st.sampled_from([None, 1.3, 1.6]),
        "Limit to keep": st.sampled_from([None, "incipient", "damage", "choked"]),
        "DN": st.sampled_from([50, 80, 150]), "D1 (mm)": st.sampled_from([None, 1.0, 1.5]),
        "Kvs": st.sampled_from([None, 25, 160, 630]), "Characteristic": st.sampled_from([None, "linear"]),
        "Test size [mm]": st.just(50), "Size exponent": st.sampled_from([None, 0.08]),
        "Test head [bar]": st.just(6), "Pressure exponent": st.sampled_from([None, 0.12]),
    })  # fmt: skip
    plate = st.fixed_dictionaries({
        "Kind": st.just("orifice"), "D1 (mm)": st.sampled_from([102.3, 154.05]), "Bore [mm]": st.floats(0.3, 0.65),
        "Limit to keep": st.sampled_from([None, "constant", "choked"]),
    })  # fmt: skip
    return st.one_of(valve, valve, plate)


@st.composite
def rows(draw: st.DrawFn, gauge: bool) -> list[dict[str, Any]]:
    """A list: items of one to three cases, liquids hot and cold, pressures of plants."""
    found: list[dict[str, Any]] = []
    letter = "g" if gauge else "a"
    for number in range(draw(st.integers(1, 4))):
        item = draw(_items())
        if item["Kind"] == "orifice":
            item["Bore [mm]"] = round(item["Bore [mm]"] * item["D1 (mm)"], 2)
        elif item["D1 (mm)"]:
            item["D1 (mm)"] *= item["DN"]
        liquid, t = draw(st.sampled_from([("water", 18), ("water", 95), ("water", 150), ("sea water", 25)]))
        inlet = draw(st.floats(5.5, 40.0))
        for case in CASES[: draw(st.integers(1, 3))]:
            p1 = inlet * draw(st.floats(0.9, 1.1))
            found.append(item | {
                "Tag": f"30-X-{number}", "Case": case, "Liquid": liquid, "Salinity [g/kg]": 38,
                "Temperature [deg C]": t, "Flow [m3/h]": round(draw(st.floats(5.0, 150.0)), 2),
                f"p1 [bar {letter}]": round(p1, 3), f"p2 [bar {letter}]": round(p1 * draw(st.floats(0.08, 0.8)), 3),
                "Atmosphere [bar]": 1.013,
            })  # fmt: skip
    return found


def _survey(listed: list[dict[str, Any]]) -> Survey:
    names = list(dict.fromkeys(name for row in listed for name in row))
    with tempfile.TemporaryDirectory() as folder:
        return survey_list(write_csv(Path(folder, "list.csv"), names, [[r.get(n) for n in names] for r in listed]))


def _again(survey: Survey, cases: Cases) -> Survey:
    return surveyed(cases, survey.reading)


def _fails(survey: Survey) -> bool:
    return any(item.fails or item.unanswered for item in survey.items)


@dataclass(frozen=True)
class Tried:
    """A remedy with the item that it is for, and the survey that it came from."""

    survey: Survey
    item: Item
    remedy: Remedy
    cases: Cases

    @property
    def figures(self) -> dict[str, float]:
        return {name: value for name, (value, _) in self.remedy.figures.items()}

    @property
    def before(self) -> Cases:
        """The item's cases as they were."""
        return self.survey.cases.take(np.array(self.item.rows))


def _holds(it: Tried) -> None:
    """It passes, with the margin and the regimes that it says."""
    again = _again(it.survey, it.cases)
    assert not _fails(again), (it.remedy.text, [i.why for i in again.items], again.findings.errors)
    assert float(np.nanmin(again.findings.margin)) == pytest.approx(it.remedy.margin, rel=1e-6, abs=1e-6)
    assert len(it.remedy.verdicts) == len(it.item.rows)
    worst = min(again.findings.regime.tolist(), key=ORDER.index)
    assert min((word for word in it.remedy.verdicts if word), key=ORDER.index) == worst


# --- just short of the number ----------------------------------------------------------------------------------------


def _back_pressure(it: Tried) -> None:
    """One per cent less of its rise fails again in every case that was raised."""
    rise = it.cases.p2 - it.before.p2
    less = _again(it.survey, it.cases.changed(p2=it.before.p2 + 0.99 * rise))
    raised = rise > 0.0
    assert raised.any()
    assert less.findings.fails[raised].all()


def _lower_location(it: Tried) -> None:
    """A tenth of a metre less (the step in which it is named) fails again, for want of rho g h."""
    less = 0.11 * it.cases.density * GRAVITY
    assert _fails(_again(it.survey, it.cases.changed(p1=it.cases.p1 - less, p2=it.cases.p2 - less)))


def _lower_temperature(it: Tried) -> None:
    """Half a kelvin more fails again."""
    cooled = it.cases.t < it.before.t
    columns = {name: np.where(cooled, np.nan, getattr(it.cases, name)) for name in ("pv", "density")}
    assert _fails(_again(it.survey, it.cases.changed(t=np.where(cooled, it.cases.t + 0.5, it.cases.t), **columns)))


def _recovery_factor(it: Tried) -> None:
    """A little less FL, a little higher limit fails again."""
    if "FL at least" in it.figures:
        wanted = it.figures["FL at least"]
        at_it = np.isclose(it.cases.fl, wanted, rtol=0.0, atol=1e-9)
        assert at_it.any()
        assert _fails(_again(it.survey, it.cases.changed(fl=np.where(at_it, wanted - 0.0021, it.cases.fl))))
    if "limit at most" in it.figures:
        wanted = it.figures["limit at most"]
        columns = {name: np.where(np.isclose(getattr(it.cases, name), wanted, rtol=0.0, atol=1e-9), wanted + 0.0021,
                                  getattr(it.cases, name)) for name in ("incipient", "constant", "damage")}  # fmt: skip
        assert _fails(_again(it.survey, it.cases.changed(**columns)))


def _staged_trim(it: Tried) -> None:
    """One stage less fails: pressures by p_i - pv = (p1 - pv) ((p2-pv)/(p1-pv))^(i/n), stage after stage."""
    fewer = int(it.figures["stages"]) - 1
    before = it.before
    failed = []
    for stage in range(fewer):
        head, last = before.p1 - before.pv, before.p2 - before.pv
        p1, p2 = (before.pv + head * (last / head) ** ((stage + i) / fewer) for i in (0, 1))
        bare = dict.fromkeys(("pipe_in", "pipe_out", "rated"), np.nan)
        failed.append(_fails(_again(it.survey, before.changed(p1=p1, p2=p2, **bare, characteristic=None))))
    assert any(failed)


def _larger_valve(it: Tried) -> None:
    """It is at most 90 % open; 1 % less and it is more open than that, or too small."""
    travel = _again(it.survey, it.cases).findings.travel
    if not np.isnan(travel).any():
        assert travel.max() <= 0.9 + 1e-9
        less = _again(it.survey, it.cases.changed(rated=0.99 * it.cases.rated)).findings
        assert less.travel.max() > 0.9 - 1e-3


def _split(it: Tried) -> None:
    """Half the flow each."""
    assert it.cases.flow == pytest.approx(0.5 * it.before.flow, rel=1e-12)


def _plate_downstream(it: Tried) -> None:
    """The plates' inlet is the valve's outlet, and without them the valve fails."""
    plate = it.cases.kind != "valve"
    assert it.cases.p1[plate] == pytest.approx(it.cases.p2[~plate], rel=1e-12)
    assert (it.cases.p2[plate] == it.before.p2).all()
    alone = it.cases.take(np.flatnonzero(~plate)).changed(p2=it.before.p2)
    assert _fails(_again(it.survey, alone))


def _plates_in_series(it: Tried) -> None:
    """Between the same pressures, with the wanted flow passing."""
    assert (it.cases.p1 == it.before.p1).all()
    assert (it.cases.p2 == it.before.p2).all()
    assert (_again(it.survey, it.cases).findings.passed >= it.before.flow * (1.0 - 1e-9)).all()


SHORT = {
    "back-pressure": _back_pressure, "lower location": _lower_location, "lower temperature": _lower_temperature,
    "higher recovery factor": _recovery_factor, "staged trim": _staged_trim, "larger valve": _larger_valve,
    "split": _split, "plate downstream": _plate_downstream, "plates in series": _plates_in_series,
}  # fmt: skip
SEEN: Counter[str] = Counter()


def _try_all(survey: Survey) -> None:
    found = remedies_of(survey)
    assert [*found] == [item.tag for item in survey.items if item.fails]
    for item in survey.items:
        flashes = bool(survey.findings.flashing[list(item.rows)].any())
        kinds = {remedy.kind for remedy in found.get(item.tag, ())}
        assert ("flashing" in kinds) is (flashes and item.fails)
        if flashes:
            assert not kinds & {"staged trim", "plate downstream", "plates in series", "split", "larger valve"}
        for remedy in found.get(item.tag, ()):
            assert remedy.cures or remedy.cautions or remedy.cases is None
            if remedy.cures:
                assert remedy.cases is not None
                tried = Tried(survey, item, remedy, remedy.cases)
                _holds(tried)
                SHORT[remedy.kind](tried)
                SEEN[remedy.kind] += 1


@settings(max_examples=24)
@given(rows(gauge=False))
def test_remedies_hold_in_absolute_pressures(listed: list[dict[str, Any]]) -> None:
    _try_all(_survey(listed))


@settings(max_examples=10)
@given(rows(gauge=True))
def test_remedies_hold_in_gauge_pressures(listed: list[dict[str, Any]]) -> None:
    _try_all(_survey(listed))


FIXED = {"Kind": "valve", "Case": "normal", "Liquid": "water", "Temperature [deg C]": 18, "FL": 0.9, "DN": 80,
         "Atmosphere [bar]": 1.013, "Characteristic": "linear", "Rangeability": 50}  # fmt: skip
TOO_SMALL = FIXED | {"Tag": "30-X-1", "Kvs": 25, "Damage": 1.3, "Incipient": 2.2, "Flow [m3/h]": 60,
                     "p1 [bar a]": 8, "p2 [bar a]": 5}  # fmt: skip
FIERCE = FIXED | {"Tag": "30-X-2", "Kvs": 63, "Damage": 1.6, "Incipient": 3.1, "Flow [m3/h]": 40,
                  "p1 [bar a]": 12, "p2 [bar a]": 2}  # fmt: skip
HOT = FIXED | {"Tag": "30-X-3", "Kvs": 63, "Damage": 1.6, "Flow [m3/h]": 40, "Temperature [deg C]": 150,
               "p1 [bar a]": 12, "p2 [bar a]": 6.5}  # fmt: skip
BORED = {"Kind": "orifice", "Tag": "30-X-4", "Case": "normal", "Liquid": "water", "Temperature [deg C]": 18,
         "D1 (mm)": 102.3, "Bore [mm]": 45, "Limit to keep": "constant", "Flow [m3/h]": 60,
         "p1 [bar a]": 14, "p2 [bar a]": 3, "Atmosphere [bar]": 1.013}  # fmt: skip


def test_every_kind_of_cure_holds_somewhere() -> None:
    """Four items that need different cures: between them, every kind."""
    SEEN.clear()
    _try_all(_survey([TOO_SMALL, FIERCE, HOT, BORED]))
    assert set(SEEN) == set(SHORT)


def test_remedies_of_a_list_without_items() -> None:
    survey = _survey([{"Tag": "30-X-1", "Flow [m3/h]": None}])
    assert remedies_of(replace(survey, items=())) == {}
