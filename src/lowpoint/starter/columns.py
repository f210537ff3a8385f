"""The columns of the list, each once: heading, quantity, where its note comes from, and the formula of a cell.

A formula names other columns in braces, ``{p1}``, and stands for the cell of that column in the same row; LP_ names
become those of the set of units when it is written. ``{bar}`` is the absolute pressure unit in words.
"""

from __future__ import annotations

from dataclasses import dataclass

from lowpoint.starter.why import BY_CHARACTERISTIC, BY_TABLE, ESTIMATED, chain

__all__ = ["BY_KEY", "COLUMNS", "GROUPS", "Column", "for_estimates", "for_tables"]

GROUPS = {
    "item": "Item and verdict",
    "liquid": "Operating case and liquid",
    "valve": "Valve",
    "limits": "Limits as tested (upstream form)",
    "state": "At the valve",
    "sizing": "Sizing",
    "index": "Index and limits at this size, pressure and installation",
    "result": "Result",
}
"""The bands over the headings, by key, in order."""


@dataclass(frozen=True, slots=True)
class Column:
    """One column. ``of`` is where its note comes from: a function, or ``FUNCTION.argument``; ``note`` adds to that.

    ``dimension`` names the unit (:mod:`lowpoint.units`); ``fmt`` the number format by key of the style; ``words`` the
    list that its cells are chosen from.
    """

    key: str
    group: str
    heading: str
    of: str = ""
    dimension: str = ""
    fmt: str = "text"
    width: float = 9.0
    note: str = ""
    formula: str = ""
    words: str = ""

    @property
    def is_input(self) -> bool:
        """Is the column typed by the user?"""
        return not self.formula


def _blank_guard(cell: str, formula: str) -> str:
    """A blank cell gives #N/A: some programs hand a blank over as 0, which is a temperature and a gauge pressure."""
    return f"IF(ISBLANK({cell}),NA(),{formula})"


def _absolute(cell: str) -> str:
    return "=" + _blank_guard(cell, f'LP_UNIT({cell},{{p_unit}},"{{bar}}",{{atmosphere}})')


def _or_given(given: str, formula: str) -> str:
    return f"=IF(ISBLANK({given}),{formula},{given})"


def _where_given(limit: str, call: str) -> str:
    """A limit that is not given is left out with an empty text, which LP_ functions take for a blank cell."""
    return f'=IF(ISBLANK({{{limit}_ref}}),"",{call})'


def _scaled(limit: str) -> str:
    test = "{size_ref},{p1}-{pv},{head_ref},{size_exponent},{head_exponent}"
    return _where_given(limit, f"LP_SIGMA_SCALED({{{limit}_ref}},{{valve_size}},{test},Scale_method)")


def _installed(limit: str) -> str:
    sizes = "{coefficient},{valve_size},{pipe_in},{pipe_out}"
    return _where_given(limit, f"LP_LIMIT_INSTALLED({{{limit}_scaled}},{sizes})")


_GIVEN = "Type a value where the liquid is not one that Lowpoint knows; it goes before the computed one."
_STATED = "Upstream form (p1-pv)/(p1-p2), at the test size and test head. Leave blank what was not tested."
_FOR_CASE = "For this size, this p1-pv and this case."

COLUMNS: tuple[Column, ...] = (
    Column("tag", "item", "Tag", fmt="tag", width=13, note="Area number, function, number: a numbering of the site."),
    Column("case", "item", "Case", width=9.5, words="cases",
           note="Operating case. Judge an item by the worst of its cases: start-up breaks what normal passes."),
    Column("verdict", "item", "Verdict (basis)", fmt="verdict", width=22,
           note="State of the flow, and in brackets the basis of the limit that decides: tested, published or "
           "estimated. Clear is said only where an incipient limit is given.",
           formula='=IF({regime}="flashing","flashing",{regime}&" ("&IF(OR({regime}="choked",{regime}="unjudged"),'
           '{fl_basis},{limits_basis})&")")'),
    Column("margin", "item", "Margin to the limit to keep", "LP_MARGIN", fmt="percent", width=10,
           note="Index over the limit to keep, less one. At or below 0 the limit is crossed.",
           formula="=LP_MARGIN({sigma},{limit})"),
    Column("area", "item", "Area", width=19, words="areas", note="An area of sheet Site, whose elevation gives the "
           "barometric pressure."),
    Column("service", "item", "Service", width=31, note="What the valve does."),
    # --- operating case and liquid ---
    Column("fluid", "liquid", "Liquid", "LP_VAPOUR_PRESSURE.fluid", width=20, words="fluids",
           note="Usual and trade names are understood; 'lowpoint functions LP_DENSITY' lists them."),
    Column("salinity", "liquid", "Salinity", "LP_VAPOUR_PRESSURE.salinity", "salinity", "one", 8.5,
           note="Type it in every row with sea water or brine."),
    Column("t", "liquid", "Temperature", "LP_VAPOUR_PRESSURE.t", "temperature", "one", 11),
    Column("flow", "liquid", "Flow", "LP_COEFFICIENT.flow", "flow", "flow", 9.5),
    Column("p1_given", "liquid", "Inlet pressure, as read", fmt="pressure", width=10,
           note="At the valve inlet, in the unit of column Pressure unit."),
    Column("p2_given", "liquid", "Outlet pressure, as read", fmt="pressure", width=10,
           note="At the valve outlet, in the unit of column Pressure unit."),
    Column("p_unit", "liquid", "Pressure unit", width=9, words="pressure_units",
           note="Say whether the readings are gauge or absolute: nothing is assumed."),
    Column("pv_given", "liquid", "Vapour pressure, if given", "LP_COEFFICIENT.pv", "pressure", "fine", 10, note=_GIVEN),
    Column("pc_given", "liquid", "Critical pressure, if given", "LP_COEFFICIENT.pc", "pressure", "pressure", 10,
           note=_GIVEN),
    Column("density_given", "liquid", "Density, if given", "LP_COEFFICIENT.density", "density", "typed", 9,
           note=_GIVEN),
    # --- valve ---
    Column("style", "valve", "Style", "LP_TYPICAL.style", width=44, words="styles"),
    Column("direction", "valve", "Flow direction", "LP_TYPICAL.direction", width=14, words="directions"),
    Column("valve_size", "valve", "Valve size d", "LP_COEFFICIENT.valve_size", "size", "size", 8),
    Column("pipe_in", "valve", "Inlet pipe bore D1", "LP_COEFFICIENT.pipe_in", "size", "size", 8.5),
    Column("pipe_out", "valve", "Outlet pipe bore D2", "LP_COEFFICIENT.pipe_out", "size", "size", 8.5),
    Column("rated", "valve", "Rated coefficient", "LP_TRAVEL.rated", "coefficient", "coefficient", 10.5),
    Column("characteristic", "valve", "Characteristic", "LP_TRAVEL.characteristic", width=16,
           words="characteristics", note="Or the name of a table on sheet Valves, as a remark; the formulas of the row "
           "then read that table."),
    Column("rangeability", "valve", "Rangeability", "LP_TRAVEL.rangeability", "ratio", "whole", 11),
    Column("fl", "valve", "FL", "LP_COEFFICIENT.fl", "ratio", "factor", 9.5,
           note="In rows with a vendor's table it is read from the table at the opening."),
    Column("fl_basis", "valve", "Basis of FL", width=10.5, words="bases", note="tested, published or estimated."),
    Column("fd", "valve", "Fd", "LP_XFZ.fd", "ratio", "factor", 6.5),
    # --- limits ---
    Column("incipient_ref", "limits", "Incipient", "LP_REGIME.incipient", "ratio", "index", 9, note=_STATED),
    Column("constant_ref", "limits", "Constant", "LP_REGIME.constant", "ratio", "index", 9, note=_STATED),
    Column("damage_ref", "limits", "Damage", "LP_REGIME.damage", "ratio", "index", 9, note=_STATED),
    Column("limits_basis", "limits", "Basis of the limits", width=10.5, words="bases",
           note="The weakest basis of the limits in this row: tested, published or estimated. All limits of this "
           "book are demo values, of no vendor."),
    Column("size_ref", "limits", "Test size", "LP_SIGMA_SCALED.size_ref", "size", "size", 8),
    Column("head_ref", "limits", "Test head p1-pv", "LP_SIGMA_SCALED.head_ref", "pressure", "pressure", 8.5),
    Column("size_exponent", "limits", "Size exponent b", "LP_SIGMA_SCALED.size_exponent", "ratio", "factor", 9.5,
           note="Belongs to the method named on sheet Site."),
    Column("head_exponent", "limits", "Pressure exponent a", "LP_SIGMA_SCALED.head_exponent", "ratio", "factor", 9.5,
           note="Belongs to the method named on sheet Site."),
    Column("keep", "limits", "Limit to keep", width=11, words="limits",
           note="The limit above which the index must stay; the margin is to this one. A valve that runs for years "
           "may have to keep constant, a start-up valve damage."),
    # --- liquid at the valve ---
    Column("atmosphere", "state", "Atmosphere", "LP_ATMOSPHERE", "pressure", "fine", 11,
           note="Of the row's area, from sheet Site.",
           formula="=INDEX(Site_atmosphere,MATCH({area},Site_area,0))"),
    Column("p1", "state", "Inlet pressure p1, absolute", "LP_COEFFICIENT.p1", "pressure", "pressure", 10,
           formula=_absolute("{p1_given}")),
    Column("p2", "state", "Outlet pressure p2, absolute", "LP_COEFFICIENT.p2", "pressure", "pressure", 10,
           formula=_absolute("{p2_given}")),
    Column("pv", "state", "Vapour pressure pv", "LP_VAPOUR_PRESSURE", "pressure", "fine", 9.5,
           formula=_or_given("{pv_given}", _blank_guard("{t}", "LP_VAPOUR_PRESSURE({fluid},{t},{salinity})"))),
    Column("pc", "state", "Critical pressure pc", "LP_CRITICAL_PRESSURE", "pressure", "pressure", 9.5,
           formula=_or_given("{pc_given}", "LP_CRITICAL_PRESSURE({fluid})")),
    Column("density", "state", "Density", "LP_DENSITY", "density", "density", 9,
           formula=_or_given("{density_given}", _blank_guard("{t}", "LP_DENSITY({fluid},{t},{p1},{salinity})"))),
    # --- sizing ---
    Column("coefficient", "sizing", "Required coefficient", "LP_COEFFICIENT", "coefficient", "coefficient", 10.5,
           note="With reducers, choking included.",
           formula="=LP_COEFFICIENT({flow},{p1},{p2},{pv},{pc},{density},{fl},{valve_size},{pipe_in},{pipe_out})"),
    Column("travel", "sizing", "Opening", "LP_TRAVEL", "travel", "one", 9,
           note="In rows with a vendor's table by LP_OPERATING_TRAVEL.",
           formula="=LP_TRAVEL({coefficient},{rated},{characteristic},{rangeability})"),
    Column("velocity", "sizing", "Velocity in valve size", "LP_VELOCITY", "velocity", "pressure", 9,
           formula="=LP_VELOCITY({flow},{valve_size})"),
    Column("fl_typical", "sizing", "Typical FL", "LP_TYPICAL", "ratio", "factor", 8,
           note="To compare with the FL used; never taken in its place.",
           formula='=LP_TYPICAL({style},"fl",{direction})'),
    Column("drop", "sizing", "Drop p1-p2", dimension="pressure", fmt="pressure", width=9, note="Inlet less outlet.",
           formula="={p1}-{p2}"),
    Column("choked_drop", "sizing", "Choked drop", "LP_CHOKED_DROP", "pressure", "pressure", 9,
           formula="=LP_CHOKED_DROP({p1},{pv},{pc},{fl},{coefficient},{valve_size},{pipe_in},{pipe_out})"),
    # --- index and limits ---
    Column("sigma", "index", "Index sigma", "LP_SIGMA", "ratio", "index", 9, note="Upstream form.",
           formula="=LP_SIGMA({p1},{p2},{pv})"),
    Column("choked", "index", "Choked", "LP_SIGMA_CHOKED", "ratio", "index", 9,
           formula="=LP_SIGMA_CHOKED({p1},{pv},{pc},{fl},{coefficient},{valve_size},{pipe_in},{pipe_out})"),
    Column("incipient_scaled", "index", "Incipient, scaled", "LP_SIGMA_SCALED", "ratio", "index", 9.5, note=_FOR_CASE,
           formula=_scaled("incipient")),
    Column("constant_scaled", "index", "Constant, scaled", "LP_SIGMA_SCALED", "ratio", "index", 9.5, note=_FOR_CASE,
           formula=_scaled("constant")),
    Column("damage_scaled", "index", "Damage, scaled", "LP_SIGMA_SCALED", "ratio", "index", 9.5, note=_FOR_CASE,
           formula=_scaled("damage")),
    Column("incipient", "index", "Incipient, installed", "LP_LIMIT_INSTALLED", "ratio", "index", 9.5,
           formula=_installed("incipient")),
    Column("constant", "index", "Constant, installed", "LP_LIMIT_INSTALLED", "ratio", "index", 9.5,
           formula=_installed("constant")),
    Column("damage", "index", "Damage, installed", "LP_LIMIT_INSTALLED", "ratio", "index", 9.5,
           formula=_installed("damage")),
    # --- result ---
    Column("regime", "result", "State of the flow", "LP_REGIME", fmt="verdict", width=12,
           formula="=LP_REGIME({sigma},{incipient},{constant},{damage},,{choked})"),
    Column("limit", "result", "Limit to keep, value", dimension="ratio", fmt="index", width=9.5,
           note="The limit of column Limit to keep, at this size, pressure and installation.",
           formula='=CHOOSE(MATCH({keep},{{"incipient","constant","damage","choked"}},0),{incipient},{constant},'
           "{damage},{choked})"),
    Column("kept", "result", "Kept?", fmt="verdict", width=11, note="no: the index is at or below the limit to keep.",
           formula='=IF({margin}>0,"yes","no")'),
    Column("allowed_drop", "result", "Largest drop that keeps it", "LP_ALLOWED_DROP", "pressure", "pressure", 10,
           formula="=LP_ALLOWED_DROP({p1},{pv},{limit})"),
    Column("vapour", "result", "Vapour after the valve", "LP_FLASH", "ratio", "percent", 9,
           note="Mass fraction; 0 where the outlet is above the vapour pressure.",
           formula="=IF({p2}>{pv},0,LP_FLASH({fluid},{t},{p1},{p2}))"),
    Column("why", "result", "Why (LP_WHY)", "LP_WHY", width=118,
           note="The first step of the row that has no answer, in words; else what the required coefficient cautions "
           "about, or ok.", formula=chain(BY_CHARACTERISTIC)),
    Column("remark", "result", "Remark", width=44, note="Yours: whatever a reader of this row should know."),
    Column("errors", "result", "Cells with errors", fmt="whole", width=8, note="Counted over the computed cells of the "
           "row.", formula="=SUMPRODUCT(--ISERROR({atmosphere}:{vapour}))"),
    Column("rank", "result", "Order (working)", fmt="working", width=11,
           note="Margin with a trace of the row number, so that no two are equal; empty where there is none.",
           formula='=IF(ISNUMBER({margin}),{margin}+ROW()*1E-12,"")'),
    Column("unanswered", "result", "No answer (working)", fmt="working", width=11,
           note="Row number where a computed cell is an error, for sheet Summary; else empty.",
           formula='=IF({errors}>0,ROW(),"")'),
)  # fmt: skip

BY_KEY = {column.key: column for column in COLUMNS}


def for_tables(table: str) -> dict[str, str]:
    """The formulas that differ in a row whose valve has a vendor's table of that name."""
    columns = f"{table}_travel,{table}_coefficient,{table}_fl"
    return {
        "travel": "=LP_OPERATING_TRAVEL({flow},{p1},{p2},{pv},{pc},{density}," + columns
        + ",{valve_size},{pipe_in},{pipe_out})",
        "fl": f"=LP_AT_TRAVEL({{travel}},{table}_travel,{table}_fl)",
        "incipient_ref": f"=LP_AT_TRAVEL({{travel}},{table}_travel,{table}_incipient)",
        "why": chain(BY_TABLE, columns),
    }  # fmt: skip


def for_estimates() -> dict[str, str]:
    """The formulas that differ in a row whose incipient limit is estimated; at its own size and pressure."""
    return {
        "incipient_ref": "=1/LP_XFZ({coefficient},{fl},{fd},{p1})",
        "size_ref": "={valve_size}",
        "head_ref": "={p1}-{pv}",
        "why": chain(BY_CHARACTERISTIC + ESTIMATED),
    }
