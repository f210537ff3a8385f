"""More layouts of data sheets, row by row: forms, pairs of value and unit, foreign ones, tables with several heads."""

from __future__ import annotations

from typing import Any

from audit_sheets import Draft, across, from_rows

__all__ = ["LAYOUTS"]

N = None
LAYOUTS: dict[str, Draft] = {}


def _v(quantity: str, case: str | None, shown: Any, number: Any = None) -> tuple[Any, ...]:
    """A value that must be found."""
    return (quantity, case, shown) if number is None else (quantity, case, shown, number)


C = ("Max. flow", "Norm. flow", "Min. flow")
LAYOUTS["standard form, shutoff col"] = from_rows(
    [
        ["PROJECT", "KB-7", N, "DATA SHEET", N, "12 of 40"],
        ["1", N, "Fluid", _v("fluid", N, "Brine"), N, "Crit press PC", _v("pc", N, "221.2 bar a", 221.2)],
        ["2", "SERVICE CONDITIONS", N, "Units", *C, "Shut-off"],
        ["3", N, "Flow Rate", "m3/h", *across("flow", C, 180, 120.5, 60), "-"],
        ["4", N, "Inlet Pressure", "bar(g)", *across("p1", C, 6.1, 6.8, 7.2), _v("p1", "Shut-off", 8.0)],
        ["5", N, "Outlet Pressure", "bar(g)", *across("p2", C, 3.1, 2.6, 2.2), _v("p2", "Shut-off", 0)],
        ["6", N, "Inlet Temperature", "°C", *across("t", C, 27, 25, 25), "-"],
        ["7", N, "Spec Wt / Spec Grav / Mol Wt", "kg/m3", *across("density", C, 1022, 1023, 1023), "-"],
        ["8", N, "Viscosity", "cP", *across("viscosity", C, 0.94, 0.96, 0.96), "-"],
        ["9", N, "Vapor Pressure Pv", "bar(a)", *across("pv", C, 0.036, 0.031, 0.031), "-"],
        ["10", N, "Required Cv", "-", *across("coefficient", C, 121, 68, 31), "-"],
        ["11", N, "Travel", "%", *across("travel", C, 77, 52, 31), "0"],
        ["12", N, "Allowable / Predicted SPL", "dBA", "85 /", N, N],
        ["13", N, "Predicted SPL", "dBA", *across("noise", C, 71, 76, 79), "-"],
        ["14", "LINE"],
        ["15", N, "Pipe Line Size & Schedule In", N, _v("pipe_in", N, '6" Sch 40', 6.0)],
        ["16", N, "Pipe Line Size & Schedule Out", N, _v("pipe_out", N, '8" Sch 40', 8.0)],
        ["17", "VALVE BODY"],
        ["18", N, "Type", N, "Globe, cage"],
        ["19", N, "Size", N, _v("valve_size", N, '4"', 4.0), N, "ANSI class", 300],
        ["20", N, "Rated Cv", N, _v("rated", N, 195), N, "FL", _v("fl", N, 0.85)],
    ]
)
LAYOUTS["pairs value unit"] = from_rows(
    [
        ["Valve tag", _v("tag", N, "FV-9")],
        [N, "Minimum", N, "Normal", N, "Maximum", N],
        [
            "Flow",
            _v("flow", "Minimum", 60),
            "m3/h",
            _v("flow", "Normal", 120),
            "m3/h",
            _v("flow", "Maximum", 180),
            "m3/h",
        ],
        [
            "Inlet pressure",
            _v("p1", "Minimum", 7.2),
            "bar a",
            _v("p1", "Normal", 6.8),
            "bar a",
            _v("p1", "Maximum", 6.1),
            "bar a",
        ],
        [
            "Outlet pressure",
            _v("p2", "Minimum", 2.2),
            "bar a",
            _v("p2", "Normal", 2.6),
            "bar a",
            _v("p2", "Maximum", 3.1),
            "bar a",
        ],
        ["Density", _v("density", N, 998), "kg/m3"],
    ]
)
LAYOUTS["two units"] = from_rows(
    [
        ["Inlet pressure P1", _v("p1", N, 6.8), "bar g", 98.6, "psig"],
        ["Outlet pressure P2", _v("p2", N, "2.6 bar g (37.7 psig)", 2.6)],
        ["Flow rate Q", _v("flow", N, 120.5), "m³/h", 530.5, "US gpm"],
        ["Temperature", _v("t", N, 25), "°C", 77, "°F"],
        ["Required Kv / Cv", _v("coefficient", N, 59.4), 68.7],
    ]
)
LAYOUTS["label colon unit"] = from_rows(
    [
        ["Inlet pressure (bar g):", N, N, _v("p1", N, 6.8)],
        ["Outlet pressure (bar g):", N, N, _v("p2", N, 2.6)],
        ["Flow (m3/h):", N, N, _v("flow", N, 120.5)],
        ["Kv required:", N, N, _v("coefficient", N, 59.4)],
        ["Notes:"],
        ["1. Vendor shall confirm that no cavitation occurs at all stated conditions and give the margin."],
        ["2. Pressures at 3 m upstream."],
        ["Rev", "Date", "By"],
        [0, "2026-05-01", "AB"],
        [1, "2026-06-01", "CD"],
    ]
)
LAYOUTS["formats"] = from_rows(
    [
        ["Inlet pressure", _v("p1", N, 6.8)],
        ["Outlet pressure", _v("p2", N, 2.6)],
        ["Flow", _v("flow", N, 120.53)],
        ["Opening", _v("travel", N, 0.52, 52.0)],
        ["Sigma", _v("sigma", N, 1.8123)],
    ],
    formats={(1, 2): '0.0 "bar g"', (2, 2): '0.0 "bar g"', (3, 2): '0.0 "m3/h"', (4, 2): "0%", (5, 2): "0.00"},
)
LAYOUTS["limits"] = from_rows(
    [
        ["Valve", "FV-2"],
        ["p1", "bar a", _v("p1", N, 10)],
        ["p2", "bar a", _v("p2", N, 4)],
        ["Cavitation limits (upstream form)"],
        ["Incipient", N, _v("sigma_incipient", N, 2.8)],
        ["Constant", N, _v("sigma_constant", N, 2.1)],
        ["Damage", N, _v("sigma_damage", N, 1.7)],
        ["Choked", N, _v("sigma_choked", N, 1.35)],
        ["σ operating", N, _v("sigma", N, 1.66)],
        ["σi", N, N],
    ]
)
LAYOUTS["group heads"] = from_rows(
    [
        [N, "Flow", "Inlet", N, "Outlet", N, "Valve", N],
        ["Case", "m3/h", "Pressure", "Temp.", "Pressure", "Velocity", "Kv", "Opening"],
        [N, N, "bar a", "°C", "bar a", "m/s", "required", "%"],
        [
            "Start-up",
            _v("flow", "Start-up", 40),
            _v("p1", "Start-up", 9.1),
            _v("t", "Start-up", 15),
            _v("p2", "Start-up", 1.2),
            _v("velocity_out", "Start-up", 1.4),
            _v("coefficient", "Start-up", 14.3),
            _v("travel", "Start-up", 22),
        ],
        [
            "Normal",
            _v("flow", "Normal", 120),
            _v("p1", "Normal", 6.8),
            _v("t", "Normal", 25),
            _v("p2", "Normal", 2.6),
            _v("velocity_out", "Normal", 4.2),
            _v("coefficient", "Normal", 59.4),
            _v("travel", "Normal", 52),
        ],
    ],
    merged=((1, 3, 1, 4), (1, 5, 1, 6), (1, 7, 1, 8)),
)
LAYOUTS["french"] = from_rows(
    [
        ["Repère", _v("tag", N, "VR-12")],
        ["Fluide", _v("fluid", N, "Eau")],
        [N, "Unité", "Cas 1", "Cas 2"],
        ["Débit", "m³/h", _v("flow", "Cas 1", "60,5", 60.5), _v("flow", "Cas 2", "120,5", 120.5)],
        ["Pression amont", "bar abs", _v("p1", "Cas 1", "7,2", 7.2), _v("p1", "Cas 2", "6,8", 6.8)],
        ["Pression aval", "bar abs", _v("p2", "Cas 1", "2,2", 2.2), _v("p2", "Cas 2", "2,6", 2.6)],
        ["Température", "°C", _v("t", "Cas 1", "25", 25), _v("t", "Cas 2", "25", 25)],
        ["Masse volumique", "kg/m³", _v("density", "Cas 1", "998,2", 998.2), _v("density", "Cas 2", "998,2", 998.2)],
        ["Pression de vapeur", "mbar abs", _v("pv", "Cas 1", "31,7", 31.7), _v("pv", "Cas 2", "31,7", 31.7)],
        ["Kv requis", N, _v("coefficient", "Cas 1", "27,1", 27.1), _v("coefficient", "Cas 2", "59,4", 59.4)],
        ["Niveau de bruit", "dB(A)", _v("noise", "Cas 1", "79", 79), _v("noise", "Cas 2", "76", 76)],
        ["Ouverture", "%", _v("travel", "Cas 1", "31", 31), _v("travel", "Cas 2", "52", 52)],
    ]
)
LAYOUTS["spanish"] = from_rows(
    [
        ["Etiqueta", _v("tag", N, "VC-12")],
        ["Fluido", _v("fluid", N, "Agua")],
        ["Caudal", _v("flow", N, "120,5 m3/h", 120.5)],
        ["Presión de entrada", _v("p1", N, "6,8 bar a", 6.8)],
        ["Presión de salida", _v("p2", N, "2,6 bar a", 2.6)],
        ["Temperatura", _v("t", N, "25 °C", 25)],
        ["Presión de vapor", _v("pv", N, "0,0317 bar a", 0.0317)],
        ["Densidad", _v("density", N, "998,2 kg/m3", 998.2)],
        ["Nivel de ruido", _v("noise", N, "76 dB(A)", 76)],
        ["Caída de presión", _v("dp", N, "4,2 bar", 4.2)],
    ]
)
LAYOUTS["two header rows"] = from_rows(
    [
        ["Tag", _v("tag", N, "LV-2")],
        [N, N, "Case 1", "Case 2", "Case 3"],
        ["Parameter", "Unit", "Normal", "Start-up", "Upset"],
        ["Q", "m3/h", *across("flow", ("Normal", "Start-up", "Upset"), 120, 40, 150)],
        ["P1", "bar a", *across("p1", ("Normal", "Start-up", "Upset"), 6.8, 9, 7)],
        ["P2", "bar a", *across("p2", ("Normal", "Start-up", "Upset"), 2.6, 1.2, 2)],
        ["FL", "-", *across("fl", ("Normal", "Start-up", "Upset"), 0.88, 0.92, 0.84)],
        ["Kv req'd", "", *across("coefficient", ("Normal", "Start-up", "Upset"), 59.4, 14.3, 67)],
        ["σ", "-", *across("sigma", ("Normal", "Start-up", "Upset"), 1.6, 1.2, 1.4)],
        [
            "Cavitation?",
            "",
            *[
                ("statement", c, s, w)
                for c, s, w in (
                    ("Normal", "No", "no cavitation"),
                    ("Start-up", "Yes", "cavitating"),
                    ("Upset", "Yes", "cavitating"),
                )
            ],
        ],
    ]
)
LAYOUTS["inline cases"] = from_rows(
    [
        ["Flow max", _v("flow", "Maximum", 180), "m3/h"],
        ["Flow normal", _v("flow", "Normal", 120), "m3/h"],
        ["Flow min", _v("flow", "Minimum", 60), "m3/h"],
        ["P1 max", _v("p1", "Maximum", 6.1), "bar a"],
        ["P1 normal", _v("p1", "Normal", 6.8), "bar a"],
        ["P1 min", _v("p1", "Minimum", 7.2), "bar a"],
        ["P2", _v("p2", N, 2.6), "bar a"],
    ]
)
LAYOUTS["orifice"] = from_rows(
    [
        ["RESTRICTION ORIFICE DATA SHEET"],
        ["Tag", _v("tag", N, "RO-14")],
        ["Fluid", _v("fluid", N, "Water")],
        ["Upstream pressure", "kPa(a)", _v("p1", N, 900)],
        ["Downstream pressure", "kPa(a)", _v("p2", N, 300)],
        ["Flow rate", "kg/h", _v("mass_flow", N, 42000)],
        ["Operating temperature", "°C", _v("t", N, 40)],
        ["Density", "kg/m³", _v("density", N, 992.2)],
        ["Vapour pressure", "kPa(a)", _v("pv", N, 7.38)],
        ["Pipe inside diameter", "mm", _v("pipe_in", N, 102.3)],
        ["Orifice bore", "mm", _v("bore", N, 33.4)],
        ["Number of holes", N, _v("holes", N, 1)],
        ["Plate thickness", "mm", _v("thickness", N, 6)],
        ["Number of plates", N, _v("plates", N, 1)],
        ["Cavitation index", N, _v("sigma", N, 1.49)],
        ["Pressure drop", "kPa", _v("dp", N, 600)],
    ]
)
LAYOUTS["text dump"] = from_rows(
    [
        ["p1 = 6.8 bar g"],
        ["p2 = 2.6 bar g"],
        ["Q = 120.5 m3/h"],
        ["T = 25 °C"],
        ["Kv = 59.4"],
        ["Kvs = 160"],
        ["FL = 0.88"],
        ["σ = 1.81"],
    ]
)
for (r, c), (q, n) in {
    (1, 1): ("p1", 6.8),
    (2, 1): ("p2", 2.6),
    (3, 1): ("flow", 120.5),
    (4, 1): ("t", 25),
    (5, 1): ("coefficient", 59.4),
    (6, 1): ("rated", 160),
    (7, 1): ("fl", 0.88),
    (8, 1): ("sigma", 1.81),
}.items():
    LAYOUTS["text dump"].truth[q, None, r, c] = n
LAYOUTS["us table"] = from_rows(
    [
        ["Valve Sizing Summary"],
        ["Condition", "Units", "1 - Start", "2 - Run", "3 - Max"],
        ["Inlet Pressure, P1", "psia", *across("p1", ("1 - Start", "2 - Run", "3 - Max"), 450, 420, 400)],
        ["Outlet Pressure, P2", "psia", *across("p2", ("1 - Start", "2 - Run", "3 - Max"), 60, 150, 180)],
        ["Pressure Drop", "psi", *across("dp", ("1 - Start", "2 - Run", "3 - Max"), 390, 270, 220)],
        ["Liquid Flow Rate", "gpm(US)", *across("flow", ("1 - Start", "2 - Run", "3 - Max"), 100, 500, 700)],
        ["Specific Gravity @ Flow", "", *across("density", ("1 - Start", "2 - Run", "3 - Max"), 0.98, 0.96, 0.96)],
        ["Flow Coefficient, Cv", "", *across("coefficient", ("1 - Start", "2 - Run", "3 - Max"), 5.0, 29.8, 46.2)],
        ["Cavitation Index, Sigma", "", *across("sigma", ("1 - Start", "2 - Run", "3 - Max"), 1.15, 1.5, 1.75)],
        ["Sound Level, dBA", "", *across("noise", ("1 - Start", "2 - Run", "3 - Max"), 92, 84, 83)],
        ["Valve Velocity (ft/s)", "", *[20, 30, 40]],
        ["Rated Cv", "", _v("rated", N, 195)],
        ["Valve Size, in.", "", _v("valve_size", N, 4)],
    ]
)
LAYOUTS["sides"] = from_rows(
    [
        ["Tag", _v("tag", N, "HV-21")],
        [N, N, "Inlet", "Outlet"],
        ["Pressure", "bar a", _v("p1", N, 6.8), _v("p2", N, 2.6)],
        ["Temperature", "°C", _v("t", N, 25), 25],
        ["Velocity", "m/s", _v("velocity_in", N, 2.1), _v("velocity_out", N, 4.2)],
        ["Pipe size", "mm", _v("pipe_in", N, 154.1), _v("pipe_out", N, 202.7)],
        ["Flow", "m3/h", _v("flow", N, 120)],
    ]
)
LAYOUTS["travel table"] = from_rows(
    [
        ["Tag", _v("tag", N, "HV-22")],
        ["P1", "bar a", _v("p1", N, 6.8)],
        ["P2", "bar a", _v("p2", N, 2.6)],
        ["Flow", "m3/h", _v("flow", N, 120)],
        ["Rated Kv", N, _v("rated", N, 160)],
        ["Travel", "%", 10, 20, 40, 60, 80, 100],
        ["Kv", N, 5, 12, 30, 60, 110, 160],
        ["FL", N, 0.95, 0.94, 0.92, 0.9, 0.87, 0.84],
    ]
)
LAYOUTS["mixed notes"] = from_rows(
    [
        ["CONTROL VALVE SPECIFICATION", "", "", "Rev. 2"],
        ["General", "Tag No.", _v("tag", N, "FCV-1001"), "Qty", 2],
        [N, "P&ID No.", "PID-20-001", "Line no.", '6"-WC-1001'],
        ["Process", "Fluid", _v("fluid", N, "Cooling water"), "State", "Liquid"],
        [N, N, "Min", "Nor", "Max"],
        [N, "Flow rate (m3/h)", *across("flow", ("Min", "Nor", "Max"), 20, 45, 60)],
        [N, "Inlet press. (kg/cm2g)", *across("p1", ("Min", "Nor", "Max"), 6, 5.5, 5)],
        [N, "Outlet press. (kg/cm2g)", *across("p2", ("Min", "Nor", "Max"), 2, 2.5, 3)],
        [N, "Oper. temp. (°C)", *across("t", ("Min", "Nor", "Max"), 32, 32, 32)],
        [N, "Oper. density (kg/m3)", *across("density", ("Min", "Nor", "Max"), 995, 995, 995)],
        [N, "Vapour press. (kg/cm2A)", *across("pv", ("Min", "Nor", "Max"), 0.049, 0.049, 0.049)],
        [N, "Critical press. (kg/cm2A)", N, _v("pc", N, 225.5)],
        ["Design", "Design press. (kg/cm2g)", 10, "Design temp. (°C)", 65],
        ["Sizing", "Calculated Cv", *across("coefficient", ("Min", "Nor", "Max"), 11.7, 30.4, 49.6)],
        [N, "% Opening", *across("travel", ("Min", "Nor", "Max"), 35, 60, 78)],
        [N, "Noise dBA", *across("noise", ("Min", "Nor", "Max"), 70, 68, 65)],
        ["Valve", "Size / rating", N, '3" / 150#'],
        [N, "Rated Cv", N, _v("rated", N, 90)],
        [N, "Body material", N, "WCB"],
    ]
)
LAYOUTS["cases beside labels"] = from_rows(
    [
        ["Tag", _v("tag", N, "LV-31")],
        ["Inlet pressure", "Min", "bar g", _v("p1", "Min", 7.2)],
        [N, "Norm", "bar g", _v("p1", "Norm", 6.8)],
        [N, "Max", "bar g", _v("p1", "Max", 6.1)],
        ["Outlet pressure", "Min", "bar g", _v("p2", "Min", 2.2)],
        [N, "Norm", "bar g", _v("p2", "Norm", 2.6)],
        [N, "Max", "bar g", _v("p2", "Max", 3.1)],
        ["Density", N, "kg/m3", _v("density", N, 998.2)],
    ]
)
LAYOUTS["three in a cell"] = from_rows(
    [
        ["Tag", _v("tag", N, "LV-32")],
        ["Flow (min / norm / max)", _v("flow", "min", "60 / 120 / 180", 60.0), "m3/h"],
        ["p1 (min / norm / max)", _v("p1", "min", "7.2 / 6.8 / 6.1", 7.2), "bar a"],
        ["p2", _v("p2", N, 2.6), "bar a"],
        ["FL", _v("fl", N, 0.85)],
    ]
)
for key, row, numbers in (("flow", 2, (120.0, 180.0)), ("p1", 3, (6.8, 6.1))):
    for case, number in zip(("norm", "max"), numbers, strict=True):
        LAYOUTS["three in a cell"].truth[key, case, row, 2] = number
