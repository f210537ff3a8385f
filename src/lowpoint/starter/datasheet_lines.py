"""The lines of the data sheet to begin with, in its order, with units of both sets and the numbers of its example.

The example is a hot-water valve of Kestrel Bay's boiler house. Its results were worked out by bisection on the
equations of IEC 60534-2-1, apart from the kernels (the tests do so again).
"""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["CASES", "EXAMPLE", "GROUPS", "LINES", "SheetLine"]

CASES = ("minimum", "normal", "maximum")
GROUPS = {
    "item": "Item", "site": "Site", "valve": "Valve and pipes", "process": "Operating conditions", "results": "Results",
    "limits": "Limits of the cavitation index",
}  # fmt: skip


@dataclass(frozen=True)
class SheetLine:
    """One line: a quantity of the audit's vocabulary."""

    key: str
    group: str
    label: str
    symbol: str = ""
    unit: tuple[str, str] = ("", "")
    """Metric and US."""
    decimals: tuple[int, int] = (0, 0)
    words: str = ""
    """Name of the choices that its cells offer: ``fluid``, ``style``, ``direction``, ``characteristic``, ``trim``."""

    @property
    def by_case(self) -> bool:
        """Does it have a number in each case?"""
        return self.group in ("process", "results")


_PRESSURE, _ABSOLUTE, _DROP = ("bar g", "psig"), ("bar a", "psia"), ("bar", "psi")
_SIZE, _C, _SPEED = ("mm", "in"), ("Kv", "Cv"), ("m/s", "ft/s")

LINES = (
    SheetLine("tag", "item", "Tag"),
    SheetLine("service", "item", "Service"),
    SheetLine("fluid", "item", "Fluid", words="fluid"),
    SheetLine("atmosphere", "site", "Atmospheric pressure", "patm", _ABSOLUTE, (3, 2)),
    SheetLine("style", "valve", "Valve style", words="style"),
    SheetLine("direction", "valve", "Flow direction", words="direction"),
    SheetLine("trim", "valve", "Trim", words="trim"),
    SheetLine("characteristic", "valve", "Inherent characteristic",
              words="characteristic"),
    SheetLine("rangeability", "valve", "Inherent rangeability", "R"),
    SheetLine("rated", "valve", "Rated flow coefficient", "", _C, decimals=(1, 1)),
    SheetLine("valve_size", "valve", "Valve size", "d", _SIZE, decimals=(1, 3)),
    SheetLine("pipe_in", "valve", "Inlet pipe inside diameter", "D1", _SIZE, decimals=(1, 3)),
    SheetLine("pipe_out", "valve", "Outlet pipe inside diameter", "D2", _SIZE, decimals=(1, 3)),
    SheetLine("pipe_wall", "valve", "Pipe wall thickness", "", _SIZE, decimals=(1, 3)),
    SheetLine("pc", "valve", "Critical pressure", "pc", _ABSOLUTE, decimals=(2, 0)),
    SheetLine("flow", "process", "Flow rate", "Q", ("m3/h", "US gal/min"), decimals=(1, 1)),
    SheetLine("p1", "process", "Inlet pressure", "p1", _PRESSURE, decimals=(2, 1)),
    SheetLine("p2", "process", "Outlet pressure", "p2", _PRESSURE, decimals=(2, 1)),
    SheetLine("dp", "process", "Pressure drop", "Δp", _DROP, decimals=(2, 1)),
    SheetLine("t", "process", "Inlet temperature", "T1", ("deg C", "deg F"), decimals=(1, 1)),
    SheetLine("pv", "process", "Vapour pressure", "pv", _ABSOLUTE, decimals=(4, 3)),
    SheetLine("density", "process", "Density", "rho", ("kg/m3", "lb/ft3"), decimals=(1, 2)),
    SheetLine("fl", "process", "Liquid pressure recovery factor", "FL", decimals=(2, 2)),
    SheetLine("coefficient", "results", "Required flow coefficient", "", _C, decimals=(1, 1)),
    SheetLine("travel", "results", "Travel", "h", ("%", "%"), decimals=(0, 0)),
    SheetLine("ff", "results", "Critical pressure ratio factor", "FF", decimals=(3, 3)),
    SheetLine("fp", "results", "Piping geometry factor", "FP", decimals=(3, 3)),
    SheetLine("flp", "results", "Combined recovery factor", "FLP", decimals=(3, 3)),
    SheetLine("dp_choked", "results", "Choked pressure drop", "", _DROP, decimals=(2, 1)),
    SheetLine("sigma", "results", "Cavitation index (p1-pv)/(p1-p2)", "", decimals=(2, 2)),
    SheetLine("velocity_in", "results", "Inlet velocity", "", _SPEED, decimals=(2, 2)),
    SheetLine("velocity_out", "results", "Outlet velocity", "", _SPEED, decimals=(2, 2)),
    SheetLine("noise", "results", "Noise", "", ("dB(A)", "dB(A)"), decimals=(0, 0)),
    SheetLine("sigma_incipient", "limits", "Incipient cavitation (p1-pv)/(p1-p2)", "", decimals=(2, 2)),
    SheetLine("sigma_constant", "limits", "Constant cavitation (p1-pv)/(p1-p2)", "", decimals=(2, 2)),
    SheetLine("sigma_damage", "limits", "Incipient damage (p1-pv)/(p1-p2)", "", decimals=(2, 2)),
)  # fmt: skip

EXAMPLE: dict[str, tuple[float, ...] | str] = {
    "tag": "41-LCV-118", "service": "hot-water return, boiler house", "fluid": "water",
    "characteristic": "equal percentage", "atmosphere": (1.013,), "rangeability": (50.0,), "rated": (320.0,),
    "valve_size": (100.0,), "pipe_in": (154.1,), "pipe_out": (154.1,), "pc": (220.64,),
    "flow": (60.0, 110.0, 165.0), "p1": (6.2, 5.9, 5.6), "p2": (4.9, 4.4, 3.7), "dp": (1.3, 1.5, 1.9),
    "t": (82.0, 86.0, 90.0), "pv": (0.5139, 0.6017, 0.7018), "density": (970.6, 968.0, 965.4),
    "fl": (0.88, 0.85, 0.80), "coefficient": (52.088, 89.511, 120.313), "travel": (53.595, 67.435, 74.994),
    "ff": (0.94649, 0.94538, 0.94421), "fp": (0.99577, 0.98765, 0.97801), "flp": (0.87433, 0.83517, 0.77801),
    "dp_choked": (5.1860, 4.5365, 3.7655), "sigma": (5.1532, 4.2075, 3.1112),
    "velocity_in": (0.89362, 1.63831, 2.45746), "velocity_out": (0.89362, 1.63831, 2.45746),
    "sigma_incipient": (3.4,), "sigma_constant": (2.6,), "sigma_damage": (2.1,),
}  # fmt: skip
"""In the metric units of the lines: one for the item, or one a case."""
