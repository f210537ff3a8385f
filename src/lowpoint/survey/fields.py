"""The columns that a list may have: what each is called in the trade, its kind of quantity, and when it is needed.

One catalogue for the reader of lists, the blank form and the pages of help. A heading is the name of a field, or one
of its other names, with the unit beside it: ``p1 [bar g]``, ``Flow, m3/h``, ``Valve size (mm)``; a few names carry
their unit themselves (DN, NPS, Kv, Cv, SG).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import get_args

from lowpoint import quantities as q
from lowpoint.kinds import Quantity

__all__ = ["BASES", "BY_KEY", "CARRIED", "ESTIMATE", "FIELDS", "FORMS", "GROUPS", "KEEPS", "KINDS", "METHODS",
           "OUTLETS", "TABLE_FIELDS", "TYPICAL", "ListField"]  # fmt: skip

GROUPS = {
    "item": "Item and case",
    "site": "Site",
    "liquid": "Liquid and flow",
    "outlet": "Place of the outlet, where p2 is not given",
    "valve": "Valve",
    "limits": "Limits as tested",
    "plate": "Orifice plates",
}
"""Bands over the headings of the form, in order."""

KINDS = {
    "valve": ("valve", "control valve"),
    "orifice": ("orifice", "orifice plate", "restriction orifice", "plate", "ro"),
    "plates": ("plates", "set of plates", "plate set", "orifice set"),
}
OUTLETS = {
    "pipe": ("pipe", "into a pipe"),
    "submerged": ("submerged", "below the liquid"),
    "free jet": ("free jet", "jet", "into the open"),
    "falling leg": ("falling leg", "leg"),
}
FORMS = ("upstream", "downstream", "xf")
BASES = ("tested", "published", "estimated")
METHODS = ("isa", "upstream", "tullis")
KEEPS = ("incipient", "constant", "damage", "vibration", "choked")
TYPICAL = "typical"
"""Word in FL or Fd that asks for the typical value of the style."""
ESTIMATE = "estimate"
"""Word in the incipient limit that asks for the estimate by formula."""


@dataclass(frozen=True, eq=False)
class ListField:
    """One column. ``reference`` is a unit of its kind of quantity (empty: a plain ratio), ``scope`` says whether it
    belongs to the item (then it needs to stand in one of the item's rows only) or to the case.
    """

    key: str
    group: str
    heading: str
    others: tuple[str, ...] = ()
    what: str = "number"
    """``number``, ``word`` (out of ``words``), ``text``, ``bores`` (numbers with ; between)."""
    reference: str = ""
    inherent: tuple[tuple[str, str], ...] = ()
    """Names that carry their unit themselves, with that unit."""
    scope: str = "item"
    quantity: Quantity | None = None
    words: tuple[str, ...] = ()
    asks: str = ""
    """A word that may stand in place of a number, and what is then done."""
    help: str = ""

    @property
    def names(self) -> tuple[str, ...]:
        """Every name that the heading may have."""
        return (self.heading, *self.others, *(name for name, _ in self.inherent))


def _of(alias: object) -> Quantity:
    kind = get_args(alias)[1]
    assert isinstance(kind, Quantity)
    return kind


def _word(key: str, group: str, heading: str, words: tuple[str, ...], help: str, *others: str, scope: str = "item",
          ) -> ListField:  # fmt: skip
    return ListField(key, group, heading, others, "word", words=words, help=help, scope=scope)


def _text(key: str, group: str, heading: str, help: str, *others: str, scope: str = "item") -> ListField:
    return ListField(key, group, heading, others, "text", help=help, scope=scope)


def _number(key: str, group: str, heading: str, reference: str, alias: object, help: str, *others: str,
            scope: str = "item", inherent: tuple[tuple[str, str], ...] = (), asks: str = "") -> ListField:  # fmt: skip
    return ListField(key, group, heading, others, "number", reference, inherent, scope,
                     alias if isinstance(alias, Quantity) else _of(alias), asks=asks, help=help)  # fmt: skip


_LIMIT = "Of the bare valve, at the test size and head, in the form of column Form. Leave blank what was not tested."
_LENGTH = Quantity("length", "length", "size", low=0.0)
_ATMOSPHERE = Quantity("atmosphere", "barometric pressure at the site", "pressure", low=0.2, high=2.0,
                       zero_is_blank=True, remedy="No site has it (0.22 bar at 11000 m, 1.8 bar at -5000 m by the "
                       "standard atmosphere): check the unit.")  # fmt: skip
_PLACE = Quantity("pressure there", "pressure in the place of the outlet, absolute", "pressure", low=0.0)
_LOSS = Quantity("loss", "friction loss", "pressure", low=0.0, closed_low=True,
                 remedy="A loss is counted positive; leave it blank where it is not known.")  # fmt: skip

FIELDS: tuple[ListField, ...] = (
    _text("tag", "item", "Tag", "The item's tag; the rows of one tag are its cases.", "Tag no", "Tag number", "Item",
          "Item no", "Valve tag", "Valve", "Equipment", "Position", scope="case"),
    _text("case", "item", "Case", "Name of the operating case: start-up, minimum, normal, maximum, upset.",
          "Operating case", "Op case", "Op. case", "Condition", "Operating condition", "Flow case", scope="case"),
    _word("kind", "item", "Kind", tuple(KINDS), "valve (blank), orifice (one plate), plates (several in series).",
          "Item kind", "Item type", "Kind of item"),
    _text("service", "item", "Service", "What it does.", "Description", "Duty", "Service description"),
    _number("elevation", "site", "Site elevation", "m", q.Elevation,
            "Height above sea level: gives the atmosphere that gauge pressures need.", "Elevation", "Altitude",
            "Site altitude"),
    _number("atmosphere", "site", "Atmosphere", "bar", _ATMOSPHERE, "Barometric pressure, instead of the elevation.",
            "Barometric pressure", "Atmospheric pressure", "Ambient pressure", "Site atmosphere", "Patm", "p atm"),
    _text("fluid", "liquid", "Liquid", "A liquid by its usual name; 'lowpoint functions LP_DENSITY' lists them. Blank "
          "where pv, pc and density are given.", "Medium", "Fluid", "Process fluid", "Fluid name"),
    _number("salinity", "liquid", "Salinity", "g/kg", q.Salinity, "Of sea water and brine, needed for these.",
            "Salt content"),
    _number("t", "liquid", "Temperature", "K", q.T, "At the inlet.", "T", "Temp", "T1", "Inlet temperature",
            "Flowing temperature", "Operating temperature", "Fluid temperature", scope="case"),
    _number("flow", "liquid", "Flow", "m3/h", q.Flow, "Volume or mass flow, at flowing conditions.", "Q", "Flow rate",
            "Volume flow", "Mass flow", "Flowrate", "W", scope="case"),
    _number("p1", "liquid", "p1", "bar", q.P1, "At the inlet, before the reducer. Say bar a or bar g in the heading.",
            "Inlet pressure", "Upstream pressure", "Pressure in", "Inlet press", "Inlet press.",
            "Inlet pressure p1", "Inlet pressure p1, absolute", "P in", "Pin", scope="case"),
    _number("p2", "liquid", "p2", "bar", q.P2, "At the outlet, behind the expander; or give the place of the outlet.",
            "Outlet pressure", "Downstream pressure", "Pressure out", "Outlet press", "Outlet press.",
            "Outlet pressure p2", "Outlet pressure p2, absolute", "P out", "Pout", "Back pressure", scope="case"),
    _number("pv", "liquid", "pv", "bar", q.PV, "Vapour pressure at the inlet temperature; goes before the computed "
            "one.", "Vapour pressure", "Vapor pressure", "Vapour pressure pv", "Psat", "Saturation pressure",
            scope="case"),
    _number("pc", "liquid", "pc", "bar", q.PC, "Critical pressure; goes before the computed one.",
            "Critical pressure", "Critical pressure pc", "Pcrit"),
    _number("density", "liquid", "Density", "kg/m3", q.Density, "At flowing conditions; goes before the computed one.",
            "Rho", "Flowing density", "Density at inlet", scope="case",
            inherent=(("SG", "SG"), ("Specific gravity", "SG"), ("Relative density", "SG"))),
    _number("viscosity", "liquid", "Viscosity", "mPa.s", q.Viscosity, "Dynamic or kinematic, for viscous liquids; "
            "needs Fd, valve size and trim too.", "Dynamic viscosity", "Kinematic viscosity", "Mu", "Nu",
            scope="case"),
    _number("sound_speed", "liquid", "Speed of sound", "m/s", q.SoundSpeed, "For the noise of a liquid that is not "
            "known by name.", "Sound speed", "Sonic velocity", scope="case"),
    _word("outlet", "outlet", "Outlet into", tuple(OUTLETS), "pipe: outlet pressure there is given; submerged: below "
          "the level of an open or closed tank; free jet: into the open; falling leg: down a filled leg to its end.",
          "Outlet", "Discharge", "Place of the outlet", "Discharge into", "Outlet place"),
    _number("outlet_pressure", "outlet", "Pressure there", "bar", _PLACE, "Of the pipe, or of the gas over the liquid; "
            "blank: the atmosphere (not for a pipe).", "Pressure at the outlet place", "Tank pressure",
            "Discharge pressure", "Outlet place pressure", scope="case"),
    _number("outlet_rise", "outlet", "Rise to the place", "m", q.Rise, "From the valve up to the liquid's level, the "
            "end of the leg or the point in the pipe; downward negative.", "Rise", "Elevation change", "Static rise",
            "Outlet rise", scope="case"),
    _number("outlet_loss", "outlet", "Friction to the place", "bar", _LOSS, "Friction loss between the valve and the "
            "place; blank: none.", "Friction loss", "Line loss", "Outlet loss", scope="case"),
    _text("style", "valve", "Style", "Valve style as 'lowpoint functions LP_TYPICAL' lists it.", "Valve style",
          "Valve type", "Body type"),
    _word("direction", "valve", "Flow direction", ("open", "close", "inward", "outward", "between seats", "either"),
          "Which way the flow acts, where the style's typical values depend on it.", "Direction", "Flow to"),
    _number("valve_size", "valve", "Valve size", "mm", q.ValveSize, "Nominal size d.", "Valve size d", "Size",
            "Nominal size", "Body size", "d", inherent=(("DN", "mm"), ("NPS", "in"), ("Valve DN", "mm"))),
    _number("pipe_in", "valve", "Inlet pipe bore", "mm", q.PipeIn, "Inside diameter of the pipe before it; blank: "
            "line size. For plates: of their pipe.", "Pipe", "Pipe bore", "D1", "Inlet pipe", "Inlet pipe bore D1",
            "Pipe inside diameter", "Pipe ID", "Inlet pipe ID", "Upstream pipe ID"),
    _number("pipe_out", "valve", "Outlet pipe bore", "mm", q.PipeOut, "Inside diameter of the pipe after it; blank: "
            "as before it.", "D2", "Outlet pipe", "Outlet pipe bore D2", "Outlet pipe ID", "Downstream pipe ID"),
    _number("pipe_wall", "valve", "Pipe wall", "mm", q.PipeWall, "Wall of the pipe after it, for the noise.",
            "Wall thickness", "Pipe wall thickness"),
    _number("rated", "valve", "Rated coefficient", "Kv", q.Rated, "Flow coefficient fully open; Kv or Cv in the "
            "heading.", "Rated flow coefficient", "Capacity",
            inherent=(("Rated Kv", "Kv"), ("Rated Cv", "Cv"), ("Kvs", "Kv"), ("Kv", "Kv"), ("Cv", "Cv"),
                      ("Kv100", "Kv"), ("Cvs", "Cv"))),
    _word("characteristic", "valve", "Characteristic", ("linear", "equal percentage"), "Inherent characteristic; or "
          "name a table.", "Inherent characteristic", "Trim characteristic"),
    _number("rangeability", "valve", "Rangeability", "", q.Rangeability, "Inherent rangeability R, for equal "
            "percentage.", "R", "Inherent rangeability"),
    _text("table", "valve", "Table", "Name of the valve's table on a sheet with columns Table, Travel and more.",
          "Travel table", "Vendor table"),
    _word("trim", "valve", "Trim", ("full", "reduced"), "Trim class, for viscous liquids.", "Trim class"),
    _number("fl", "valve", "FL", "", q.FL, "Recovery factor at the opening of this case: every row needs its own.",
            "Recovery factor",
            "Liquid pressure recovery factor", scope="case", asks=f"'{TYPICAL}': the typical value of the style"),
    _word("fl_basis", "valve", "Basis of FL", BASES, "Blank: tested (somebody gave it).", "FL basis"),
    _number("fd", "valve", "Fd", "", q.Fd, "Valve style modifier, for noise, estimates and viscous liquids.",
            "Style modifier", "Valve style modifier", asks=f"'{TYPICAL}': the typical value of the style"),
    _number("xfz", "valve", "xFz", "", q.Xfz, "xF at which cavitation begins at 6 bar, tested. Taken for the "
            "incipient limit where that is blank."),
    _word("form", "limits", "Form", FORMS, "Form of the limits in this row: upstream (p1-pv)/(p1-p2) (blank), "
          "downstream (p2-pv)/(p1-p2), xf (p1-p2)/(p1-pv).", "Form of the limits", "Index form", "Limit form"),
    _number("incipient", "limits", "Incipient", "", q.Incipient, _LIMIT, "Incipient limit", "Sigma i",
            "Sigma incipient", "Incipient cavitation", asks=f"'{ESTIMATE}': 1/xFz by the formula of IEC 60534-8-4"),
    _number("constant", "limits", "Constant", "", q.Constant, _LIMIT, "Constant limit", "Sigma c", "Sigma constant",
            "Constant cavitation"),
    _number("damage", "limits", "Damage", "", q.Damage, _LIMIT, "Damage limit", "Sigma id", "Sigma damage",
            "Incipient damage"),
    _number("vibration", "limits", "Vibration", "", q.Vibration, _LIMIT, "Vibration limit", "Sigma mv",
            "Sigma vibration", "Maximum vibration"),
    _word("limits_basis", "limits", "Basis of the limits", BASES, "Blank: tested (somebody gave them).",
          "Limits basis", "Basis", "Limit basis"),
    _number("size_ref", "limits", "Test size", "mm", q.SizeRef, "Valve size that the limits were tested at.",
            "Reference size", "Size ref"),
    _number("head_ref", "limits", "Test head", "bar", q.HeadRef, "p1 - pv that the limits were tested at.",
            "Test head p1-pv", "Reference head", "Head ref"),
    _number("size_exponent", "limits", "Size exponent", "", q.SizeExponent, "Exponent b of the size effect.",
            "Size exponent b", "b"),
    _number("head_exponent", "limits", "Pressure exponent", "", q.HeadExponent, "Exponent a of the pressure effect.",
            "Pressure exponent a", "Head exponent", "a"),
    _word("method", "limits", "Scale method", METHODS, "How the effects enter: isa (blank), upstream, tullis.",
          "Scaling method", "Method"),
    _word("keep", "limits", "Limit to keep", KEEPS, "The limit above which the index must stay; blank: the mildest "
          "that is given, incipient before constant before damage before vibration.", "Keep", "Required limit"),
    _number("bore", "plate", "Bore", "mm", q.OrificeBore, "Diameter of the bore, or of each hole.", "Orifice bore",
            "Plate bore"),
    _number("bore_length", "plate", "Bore length", "mm", q.BoreLength, "Parallel part of the bore; blank: a thin "
            "sharp edge.", "Parallel length"),
    _number("holes", "plate", "Holes", "", q.Holes, "Number of equal holes; blank: one.", "Number of holes"),
    ListField("bores", "plate", "Bores", ("Bores of the set", "Plate bores"), "bores", "mm", quantity=_LENGTH,
              help="Of a set, from the first plate to the last: 42; 48; 56."),
    ListField("spacing", "plate", "Spacing", ("Plate spacing", "Distance between plates"), "number", "mm",
              quantity=_LENGTH, help="From plate to plate of a set; blank: six pipe diameters."),
)  # fmt: skip
BY_KEY = {field.key: field for field in FIELDS}

TABLE_FIELDS: tuple[ListField, ...] = (
    _text("table", "item", "Table", "Name of the table.", "Travel table", "Vendor table"),
    ListField(
        "travel", "valve", "Travel", ("Opening", "Lift", "h"), "number", "%", quantity=_of(q.Travel), help="Opening."
    ),
    ListField(
        "coefficient",
        "valve",
        "Coefficient",
        ("Flow coefficient",),
        "number",
        "Kv",
        (("Kv", "Kv"), ("Cv", "Cv")),
        quantity=_of(q.Coefficient),
        help="Flow coefficient at that opening.",
    ),
    *(BY_KEY[key] for key in ("fl", "xfz", "incipient", "constant", "damage", "vibration")),
)
"""Columns of a sheet with vendors' tables by opening; limits there are in the upstream form."""

CARRIED = (
    "Remark", "Remarks", "Note", "Notes", "Comment", "Comments", "Area", "Unit", "Plant", "System", "Line", "Line no",
    "Line number", "P&ID", "PID", "Drawing", "Document", "Rev", "Revision", "Date", "By", "Status", "No", "Pos",
    "Vendor", "Supplier", "Manufacturer", "Model", "Serial", "Serial no", "Material", "Body material", "Rating",
    "Pressure class", "Actuator", "Purchase order", "Package", "Location", "Building",
)  # fmt: skip
"""Columns that lists often have and that say nothing about cavitation: left alone without a word."""

NOT_JUDGED = frozenset({"case", "service", "pipe_wall", "sound_speed", "spacing"})
"""Fields that no verdict rests on: an unreadable cell there is told, and the row judged."""
