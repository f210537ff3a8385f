"""The cells of a sheet of plates, each once: heading, where its note comes from, its formula.

Formulas name cells in braces: inputs of the sheet by their key (``{pipe}``), cells of the same row by the key of
their column (``{bore}``), and ``{before}`` the cell above in the column of pressures.
"""

from __future__ import annotations

from lowpoint.starter.columns import Column

__all__ = ["CASES", "DESIGN", "FLASHED", "GIVEN", "MOST", "OTHER", "PLATES", "WHY_BORE", "WHY_FLOW", "WHY_LIMIT",
           "WHY_THICKNESS"]  # fmt: skip

MOST = 8
"""Plates that the tables of a sheet have room for."""


def _column(key: str, heading: str, of: str = "", dimension: str = "", fmt: str = "text", formula: str = "",
            note: str = "", width: float = 11.0) -> Column:  # fmt: skip
    return Column(key, "", heading, of, dimension, fmt, width, note, formula)


CASES: tuple[Column, ...] = (
    _column("case", "Case"),
    _column("t", "Temperature", "LP_VAPOUR_PRESSURE.t", "temperature", "one"),
    _column("flow", "Flow wanted", "LP_ORIFICE_BORE.flow", "flow", "flow"),
    _column("p1", "Pressure before the first plate", "LP_ORIFICE_BORE.p1", "pressure", "pressure"),
    _column("p2", "Pressure after the plates in liquid", "LP_ORIFICE_BORE.p2", "pressure", "pressure",
            note="Where the liquid leaves the set without flashing."),
    _column("vessel", "Pressure in the flash vessel", "", "pressure", "pressure",
            note="After the one plate in which the liquid flashes."),
    _column("pv", "Vapour pressure pv", "LP_VAPOUR_PRESSURE", "pressure", "fine",
            "=LP_VAPOUR_PRESSURE({fluid},{t},{salinity})"),
    _column("pc", "Critical pressure pc", "LP_CRITICAL_PRESSURE", "pressure", "pressure",
            "=LP_CRITICAL_PRESSURE({fluid})"),
    _column("density", "Density", "LP_DENSITY", "density", "density", "=LP_DENSITY({fluid},{t},{p1},{salinity})",
            "At the pressure before the first plate; taken for the whole set."),
    _column("velocity", "Velocity in the pipe", "LP_VELOCITY", "velocity", "working",
            "=LP_VELOCITY({flow},{pipe})"),
    _column("reynolds", "Reynolds number of the pipe", "", "", "count",
            "={density}*{velocity}*{pipe}/LP_VISCOSITY({fluid},{t},{p1},{salinity})",
            "4 Q rho/(pi D mu). The loss of the plates is taken at 1e6, which a set well above 1e5 comes within "
            "half a per cent of: the next line tells."),
    _column("effect", "Loss of plate 1 at that number, over that taken", "LP_ORIFICE_LOSS", "", "fine",
            "=LP_ORIFICE_LOSS({bore_one},{pipe},{edge},,{reynolds})/LP_ORIFICE_LOSS({bore_one},{pipe},{edge})",
            "With the bore as drilled."),
)  # fmt: skip
"""One row each, design case and other case side by side."""

GIVEN: tuple[Column, ...] = (
    _column("fluid", "Liquid", "LP_VAPOUR_PRESSURE.fluid"),
    _column("salinity", "Salinity", "LP_VAPOUR_PRESSURE.salinity", "salinity", "one"),
    _column("pipe", "Inside diameter of the pipe", "LP_ORIFICE_BORE.pipe", "size", "size"),
    _column("edge", "Parallel part of the bore", "LP_ORIFICE_BORE.bore_length", "size", "typed",
            note="Plates are bevelled on the outlet side: the parallel part is not the plate's thickness. Up to 0.02 "
            "of the pipe ISO 5167-2 calls it thin (from memory)."),
    _column("target", "Least index of a plate, upstream form", "LP_STAGES.target", "", "typed"),
    _column("keep", "Limit to keep", "LP_ORIFICE_LIMIT.limit"),
    _column("support", "Support diameter of a plate", "LP_PLATE_THICKNESS.support_diameter", "size", "size"),
    _column("stress", "Allowable stress", "LP_PLATE_THICKNESS.stress", "stress", "one"),
    _column("load", "Load of a blocked plate", "LP_PLATE_THICKNESS.drop", "pressure", "pressure",
            "=MAX({p1}-{end},{p1_other}-{end_other})", "The whole drop of the worse case: any plate can be blocked."),
    _column("plates", "Plates in liquid, least number", "LP_STAGES", "", "whole",
            "=LP_STAGES({p1},{p2},{pv},{target})", "Type a larger number to take more, up to 8."),
)  # fmt: skip
"""What holds for both cases."""


def _limit(kind: str, before: str, pv: str, pc: str) -> str:
    return f'LP_ORIFICE_LIMIT("{kind}",{{bore}},{{pipe}},{{edge}},,{before},{pv},{pc})'


_KEPT = 'LP_MARGIN({sigma},IF({keep}="incipient",{incipient},IF({keep}="choked",{choked},{constant})))'
_STATE = "LP_REGIME({sigma},{incipient},{constant},,,{choked})"


def _judged(before: str, after: str, pv: str, pc: str) -> tuple[Column, ...]:
    """Index, limits, margin and state of a plate between two pressures."""
    return (
        _column("sigma", "Index sigma", "LP_SIGMA", "", "index", f"LP_SIGMA({before},{after},{pv})"),
        *(
            _column(kind, f"{kind.capitalize()} limit", "LP_ORIFICE_LIMIT", "", "index", _limit(kind, before, pv, pc))
            for kind in ("incipient", "constant", "choked")
        ),
        _column("margin", "Margin to the limit to keep", "LP_MARGIN", "", "percent", _KEPT,
                "Index over the limit to keep, less one. At or below 0 the limit is crossed."),
        _column("state", "State of the flow", "LP_REGIME", "", "verdict", _STATE),
    )  # fmt: skip


_NET = "LP_ORIFICE_DROP({flow},{bore},{pipe},{density},,{edge})"
_TAP = 'LP_ORIFICE_DROP({flow},{bore},{pipe},{density},,{edge},,"flange")'

DESIGN: tuple[Column, ...] = (
    _column("plate", "Plate", "", "", "whole"),
    _column("after", "Pressure after the plate", "", "pressure", "pressure", "{staged}",
            "From the working column at the right, which is one array formula of LP_STAGE_PRESSURES."),
    _column("drop", "Net drop", "", "pressure", "pressure", "{before}-{after}",
            "Permanent: from well before the plate to where the jet has spread."),
    _column("bore", "Bore", "LP_ORIFICE_BORE", "size", "working",
            "LP_ORIFICE_BORE({flow},{before},{after},{pipe},{density},{pv},{pc},,{edge})"),
    _column("beta", "Bore over pipe", "", "", "index", "{bore}/{pipe}",
            "Diameter ratio beta; ISO 5167-2 holds from 0.1 to 0.75."),
    _column("k", "Loss coefficient K", "LP_ORIFICE_LOSS", "", "flow", "LP_ORIFICE_LOSS({bore},{pipe},{edge})"),
    _column("fl", "FL", "LP_ORIFICE_FL", "", "index", "LP_ORIFICE_FL({bore},{pipe},{edge})"),
    _column("net", "Net drop of that bore", "LP_ORIFICE_DROP", "pressure", "pressure", _NET,
            "Equals the net drop, unless the plate is choked."),
    _column("tap", "Drop between flange taps", "LP_ORIFICE_DROP", "pressure", "pressure", _TAP,
            "What a gauge between the taps shows; never the net drop."),
    _column("jet", "Lowest pressure in the jet", "LP_THROAT_PRESSURE", "pressure", "pressure",
            "LP_THROAT_PRESSURE({before},{after},{fl},{pv},{pc})",
            "Above the vapour pressure it is no proof that nothing cavitates: only the limits judge."),
    *_judged("{before}", "{after}", "{pv}", "{pc}"),
    _column("thickness", "Thickness needed", "LP_PLATE_THICKNESS", "size", "one",
            'LP_PLATE_THICKNESS({load},{support},{bore},{stress},"simple")'),
)  # fmt: skip
"""The table of the design case, plates of equal index."""

OTHER: tuple[Column, ...] = (
    _column("plate", "Plate", "", "", "whole"),
    _column("bore", "Bore as drilled", "LP_ORIFICE_LOSS.bore", "size", "working"),
    _column("k", "Loss coefficient K", "LP_ORIFICE_LOSS", "", "flow", "LP_ORIFICE_LOSS({bore},{pipe},{edge})"),
    _column("fl", "FL", "LP_ORIFICE_FL", "", "index", "LP_ORIFICE_FL({bore},{pipe},{edge})"),
    _column("chokes", "Flow at which it chokes", "LP_FF", "flow", "working",
            "{area}*SQRT(2*({p1_other}-{floor})*1E5/({density_other}*({k}/{fl}^2+{k_before})))",
            "Flow at which the lowest pressure in this plate's jet is FF pv: A sqrt(2 (p1 - FF pv)/(rho (K/FL^2 + K of "
            "the plates before it)))."),
    _column("after", "Pressure after the plate", "", "pressure", "pressure", "{next}",
            "From the last plate backwards."),
    _column("before", "Pressure before the plate", "LP_ORIFICE_DROP", "pressure", "pressure",
            "MAX({after}+{net},{floor}+{net}/{fl}^2)",
            "The larger of pressure after + net drop, and FF pv + net drop/FL^2: with the second the plate is choked."),
    _column("net", "Net drop at the flow", "LP_ORIFICE_DROP", "pressure", "pressure",
            "LP_ORIFICE_DROP({passed},{bore},{pipe},{density_other},,{edge})"),
    _column("tap", "Drop between flange taps", "LP_ORIFICE_DROP", "pressure", "pressure",
            'LP_ORIFICE_DROP({passed},{bore},{pipe},{density_other},,{edge},,"flange")'),
    _column("carries", "Flow through the plate alone", "LP_ORIFICE_FLOW", "flow", "working",
            "LP_ORIFICE_FLOW({before},{after},{bore},{pipe},{density_other},{pv_other},{pc_other},,{edge})",
            "Between its own two pressures: every plate must carry the flow of the set."),
    *_judged("{before}", "{after}", "{pv_other}", "{pc_other}"),
)  # fmt: skip
"""The table of the other case, plates as drilled, marched with choking in force."""

PLATES: tuple[tuple[str, str, str, str], ...] = (
    ("free", "Flow if no plate choked, m³/h", "working",
     "={area}*SQRT(2*({p1_other}-{end_other})*1E5/({density_other}*SUM({k_all})))"),
    ("passed", "Flow that the set passes, m³/h", "working", "=MIN({free},MIN({chokes_all}))"),
    ("closure", "Check: pressure before plate 1, less p1, bar", "fine", "={before_one}-{p1_other}"),
)  # fmt: skip
"""Lines over the table of the other case."""

FLASHED: tuple[Column, ...] = (
    _column("vapour", "Vapour after the plate, mass share", "LP_FLASH", "", "percent",
            "=LP_FLASH({fluid},{t},{p2},{vessel})"),
    _column("two_phase", "Density after the plate", "LP_FLASH_DENSITY", "density", "density",
            "=LP_FLASH_DENSITY({fluid},{t},{p2},{vessel})"),
    _column("boils", "Boiling temperature in the vessel", "LP_SATURATION_TEMPERATURE", "temperature", "one",
            "=LP_SATURATION_TEMPERATURE({fluid},{vessel})", "Cooled to below this, nothing flashes."),
)  # fmt: skip
"""Lines under the table of the design case, where the last plate flashes."""

WHY_BORE = 'LP_WHY("LP_ORIFICE_BORE",{flow},{before},$B{row},{pipe},{density},{pv},{pc},,{edge})'
WHY_FLOW = 'LP_WHY("LP_ORIFICE_FLOW",{before},{after},{bore},{pipe},{density_other},{pv_other},{pc_other},,{edge})'
WHY_LIMIT = 'LP_WHY("LP_ORIFICE_LIMIT",{keep},{bore},{pipe},{edge},,{before},{pv},{pc})'
WHY_THICKNESS = 'LP_WHY("LP_PLATE_THICKNESS",{load},{support},{bore},{stress},"simple")'
