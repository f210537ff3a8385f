"""How six invented vendors call the quantities of a data sheet, and the units that they print them in.

Vocabulary of the trade and of IEC 60534-7 (from memory); no vendor's form.
"""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["CASE_WORDS", "LABELS", "Unit", "units_of"]

_LABELS = {
    "tag": "Tag no.; Item; Valve tag; Equipment no.; Tag",
    "service": "Service; Duty; Service description",
    "fluid": "Fluid; Medium; Process fluid; Liquid; Flowing medium",
    "characteristic": "Inherent characteristic; Flow characteristic; Characteristic; Trim characteristic",
    "style": "Valve type; Body style; Type of valve; Valve style",
    "atmosphere": (
        "Barometric pressure; Atmospheric pressure; Ambient pressure at site ~ pamb; Site atmospheric pressure"
    ),
    "valve_size": "Valve size ~ d; Nominal valve size; Body size; Valve nominal size ~ d",
    "pipe_in": (
        "Inlet pipe inside diameter ~ D1; Upstream pipe bore ~ D1; Pipe ID, inlet ~ D1; Internal diameter of "
        "inlet pipe ~ D1; Pipe inside diameter upstream"
    ),
    "pipe_out": (
        "Outlet pipe inside diameter ~ D2; Downstream pipe bore ~ D2; Pipe ID, outlet ~ D2; Internal diameter "
        "of outlet pipe ~ D2; Pipe inside diameter downstream"
    ),
    "rated": (
        "Rated flow coefficient ~ {C}; Rated {C}; {C}, rated; Flow coefficient at full travel ~ {C}100; Selected {C}"
    ),
    "rangeability": "Inherent rangeability ~ R; Rangeability; Rangeability ~ R",
    "pc": "Critical pressure ~ pc; Thermodynamic critical pressure ~ pc; Critical pressure of fluid",
    "flow": "Volumetric flow rate ~ Q; Flow rate ~ Q; Liquid flow ~ Q; Volume flow ~ qv; Flow; Flow quantity",
    "p1": (
        "Inlet pressure ~ p1; Upstream pressure ~ P1; Pressure upstream; Pressure at inlet ~ p1; Inlet press. "
        "~ P1; Pressure before valve ~ p1"
    ),
    "p2": (
        "Outlet pressure ~ p2; Downstream pressure ~ P2; Pressure downstream; Pressure at outlet ~ p2; Outlet "
        "press. ~ P2; Pressure after valve ~ p2"
    ),
    "dp": "Pressure drop ~ Δp; Differential pressure ~ dp; Diff. pressure ~ ΔP; Pressure difference ~ p1-p2",
    "t": (
        "Inlet temperature ~ T1; Temperature at inlet ~ t1; Operating temperature; Fluid temperature ~ T; "
        "Flowing temperature ~ T1"
    ),
    "pv": (
        "Vapour pressure ~ pv; Vapor pressure ~ Pv; Saturation pressure ~ pv; Vapour pressure at T1; Vapour "
        "press. at inlet temp. ~ pv"
    ),
    "density": "Density ~ ρ; Density at inlet ~ rho1; Fluid density; Density at flowing conditions ~ ρ1",
    "fl": (
        "Liquid pressure recovery factor ~ FL; Recovery factor ~ FL; Pressure recovery factor FL; FL at "
        "travel; Liquid recovery factor ~ FL"
    ),
    "coefficient": (
        "Required flow coefficient ~ {C}; Calculated {C}; Required {C}; Flow coefficient, calculated ~ {C}; "
        "{C} required"
    ),
    "fp": "Piping geometry factor ~ FP; Pipe geometry factor ~ Fp; Piping factor FP",
    "ff": "Liquid critical pressure ratio factor ~ FF; Critical pressure ratio factor ~ FF; Factor FF",
    "flp": "Combined recovery and piping factor ~ FLP; Combined liquid recovery factor ~ FLP",
    "dp_choked": (
        "Choked pressure drop ~ Δpch; Pressure drop at choking; Limiting pressure drop ~ Δpmax; Choked flow "
        "pressure drop; Maximum sizing pressure drop ~ Δpmax"
    ),
    "sigma": (
        "Cavitation index (p1-pv)/(p1-p2) ~ σ; Sigma = (P1-Pv)/(P1-P2); Cavitation index ~ (p1-pv)/(p1-p2); "
        "Cavitation number (p1 - pv)/(p1 - p2) ~ σ"
    ),
    "sigma_choked": "Cavitation index at choking ~ σch; Choked cavitation index",
    "travel": "Travel ~ h; Valve opening; Opening; Relative travel ~ h; Percent open; Plug travel",
    "velocity_in": "Inlet velocity ~ v1; Velocity in inlet pipe; Pipe velocity, inlet; Velocity upstream",
    "velocity_out": "Outlet velocity ~ v2; Velocity in outlet pipe; Pipe velocity, outlet; Velocity downstream",
    "bore": "Orifice bore ~ d0; Bore of plate ~ d; Plate bore",
    "bore_length": "Length of bore; Parallel length of bore",
    "plates": "Number of plates; Plates in series",
}
"""Labels with ; between, each with its symbol behind ~; {C} stands for Kv or Cv."""


def _ways(text: str) -> tuple[tuple[str, str], ...]:
    pairs = (way.partition(" ~ ") for way in text.split("; "))
    return tuple((label, symbol) for label, _, symbol in pairs)


LABELS: dict[str, tuple[tuple[str, str], ...]] = {key: _ways(text) for key, text in _LABELS.items()}
"""Label and symbol of each quantity, several ways."""

CASE_WORDS = (
    ("Minimum", "Normal", "Maximum"), ("Min.", "Norm.", "Max."), ("MIN", "NORM", "MAX"),
    ("Minimum flow", "Normal flow", "Maximum flow"), ("Min", "Normal", "Max"),
)  # fmt: skip


@dataclass(frozen=True)
class Unit:
    """A unit as printed, with how many of it are one of the plain unit (m3/h, bar, kg/m3, deg C, mm, Kv, m/s)."""

    sign: str
    per: float = 1.0
    more: int = 0
    """Decimals more than in the plain unit (less where negative)."""


_PRESSURES = {
    "bar": (1.0, 0, ("bar a", "bar(a)", "bar abs", "bara"), ("bar g", "barg", "bar(g)"), ("bar",)),
    "kPa": (100.0, -2, ("kPa a", "kPa(a)", "kPa abs"), ("kPa g", "kPa(g)"), ("kPa",)),
    "MPa": (0.1, 1, ("MPa a", "MPa(a)", "MPa abs"), ("MPa g", "MPa(g)"), ("MPa",)),
    "psi": (14.503774, -1, ("psia", "psi a", "psi(a)"), ("psig", "psi g", "psi(g)"), ("psi",)),
    "kgf/cm2": (1.0 / 0.980665, 1, ("kgf/cm2 a", "kg/cm2(a)", "kgf/cm² abs"), ("kgf/cm2 g", "kg/cm2(g)"),
                ("kgf/cm2", "kgf/cm²")),
}  # fmt: skip
_FLOWS = {
    False: (("m³/h", 1.0, 0), ("m3/h", 1.0, 0), ("l/s", 1.0 / 3.6, 1), ("m3/hr", 1.0, 0), ("L/min", 1000.0 / 60.0, -1)),
    True: (("gpm (US)", 4.402868, 0), ("US gpm", 4.402868, 0), ("gpm", 4.402868, 0)),
}


def units_of(kind: str, pick: int, *, us: bool, pressure: str, gauge: bool) -> Unit:
    """The unit of a kind of quantity on a sheet; ``pick`` chooses among its spellings."""
    if kind in ("absolute", "pressure", "drop"):
        per, more, absolute, gauges, plain = _PRESSURES[pressure]
        signs = plain if kind == "drop" else gauges if kind == "pressure" and gauge else absolute
        return Unit(signs[pick % len(signs)], per, more)
    if kind == "flow":
        sign, per, more = _FLOWS[us][pick % len(_FLOWS[us])]
        return Unit(sign, per, more)
    metric = {"t": ("°C", "deg C", "°C"), "density": ("kg/m³", "kg/m3"), "size": ("mm",), "speed": ("m/s",),
              "share": ("%",), "coefficient": ("",), "ratio": ("",)}  # fmt: skip
    customary = {"t": (("°F", "deg F"), 1.8, 0), "density": (("lb/ft³", "lb/ft3"), 1.0 / 16.01846, 2),
                 "size": (("in", "inch"), 1.0 / 25.4, 2), "speed": (("ft/s",), 1.0 / 0.3048, 0),
                 "coefficient": (("",), 1.156, 0)}  # fmt: skip
    if us and kind in customary:
        signs, per, more = customary[kind]
        return Unit(signs[pick % len(signs)], per, more)
    return Unit(metric[kind][pick % len(metric[kind])])
