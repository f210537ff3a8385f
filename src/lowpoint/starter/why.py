"""The formula of the column that says why: the first step of a row without an answer, asked of LP_WHY."""

from __future__ import annotations

__all__ = ["BY_CHARACTERISTIC", "BY_TABLE", "ESTIMATED", "chain"]

_READINGS = tuple(
    (
        f"{{{p}}}",
        f'IF(ISBLANK({{{p}_given}}),"the {side} pressure is blank: type it",'
        f'LP_WHY("LP_UNIT",{{{p}_given}},{{p_unit}},"{{bar}}",{{atmosphere}}))',
    )
    for p, side in (("p1", "inlet"), ("p2", "outlet"))
)
_LIQUID = (
    ("{pv}", 'LP_WHY("LP_VAPOUR_PRESSURE",{fluid},{t},{salinity})'),
    ("{pc}", 'LP_WHY("LP_CRITICAL_PRESSURE",{fluid})'),
    ("{density}", 'LP_WHY("LP_DENSITY",{fluid},{t},{p1},{salinity})'),
)
_SIZES = "{valve_size},{pipe_in},{pipe_out}"
_STATE = "{flow},{p1},{p2},{pv},{pc},{density}"
_COEFFICIENT = f'LP_WHY("LP_COEFFICIENT",{_STATE},{{fl}},{_SIZES})'
BY_CHARACTERISTIC = (
    ("{coefficient}", _COEFFICIENT),
    ("{travel}", 'LP_WHY("LP_TRAVEL",{coefficient},{rated},{characteristic},{rangeability})'),
)
"""The steps of a row whose opening follows from a characteristic."""
BY_TABLE = (
    ("{travel}", f'LP_WHY("LP_OPERATING_TRAVEL",{_STATE},{{table}},{_SIZES})'),
    ("{coefficient}", _COEFFICIENT),
)
"""The steps of a row whose opening and FL are read from a vendor's table."""
ESTIMATED = (("{incipient_ref}", 'LP_WHY("LP_XFZ",{coefficient},{fl},{fd},{p1})'),)
"""The step that a row adds whose incipient limit is estimated."""
_SCALED = tuple(
    (
        f"{{{limit}_scaled}}",
        f'LP_WHY("LP_SIGMA_SCALED",{{{limit}_ref}},{{valve_size}},{{size_ref}},{{p1}}-{{pv}},{{head_ref}},'
        "{size_exponent},{head_exponent},Scale_method)",
    )
    for limit in ("incipient", "constant", "damage")
)
_VERDICT = (
    ("{fl_typical}", 'LP_WHY("LP_TYPICAL",{style},"fl",{direction})'),
    ("{regime}", 'LP_WHY("LP_REGIME",{sigma},{incipient},{constant},{damage},,{choked})'),
    ("{margin}", 'IF(ISERROR({limit}),"the limit to keep must be one of incipient, constant, damage, choked",'
     'LP_WHY("LP_MARGIN",{sigma},{limit}))'),
    ("{allowed_drop}", 'LP_WHY("LP_ALLOWED_DROP",{p1},{pv},{limit})'),
    ("{vapour}", 'LP_WHY("LP_FLASH",{fluid},{t},{p1},{p2})'),
)  # fmt: skip


def chain(opening: tuple[tuple[str, str], ...], table: str = "") -> str:
    """``IF`` within ``IF``: for the first cell that is an error its reason, at last what cautions the coefficient.

    Each reason is asked with the cells that its step reads, which are no errors yet: an error would only be passed
    on. The blank temperature is told here, since some programs would hand it over as 0.
    """
    steps = [*_READINGS, *_LIQUID, *opening, *_SCALED, *_VERDICT]
    text = "".join(f"IF(ISERROR({cell}),{reason.replace('{table}', table)}," for cell, reason in steps)
    blank = "AND(ISBLANK({t}),OR(ISBLANK({pv_given}),ISBLANK({density_given})))"
    return (
        f'=IF(ISERROR({{atmosphere}}),"the area must be one of sheet Site",IF({blank},"the temperature is blank: type '
        f'it",{text}{_COEFFICIENT}{")" * (len(steps) + 2)}'
    )
