"""Hydrodynamic noise against the annex examples of IEC 60534-8-4:2015 and the standard's steps written down once more.

The steps are read from the library fluids, which cites the standard and reproduces its examples to all digits; the
A-weighting is the formula of IEC 61672-1 instead of the library's table.
"""

from __future__ import annotations

import math
from typing import Any

import pytest

from lowpoint import functions
from lowpoint.units import CV_PER_KV
from published.rows import Row, parameters, read

ROWS = read("valve_noise")
NOISE = functions["LP_NOISE"]

UNUSABLE = {"NS-xFz-multi": "xFz of a multihole trim, which no function estimates: it is an input (xfz)"}

EXAMPLE = {
    "p1": 10.0, "pv": 0.0232, "density": 997.0, "sound_speed": 1400.0, "coefficient": 90.0 / CV_PER_KV, "fl": 0.92,
    "fd": 0.42, "valve_size": 100.0, "pipe_bore": 107.1, "pipe_wall": 3.6,
}  # fmt: skip


def _hour(mass: float) -> float:
    """Flow, m3/h, of so many kg/s."""
    return mass / EXAMPLE["density"] * 3600.0


@pytest.mark.parametrize(("mass", "p2", "xfz", "level"), [
    (30.0, 8.0, None, 65.47), (40.0, 6.5, None, 81.58), (40.0, 6.5, 0.3543409, 69.94),
])  # fmt: skip
def test_annex_examples(mass: float, p2: float, xfz: float | None, level: float) -> None:
    """IEC 60534-8-4:2015, examples 1 to 3 of its annex, as asserted in the tests of the library fluids."""
    assert NOISE(flow=_hour(mass), p2=p2, xfz=xfz, **EXAMPLE) == pytest.approx(level, abs=0.005)


# --- the steps ------------------------------------------------------------------------------------------------------

FREQUENCIES = (12.5, 16, 20, 25, 31.5, 40, 50, 63, 80, 100, 125, 160, 200, 250, 315, 400, 500, 630, 800, 1000, 1250,
               1600, 2000, 2500, 3150, 4000, 5000, 6300, 8000, 10000, 12500, 16000, 20000)  # fmt: skip


def _a_weight(f: float) -> float:
    """IEC 61672-1, dB."""
    f2 = f * f
    poles = (f2 + 20.6**2) * math.sqrt((f2 + 107.7**2) * (f2 + 737.9**2)) * (f2 + 12194.0**2)
    return 20.0 * math.log10(12194.0**2 * f2 * f2 / poles) + 2.0


def _log10(x: float) -> float:
    return 10.0 * math.log10(x)


def _source(i: dict[str, Any]) -> dict[str, float]:
    """Acoustic power in the valve and the peak frequencies; SI, Cv."""
    dp, head = i["p1_Pa"] - i["p2_Pa"], i["p1_Pa"] - i["pv_Pa"]
    xf = dp / head
    estimate = 0.9 / math.sqrt(1.0 + 3.0 * i["Fd"] * math.sqrt(i["Cv"] / (1.17 * i["FL"])))
    xfz = estimate if i["xFz"] == "estimated" else i["xFz"]
    at = xfz * (6e5 / i["p1_Pa"]) ** 0.125
    dpc = min(dp, i["FL"] ** 2 * head)
    jet = 0.0046 * i["Fd"] * math.sqrt(i["Cv"] * i["FL"])
    speed = math.sqrt(2.0 * dpc / i["rho"]) / i["FL"]
    stream = 0.5 * i["m_kg_s"] * speed**2 * i["FL"] ** 2
    turbulent = 10.0 ** i["An"] * speed / i["c_L"]
    cavitating = 0.0
    if xf > at:
        cavitating = 0.32 * turbulent * math.sqrt(dp / (dpc * at)) * math.exp(5.0 * at) * math.sqrt(
            (1.0 - at) / (1.0 - xf)) * (xf / at) ** 5 * (xf - at) ** 1.5  # fmt: skip
    strouhal = 0.036 * i["FL"] ** 2 * i["Cv"] * i["Fd"] ** 0.75 / (1.17 * at**1.5 * i["d_m"] ** 2) * head**-0.57
    peak = strouhal * speed / jet
    found = {
        "xF": xf, "xFz": xfz, "xFzp1": at, "Uvc": speed, "Dj": jet, "Wm": stream, "eta_turb": turbulent,
        "eta_cav": cavitating, "Wa": (turbulent + cavitating) * stream, "Stp": strouhal, "fp_turb": peak,
    }  # fmt: skip
    if cavitating:
        found["fp_cav"] = 6.0 * peak * ((1.0 - xf) / (1.0 - at)) ** 2 * (at / xf) ** 2.5
    return found


def _steps(i: dict[str, Any]) -> dict[str, float]:
    """Every quantity of the rows by its name there, the level outside at last."""
    s = _source(i)
    inside = _log10(3.2e9 * s["Wa"] * i["rho"] * i["c_L"] / i["Di_m"] ** 2)
    ring = i["c_p"] / (math.pi * i["Di_m"])
    at_ring = -10.0 - _log10(i["c_p"] * i["rho_p"] * i["tp_m"] / (i["c_air"] * i["rho_air"] * i["Di_m"]))
    outside = i["Di_m"] + 2.0 * i["tp_m"]
    total = 0.0
    for place, f in enumerate(FREQUENCIES):
        shares = s["eta_turb"] * 10.0**-0.8 / (0.25 * (f / s["fp_turb"]) ** 3 + s["fp_turb"] / f)
        if s["eta_cav"]:
            ratio = (f / s["fp_cav"]) ** 1.5
            shares += s["eta_cav"] * 10.0**-0.9 / (0.25 * ratio + 1.0 / ratio)
        band = inside + _log10(shares / (s["eta_turb"] + s["eta_cav"]))
        wall = at_ring - 20.0 * math.log10(ring / f + (f / ring) ** 1.5)
        # The weights belong to the exact frequencies, of which the nominal ones are roundings.
        weight = _a_weight(1000.0 * 10.0 ** ((place - 19) / 10.0))
        total += 10.0 ** (0.1 * (band + wall - _log10((outside + 2.0) / outside) + weight))
    return {**s, "Lpi": inside, "TLfr": at_ring, "LpAe,1m": _log10(total)}


CHECKED = [id_ for id_ in ROWS if id_ not in UNUSABLE]


def test_every_row_is_used_or_says_why_not() -> None:
    assert len(ROWS) == 30
    assert len(CHECKED) == 29


@pytest.mark.parametrize("row", parameters(ROWS[id_] for id_ in CHECKED))
def test_steps_of_the_examples(row: Row) -> None:
    assert _steps(row.inputs)[row.quantity] == pytest.approx(row.value, rel=0, abs=row.allowed), row.source


VALVES = [
    {},
    {"p2": 3.0, "flow": 250.0},
    {"p1": 40.0, "p2": 15.0, "flow": 90.0, "coefficient": 20.0, "fl": 0.8, "fd": 0.3, "valve_size": 50.0,
     "outlet_size": 65.0, "pipe_bore": 82.5, "pipe_wall": 5.5, "xfz": 0.3},
    {"p1": 3.0, "p2": 1.0, "pv": 0.7, "density": 958.0, "sound_speed": 1543.0, "flow": 60.0, "fd": 0.98, "fl": 0.6},
    {"p1": 3.0, "p2": 2.9, "flow": 20.0, "xfz": 0.9},
]  # fmt: skip


@pytest.mark.parametrize("more", VALVES, ids=range(len(VALVES)))
def test_level_follows_the_steps(more: dict[str, float]) -> None:
    """Cavitating or not, choked or not, with an outlet and an xfz of its own: the steps in their own units."""
    case: dict[str, Any] = {**EXAMPLE, "flow": 110.0, "p2": 8.0, **more}
    i = {
        "m_kg_s": case["flow"] / 3600.0 * case["density"], "p1_Pa": case["p1"] * 1e5, "p2_Pa": case["p2"] * 1e5,
        "pv_Pa": case["pv"] * 1e5, "rho": case["density"], "c_L": case["sound_speed"], "FL": case["fl"],
        "Cv": case["coefficient"] * CV_PER_KV, "Fd": case["fd"],
        "d_m": case.get("outlet_size", case["valve_size"]) / 1e3, "Di_m": case["pipe_bore"] / 1e3,
        "tp_m": case["pipe_wall"] / 1e3, "xFz": case.get("xfz", "estimated"),
        "An": -4.6, "rho_air": 1.293, "c_air": 343.0, "rho_p": 7800.0, "c_p": 5000.0,
    }  # fmt: skip
    # The table of weights is rounded to 0.1 dB.
    assert NOISE(**case) == pytest.approx(_steps(i)["LpAe,1m"], abs=0.05)


def test_a_wrong_xfz_moves_the_level_by_decibels() -> None:
    """0.05 more in the xFz of the second annex example: some 5 dB less (common practice), as the caution says."""
    near, far = (NOISE(flow=_hour(40.0), p2=6.5, xfz=x, **EXAMPLE) for x in (0.2543, 0.3043))
    assert 4.0 < near - far < 8.0


def test_noise_in_us_units() -> None:
    """psi, US gal/min, inches, lb/ft3, ft/s and Cv by their definitions: the same decibels."""
    psi, gpm, inch = 6894.757293168361e-5, 0.2271247070, 25.4
    given = {
        "flow": _hour(40.0) / gpm, "p1": 10.0 / psi, "p2": 6.5 / psi, "pv": 0.0232 / psi, "fl": 0.92, "fd": 0.42,
        "density": 997.0 / 16.018463373960142, "sound_speed": 1400.0 / 0.3048, "coefficient": 90.0,
        "valve_size": 100.0 / inch, "pipe_bore": 107.1 / inch, "pipe_wall": 3.6 / inch,
    }  # fmt: skip
    assert functions["LPU_NOISE"](**given) == pytest.approx(81.582, abs=0.001)
