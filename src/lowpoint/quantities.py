"""Each symbol once: its meaning, its dimension, the values that are possible, and where it usually works.

A kernel's signature is annotated with these aliases; what they say is checked, converted and printed by every
face. ``Floats`` arrays hold SI values; NaN, or ``None`` for a whole argument, stands for an omitted one.
"""

from __future__ import annotations

from typing import Annotated, Any

from lowpoint.kinds import Floats, Quantity, Table, Text, Word, Words

__all__ = ["Floats", "Quantity", "Table", "Text", "Word"]


def _positive(symbol: str, meaning: str, dimension: str, working: tuple[float, float], **more: Any) -> Quantity:
    return Quantity(symbol, meaning, dimension, low=0.0, zero_is_blank=True, working=working, **more)


_ABSOLUTE = "Pressures are absolute: add the site's atmosphere to a gauge reading."
_LIMIT = (1.2, 3.0)

# --- pressures, absolute, at the standard's test sections -------------------------------------------------------
P = Annotated[Floats, _positive("p", "pressure, absolute", "pressure", (1.0, 40.0), remedy=_ABSOLUTE)]
P1 = Annotated[Floats, _positive("p1", "inlet pressure, absolute", "pressure", (8.0, 40.0), remedy=_ABSOLUTE)]
P2 = Annotated[Floats, _positive("p2", "outlet pressure, absolute", "pressure", (2.0, 7.5), remedy=_ABSOLUTE)]
PV = Annotated[
    Floats,
    _positive(
        "pv",
        "vapour pressure at inlet temperature, absolute",
        "pressure",
        (0.01, 1.5),
        remedy="Give the vapour pressure at the inlet temperature; LP_VAPOUR_PRESSURE finds it for a known liquid.",
    ),
]
PC = Annotated[
    Floats,
    _positive(
        "pc",
        "thermodynamic critical pressure, absolute",
        "pressure",
        (40.0, 221.0),
        remedy="Give the critical pressure; LP_CRITICAL_PRESSURE finds it for a known liquid.",
    ),
]
Atmosphere = Annotated[Floats, _positive("atmosphere", "barometric pressure at the site", "pressure", (0.8, 1.05))]
Pressure = Annotated[Floats, Quantity("pressure", "pressure, absolute", "pressure")]
Drop = Annotated[Floats, Quantity("drop", "pressure drop", "pressure")]

# --- liquid ------------------------------------------------------------------------------------------------------
Fluid = Annotated[Words, Text("fluid", "liquid, by its usual or trade name", ("water", "propane", "ammonia"))]
T = Annotated[Floats, Quantity("t", "temperature", "temperature", low=-273.15, working=(5.0, 90.0))]
Temperature = Annotated[Floats, Quantity("temperature", "temperature", "temperature")]
Salinity = Annotated[
    Floats,
    Quantity(
        "salinity",
        "salt content of sea water (other liquids: not used)",
        "salinity",
        low=0.0,
        closed_low=True,
        high=120.0,
        closed_high=True,
        working=(5.0, 80.0),
        remedy="The equations hold up to 120 g/kg.",
    ),
]
Density = Annotated[
    Floats,
    Quantity(
        "density",
        "density of the flowing liquid",
        "density",
        low=100.0,
        closed_low=True,
        us_low=6.0,
        zero_is_blank=True,
        working=(600.0, 1050.0),
        remedy="A relative density (specific gravity) was typed: multiply it by 999 kg/m3 (62.4 lb/ft3).",
    ),
]
Viscosity = Annotated[Floats, _positive("viscosity", "dynamic viscosity of the liquid", "viscosity", (0.2, 500.0))]
Elevation = Annotated[
    Floats,
    Quantity(
        "elevation",
        "geometric height of the site above sea level",
        "elevation",
        low=-5000.0,
        closed_low=True,
        high=11000.0,
        closed_high=True,
        working=(-100.0, 3000.0),
        remedy="The standard atmosphere is used from 5000 m below to 11 000 m above sea level.",
    ),
]
Rise = Annotated[Floats, Quantity("rise", "change of elevation, upward positive", "elevation", working=(-20.0, 20.0))]
SoundSpeed = Annotated[Floats, _positive("sound_speed", "speed of sound in the liquid", "velocity", (900.0, 1600.0))]
Value = Annotated[Floats, Quantity("value", "value to be converted", "free", working=(1.0, 50.0))]
FromUnit = Annotated[Words, Text("from", "unit that the value has", ("bar", "psi", "m3/h"))]
ToUnit = Annotated[Words, Text("to", "unit that is wanted", ("kPa", "bar", "US gal/min"))]

# --- valve -------------------------------------------------------------------------------------------------------
Flow = Annotated[Floats, _positive("flow", "volume flow at flowing conditions", "flow", (1.0, 40.0))]
Coefficient = Annotated[Floats, _positive("coefficient", "flow coefficient", "coefficient", (5.0, 60.0))]
Rated = Annotated[Floats, _positive("rated", "rated flow coefficient, fully open", "coefficient", (60.0, 200.0))]
ValveSize = Annotated[Floats, _positive("valve_size", "nominal valve size d", "size", (80.0, 200.0))]
PipeIn = Annotated[Floats, _positive("pipe_in", "inside diameter of the pipe before the valve", "size", (100.0, 400.0))]
PipeOut = Annotated[
    Floats, _positive("pipe_out", "inside diameter of the pipe after the valve", "size", (100.0, 400.0))
]
FL = Annotated[
    Floats,
    _positive(
        "fl",
        "liquid pressure recovery factor FL at the operating travel",
        "ratio",
        (0.5, 0.98),
        high=1.0,
        closed_high=True,
        remedy="Use FL at the real opening, from the vendor; LP_TYPICAL gives a screening value.",
    ),
]
Fd = Annotated[
    Floats,
    _positive(
        "fd",
        "valve style modifier Fd",
        "ratio",
        (0.05, 1.0),
        high=1.0,
        closed_high=True,
        remedy="Use the vendor's Fd; LP_TYPICAL gives a screening value.",
    ),
]
Trim = Annotated[Words, Word("trim", "trim class for non-turbulent flow", ("full", "reduced"))]
Rangeability = Annotated[
    Floats,
    Quantity(
        "rangeability",
        "inherent rangeability R of the valve",
        "ratio",
        low=1.0,
        zero_is_blank=True,
        working=(20.0, 60.0),
    ),
]
Characteristic = Annotated[
    Any,
    Table(
        "characteristic",
        "inherent characteristic: a word, or two columns travel (%) and coefficient",
        "free",
        width=2,
        or_words=("linear", "equal percentage"),
        low=0.0,
        increasing=True,
        working=(0, 5, 25, 30, 50, 70, 75, 120, 100, 210),
        remedy="Give travel in per cent in the first column, increasing, and the coefficient in the second.",
    ),
]
Travel = Annotated[
    Floats,
    Quantity(
        "travel",
        "opening of the valve",
        "travel",
        low=0.0,
        closed_low=True,
        high=100.0,
        closed_high=True,
        working=(20.0, 80.0),
    ),
]
Travels = Annotated[
    Floats,
    Table(
        "travels",
        "column of openings, increasing",
        "travel",
        low=0.0,
        increasing=True,
        working=(10, 30, 50, 70, 100),
    ),
]
Coefficients = Annotated[
    Floats,
    Table(
        "coefficients",
        "column of flow coefficients at those openings, increasing",
        "coefficient",
        low=0.0,
        increasing=True,
        working=(8, 25, 60, 120, 200),
    ),
]
FLs = Annotated[
    Floats,
    Table(
        "fls",
        "column of recovery factors at those openings",
        "ratio",
        low=0.0,
        working=(0.95, 0.93, 0.9, 0.86, 0.8),
    ),
]
Values = Annotated[Floats, Table("values", "column of values at those openings", "free", working=(9, 8, 7, 5, 4))]
Style = Annotated[Words, Text("style", "valve style and trim", ("globe single port, contoured plug",))]
Property = Annotated[Words, Word("property", "which typical value", ("fl", "fd"))]
Direction = Annotated[
    Words,
    Word("direction", "flow direction", ("open", "close", "inward", "outward", "between seats", "either")),
]
Bore = Annotated[Floats, _positive("bore", "inside diameter", "size", (50.0, 300.0))]

# --- indices and limits -----------------------------------------------------------------------------------------
_FORMS = ("upstream", "downstream", "xf")
Form = Annotated[Words, Word("form", "form of the index", _FORMS)]
FromForm = Annotated[Words, Word("from", "form that the value has", _FORMS)]
ToForm = Annotated[Words, Word("to", "form that is wanted", _FORMS)]
IndexValue = Annotated[Floats, Quantity("value", "cavitation index in the form `from`", "ratio", working=_LIMIT)]
Sigma = Annotated[Floats, _positive("sigma", "cavitation index, upstream form", "ratio", (1.1, 4.0))]
Limit = Annotated[Floats, _positive("limit", "limit of the index", "ratio", _LIMIT)]


def _severity(symbol: str, meaning: str) -> Quantity:
    return _positive(
        symbol, f"{meaning}, upstream form", "ratio", _LIMIT,
        remedy="Limits are in the upstream form (p1-pv)/(p1-p2), above 1; LP_SIGMA_FORM carries another form over.",
    )  # fmt: skip


Incipient = Annotated[Floats, _severity("incipient", "index at which cavitation begins")]
Constant = Annotated[Floats, _severity("constant", "index of constant (steady) cavitation")]
Damage = Annotated[Floats, _severity("damage", "index of incipient damage")]
Vibration = Annotated[Floats, _severity("vibration", "index of maximum vibration")]
Choked = Annotated[Floats, _severity("choked", "index at which the flow is choked")]
Size = Annotated[
    Floats,
    _positive("size", "size that the limit is wanted for (any one length unit)", "size", (100.0, 400.0)),
]
SizeRef = Annotated[Floats, _positive("size_ref", "size that the limit was tested at", "size", (50.0, 100.0))]
Head = Annotated[
    Floats,
    _positive("head", "p1 - pv that the limit is wanted for (any one pressure unit)", "pressure", (5.0, 20.0)),
]
HeadRef = Annotated[Floats, _positive("head_ref", "p1 - pv that the limit was tested at", "pressure", (1.0, 5.0))]
SizeExponent = Annotated[
    Floats,
    Quantity(
        "size_exponent",
        "exponent b of the size effect",
        "ratio",
        low=0.0,
        closed_low=True,
        high=2.0,
        working=(0.05, 0.3),
        remedy="An exponent belongs to a method and comes from tests; none is assumed.",
    ),
]
HeadExponent = Annotated[
    Floats,
    Quantity(
        "head_exponent",
        "exponent a of the pressure effect",
        "ratio",
        low=0.0,
        closed_low=True,
        high=2.0,
        working=(0.05, 0.3),
        remedy="An exponent belongs to a method and comes from tests; none is assumed.",
    ),
]
ScaleMethod = Annotated[Words, Word("method", "how the size and pressure effects enter", ("isa", "upstream", "tullis"))]

# --- orifice plates ---------------------------------------------------------------------------------------------
OrificeBore = Annotated[
    Floats,
    _positive("bore", "diameter of the bore (of each hole)", "size", (40.0, 60.0), remedy="Sizes are in mm (in)."),
]
Pipe = Annotated[Floats, _positive("pipe", "inside diameter of the pipe", "size", (100.0, 150.0))]
BoreLength = Annotated[
    Floats,
    _positive("bore_length", "length of the parallel part of the bore (not the plate's thickness)", "size", (1.0, 2.0)),
]
Holes = Annotated[
    Floats,
    Quantity(
        "holes",
        "number of equal holes",
        "ratio",
        low=1.0,
        closed_low=True,
        high=1e6,
        zero_is_blank=True,
        working=(1.0, 1.0),
    ),
]
Reynolds = Annotated[Floats, _positive("reynolds", "Reynolds number of the pipe", "ratio", (1e5, 1e6))]
Taps = Annotated[Words, Word("taps", "which drop: net, or between taps", ("net", "corner", "flange", "radius"))]
LimitKind = Annotated[Words, Word("limit", "which limit", ("incipient", "constant", "choked"))]
Target = Annotated[Floats, _positive("target", "least index that every stage must have", "ratio", _LIMIT)]
Stages = Annotated[
    Floats,
    Quantity(
        "stages",
        "number of stages",
        "ratio",
        low=1.0,
        closed_low=True,
        high=100.0,
        closed_high=True,
        working=(3.0, 3.0),
    ),
]
StageRule = Annotated[Words, Word("rule", "how the drop is split", ("index", "drop"))]
PressureColumn = Annotated[Floats, Quantity("pressures", "column of pressures from inlet to outlet", "pressure")]
PlateDrop = Annotated[
    Floats,
    _positive(
        "drop", "largest pressure difference on the plate, start-up and blockage included", "pressure", (5.0, 30.0)
    ),
]
SupportDiameter = Annotated[
    Floats,
    _positive("support_diameter", "diameter at which the plate is supported (gasket mean)", "size", (120.0, 200.0)),
]
Stress = Annotated[Floats, _positive("stress", "allowable stress of the plate", "stress", (80.0, 140.0))]
Support = Annotated[Words, Word("support", "how the rim is held", ("simple", "clamped"))]
Allowance = Annotated[
    Floats,
    Quantity("allowance", "added thickness (corrosion, wear)", "size", low=0.0, closed_low=True, working=(0.5, 1.0)),
]
Thickness = Annotated[Floats, Quantity("thickness", "thickness of the plate", "size")]

# --- noise ------------------------------------------------------------------------------------------------------
PipeBore = Annotated[
    Floats, _positive("pipe_bore", "inside diameter of the pipe after the valve", "size", (100.0, 200.0))
]
PipeWall = Annotated[Floats, _positive("pipe_wall", "wall thickness of that pipe", "size", (3.0, 8.0))]
Xfz = Annotated[
    Floats,
    _positive(
        "xfz", "xF of incipient cavitation at 6 bar", "ratio", (0.2, 0.4), high=1.0, remedy="From the vendor's test."
    ),
]
OutletSize = Annotated[Floats, _positive("outlet_size", "bore of the valve's outlet", "size", (80.0, 200.0))]
Level = Annotated[Floats, Quantity("level", "sound pressure level", "level")]

# --- results ----------------------------------------------------------------------------------------------------
Ratio = Annotated[Floats, Quantity("ratio", "ratio", "ratio")]
Share = Annotated[Floats, Quantity("share", "mass fraction", "ratio")]
Speed = Annotated[Floats, Quantity("speed", "velocity", "velocity")]
Regime = Annotated[
    Words,
    Word(
        "regime",
        "one word for the state of the flow",
        (
            "flashing",
            "choked",
            "vibration",
            "damage",
            "constant",
            "cavitating",
            "incipient",
            "unjudged",
            "clear",
        ),
    ),
]
FreeValue = Annotated[Floats, Quantity("free_value", "value, in the unit of the table it was read from", "free")]
