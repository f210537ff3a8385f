"""What cells show where a liquid has no such property, and what LP_WHY says of it; lazy imports and memory."""

from __future__ import annotations

import subprocess
import sys
from typing import Any

import numpy as np
import pytest

from lowpoint import functions
from lowpoint.cells import call, reason
from lowpoint.physics import fluids, seawater
from lowpoint.physics.liquids import each
from lowpoint.problems import CellError

NO_ANSWER: list[tuple[str, list[Any], str]] = [
    # Freezing and critical points from memory: water 0.01 and 373.95 C, benzene 5.5, CO2 -56.6 and 30.98, n-hexane
    # 234.7, cyclohexane 6.5 and about 0.05 K higher a bar.
    ("LP_VAPOUR_PRESSURE", ["water", -0.5], "below the freezing point"),
    ("LP_VAPOUR_PRESSURE", ["benzene", 4.0], "below the freezing point"),
    ("LP_VAPOUR_PRESSURE", ["carbon dioxide", -60.0], "below the freezing point"),
    ("LP_VAPOUR_PRESSURE", ["sea water", -1.0], "below the freezing point"),
    ("LP_VAPOUR_PRESSURE", ["water", 374.5], "above the critical temperature"),
    ("LP_VAPOUR_PRESSURE", ["carbon dioxide", 31.5], "above the critical temperature"),
    ("LP_VAPOUR_PRESSURE", ["sea water", 121.0], "above 120 C"),
    ("LP_DENSITY", ["water", -0.5, 5.0], "below the freezing point"),
    ("LP_DENSITY", ["water", 400.0, 300.0], "above the critical temperature"),
    ("LP_DENSITY", ["water", 120.0, 1.5], "boils at this temperature and pressure"),
    ("LP_DENSITY", ["propane", 20.0, 8.0], "boils at this temperature and pressure"),
    ("LP_DENSITY", ["sea water", 100.0, 0.9], "boils at this temperature and pressure"),
    ("LP_DENSITY", ["sea water", 121.0, 5.0], "above 120 C"),
    ("LP_DENSITY", ["cyclohexane", 8.0, 200.0], "frozen"),
    ("LP_DENSITY", ["propane", 20.0, 20000.0], "beyond the range of the equation"),
    ("LP_VISCOSITY", ["water", 120.0, 1.5], "boils at this temperature and pressure"),
    ("LP_VISCOSITY", ["sea water", 50.0, 0.05], "boils at this temperature and pressure"),
    ("LP_VISCOSITY", ["acetone", 20.0], "no published equation gives the viscosity"),
    ("LP_VISCOSITY", ["vinyl chloride", 20.0, 10.0], "no published equation gives the viscosity"),
    ("LP_VISCOSITY", ["water", 374.5], "above the critical temperature"),
    ("LP_VISCOSITY", ["cyclohexane", 8.0, 200.0], "frozen"),
    ("LP_SOUND_SPEED", ["water", 120.0, 1.5], "boils at this temperature and pressure"),
    ("LP_SOUND_SPEED", ["sea water", 20.0, 0.01], "boils at this temperature and pressure"),
    ("LP_SOUND_SPEED", ["sea water", 31.0], "from 2 to 30 C"),
    ("LP_SOUND_SPEED", ["sea water", 50.0, 0.1225], "from 2 to 30 C"),  # water would boil here, sea water does not
    ("LP_SOUND_SPEED", ["sea water", 1.0, 5.0], "from 2 to 30 C"),
    ("LP_SATURATION_TEMPERATURE", ["water", 0.006], "below the vapour pressure at the freezing point"),
    ("LP_SATURATION_TEMPERATURE", ["water", 221.0], "above the critical pressure"),
    ("LP_SATURATION_TEMPERATURE", ["carbon dioxide", 5.0], "below the vapour pressure at the freezing point"),
    ("LP_SATURATION_TEMPERATURE", ["sea water", 2.5], "0 to 120 C"),
    ("LP_SATURATION_TEMPERATURE", ["sea water", 0.005], "below the vapour pressure at the freezing point"),
    ("LP_ALLOWED_TEMPERATURE", ["water", 10.0, 5.0, 2.5], "too large for this limit at any temperature"),
    ("LP_ALLOWED_TEMPERATURE", ["water", 10.0, 5.0, 1.9999], "even at the freezing point"),
    ("LP_ALLOWED_TEMPERATURE", ["water", 500.0, 450.0, 1.2], "holds up to the critical point"),
    ("LP_ALLOWED_TEMPERATURE", ["sea water", 20.0, 15.0, 1.5], "0 to 120 C"),
]  # fmt: skip


@pytest.mark.parametrize(("name", "args", "words"), NO_ANSWER, ids=lambda x: str(x) if isinstance(x, list) else "")
def test_no_answer(name: str, args: list[Any], words: str) -> None:
    assert call(name, args) is CellError.NUM
    assert words in reason(name, args)
    assert reason(name, args).startswith(f"{name}: ")


MIXED: list[tuple[str, list[Any], str]] = [
    # The second row of a range has no answer, the first and third have one, all other arguments are single.
    ("LP_DENSITY", ["water", [[20.0], [250.0], [20.0]], 10.0], "boils at this temperature and pressure"),
    ("LP_DENSITY", ["water", 150.0, [[10.0], [1.0], [10.0]]], "boils at this temperature and pressure"),
    ("LP_DENSITY", [[["water"], ["propane"], ["water"]], 20.0, 5.0], "boils at this temperature and pressure"),
    ("LP_DENSITY", [[["water"], ["benzene"], ["water"]], 3.0, 5.0], "below the freezing point"),
    ("LP_VISCOSITY", [[["water"], ["acetone"], ["water"]], 20.0], "no published equation"),
    ("LP_VAPOUR_PRESSURE", [[["water"], ["carbon dioxide"], ["water"]], 80.0], "above the critical temperature"),
    ("LP_SOUND_SPEED", [[["water"], ["sea water"], ["water"]], 60.0, 5.0], "from 2 to 30 C"),
    ("LP_SATURATION_TEMPERATURE", [[["water"], ["carbon dioxide"], ["water"]], 3.0], "at the freezing point"),
    ("LP_ALLOWED_TEMPERATURE", ["water", 10.0, 5.0, [[1.5], [2.5], [1.5]]], "at any temperature"),
]  # fmt: skip


@pytest.mark.parametrize(("name", "args", "words"), MIXED, ids=range(len(MIXED)))
def test_each_row_of_a_range_is_judged_on_its_own(name: str, args: list[Any], words: str) -> None:
    cells = call(name, args)
    assert isinstance(cells[0][0], float)
    assert cells[1][0] is CellError.NUM
    assert cells[2][0] == cells[0][0]
    said = call("LP_WHY", [name, *args])
    assert words in said[1][0]
    assert words not in said[0][0] + said[2][0]


CAUTIONS: list[tuple[str, list[Any], str]] = [
    ("LP_VAPOUR_PRESSURE", ["brine", 20.0], "give its own"),
    ("LP_VAPOUR_PRESSURE", ["sea water", 90.0], "extrapolated above 80 C"),
    ("LP_VAPOUR_PRESSURE", ["water", 20.0, 20.0], "left aside"),
    ("LP_DENSITY", ["sea water", 20.0], "correlations for atmospheric pressure"),
    ("LP_DENSITY", ["propane", 20.0, 10.0, 12.0], "left aside"),
    ("LP_DENSITY", ["n-butane", 20.0, 200.0], "above those that the equation of state was fitted to"),
    ("LP_VISCOSITY", ["brine", 20.0], "give its own"),
    ("LP_SOUND_SPEED", ["sea water", 20.0], "Mackenzie"),
    ("LP_SATURATION_TEMPERATURE", ["sea water", 1.0], "35 g/kg was taken"),
    ("LP_CRITICAL_PRESSURE", ["sea water"], "critical pressure of water"),
    ("LP_ALLOWED_TEMPERATURE", ["sea water", 5.0, 4.0, 4.5], "35 g/kg was taken"),
    ("LP_ALLOWED_TEMPERATURE", ["water", 5.0, 4.0, 0.9], "the liquid flashes"),
    ("LP_ALLOWED_TEMPERATURE", ["water", 5.0, 4.0, 1.2, "xf"], "the liquid flashes"),
]  # fmt: skip


@pytest.mark.parametrize(("name", "args", "words"), CAUTIONS, ids=range(len(CAUTIONS)))
def test_cautions(name: str, args: list[Any], words: str) -> None:
    assert isinstance(call(name, args), float)
    said = reason(name, args)
    assert said.startswith("caution: ")
    assert words in said


@pytest.mark.parametrize(
    ("name", "args"),
    [
        ("LP_VAPOUR_PRESSURE", ["water", 20.0]), ("LP_VAPOUR_PRESSURE", ["sea water", 20.0]),
        ("LP_VAPOUR_PRESSURE", ["brine", 20.0, 70.0]), ("LP_VAPOUR_PRESSURE", ["water", 20.0, 0.0]),
        ("LP_DENSITY", ["water", 20.0, 5.0]), ("LP_SATURATION_TEMPERATURE", ["propane", 10.0]),
        ("LP_CRITICAL_PRESSURE", ["R134a"]), ("LP_ALLOWED_TEMPERATURE", ["water", 10.0, 6.0, 1.8]),
    ],
)  # fmt: skip
def test_nothing_to_say(name: str, args: list[Any]) -> None:
    assert reason(name, args) == "ok"


@pytest.mark.parametrize("salinity", [-1.0, 120.5, 1000.0])
def test_salinity_out_of_range(salinity: float) -> None:
    assert call("LP_VAPOUR_PRESSURE", ["sea water", 20.0, salinity]) is CellError.NUM
    said = reason("LP_VAPOUR_PRESSURE", ["sea water", 20.0, salinity])
    assert "salinity must be" in said
    assert "g/kg" in said


def test_salt_lowers_the_vapour_pressure_and_a_blank_is_35() -> None:
    given = [call("LP_VAPOUR_PRESSURE", ["sea water", 20.0, s]) for s in (0.0, 10.0, 35.0, 120.0)]
    assert given == sorted(given, reverse=True)
    assert given[0] == call("LP_VAPOUR_PRESSURE", ["water", 20.0])
    assert (
        given[2]
        == call("LP_VAPOUR_PRESSURE", ["sea water", 20.0, None])
        == call("LP_VAPOUR_PRESSURE", ["sea water", 20.0])
    )


@pytest.mark.parametrize("fluid", ["water", "sea water"])
def test_the_freezing_point_of_water_counts_as_liquid(fluid: str) -> None:
    """0 C is 0.01 K below the triple point, and below the melting line at one atmosphere; nobody means ice."""
    # From memory: water at 0 C, 1 atm: 999.84 kg/m3, 1.792 mPa.s, 6.112 mbar.
    assert call("LP_DENSITY", [fluid, 0.0, 1.01325]) == pytest.approx(999.84 if fluid == "water" else 1028.1, rel=3e-4)
    assert call("LP_VISCOSITY", [fluid, 0.0, 1.01325]) == pytest.approx(1.792 if fluid == "water" else 1.89, rel=0.01)
    pv = call("LP_VAPOUR_PRESSURE", [fluid, 0.0])
    assert pv == pytest.approx(0.006112 if fluid == "water" else 0.006112 * 0.9816, rel=1e-3)
    assert call("LP_SATURATION_TEMPERATURE", [fluid, pv]) == pytest.approx(0.0, abs=1e-4)


def test_the_critical_point_itself() -> None:
    # IAPWS: 647.096 K, 220.64 bar.
    assert call("LP_VAPOUR_PRESSURE", ["water", 373.946]) == pytest.approx(220.64, rel=1e-6)
    assert call("LP_SATURATION_TEMPERATURE", ["water", call("LP_CRITICAL_PRESSURE", ["water"])]) == pytest.approx(
        373.946, abs=1e-6
    )


def test_close_to_saturation_the_liquid_is_found() -> None:
    """Just above and, within 0.01 %, just below the vapour pressure."""
    for fluid, t in (
        ("water", 20.0),
        ("water", 180.0),
        ("propane", 40.0),
        ("ammonia", 0.0),
        ("pure propylene glycol", -30.0),
    ):
        pv = functions["LP_VAPOUR_PRESSURE"](fluid, t)
        saturated = functions["LP_DENSITY"](fluid, t)
        for off in (-9e-5, -1e-6, 0.0, 1e-9, 1e-7, 1e-6, 3e-6, 1e-5, 1e-4):
            assert functions["LP_DENSITY"](fluid, t, pv * (1.0 + off)) == pytest.approx(saturated, rel=1e-5), (
                fluid,
                off,
            )
        assert np.isnan(functions["LP_DENSITY"](fluid, t, pv * (1.0 - 2e-4)))


def test_rows_are_repeated_for_single_arguments() -> None:
    seen = each(lambda name, one, two: (name, one, two), "a", np.array([1.0, 2.0]), np.array([3.0]))
    assert seen.tolist() == [["a", "1.0", "3.0"], ["a", "2.0", "3.0"]]
    blanks = each(lambda name, one: one is None, np.array(["a", "b"]), np.array([np.nan]))
    assert blanks.tolist() == [True, True]
    assert each(lambda name: name, "a").tolist() == ["a"]


# --- once and lazily ----------------------------------------------------------------------------------------------
def test_each_distinct_state_is_computed_once() -> None:
    for cached, name, fluid in ((fluids.vapour_pressure, "LP_VAPOUR_PRESSURE", "water"),
                                (fluids.density, "LP_DENSITY", "propane"),
                                (fluids.viscosity, "LP_VISCOSITY", "ammonia"),
                                (fluids.sound_speed, "LP_SOUND_SPEED", "methanol"),
                                (seawater.density, "LP_DENSITY", "sea water")):  # fmt: skip
        cached.cache_clear()
        t = np.tile(np.linspace(1.0, 20.0, 7), 300)
        functions[name](fluid, t)
        assert cached.cache_info().misses == 7, name
        functions[name](fluid, t)
        assert cached.cache_info().misses == 7, name


def test_one_flash_serves_share_density_and_reasons() -> None:
    fluids.flash.cache_clear()
    for name in ("LP_FLASH", "LP_FLASH_DENSITY"):
        call(name, ["water", 151.0, 10.0, 2.0])
        reason(name, ["water", 151.0, 10.0, 2.0])
    assert fluids.flash.cache_info().misses == 1


@pytest.mark.parametrize(
    ("statement", "absent"),
    [
        ("f['LP_SIGMA'](10, 5, 1); f['LP_SIGMA'].why(10, 5, 1)", {"CoolProp", "pint"}),
        ("f['LP_COLUMN'](3.0, 2.0, 998.0); f['LP_ATMOSPHERE'](500.0)", {"CoolProp", "pint"}),
        ("f['LP_UNIT'](3.0, 'bar g', 'psi', 1.0)", {"CoolProp", "pint"}),
        ("f['LP_VAPOUR_PRESSURE'].why('unheard of', 20.0)", {"CoolProp", "pint"}),
        ("f['LP_VAPOUR_PRESSURE']('water', 20.0)", {"pint"}),
    ],
)  # fmt: skip
def test_libraries_are_imported_only_for_a_property(statement: str, absent: set[str]) -> None:
    code = f"import sys, lowpoint; f = lowpoint.functions; {statement}; print(sorted({absent!r} & set(sys.modules)))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.stdout.strip() == "[]", done.stdout + done.stderr
