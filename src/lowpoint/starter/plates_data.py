"""Three lines of restriction orifices of Kestrel Bay: what the sheets of the book of plates are filled with.

Flow m3/h, pressures bar absolute, temperature deg C, sizes mm, stress MPa, salinity g/kg. All of it is invented.
"""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["DUTIES", "KEEP", "PLANT", "Duty", "Flow"]

PLANT = "Kestrel Bay"
KEEP = "constant"
"""The limit that every plate must keep, by the word of LP_ORIFICE_LIMIT."""


@dataclass(frozen=True, slots=True)
class Flow:
    """One operating case of a line: the flow wanted, and the pressures before its first and after its last plate."""

    name: str
    t: float
    flow: float
    p1: float
    p2: float | None
    """None where one more plate follows and the flow decides this pressure."""
    vessel: float | None = None
    """Pressure after one more plate, in which the liquid flashes; None where there is none."""

    @property
    def end(self) -> float:
        """The pressure after the last plate of all."""
        return [p for p in (self.p2, self.vessel) if p is not None][-1]


@dataclass(frozen=True, slots=True)
class Duty:
    """A line with plates in series. ``target`` is the least index of a plate (upstream form), ``margin`` what
    the design of equal margin must keep to the limit; ``bores`` are as drilled, first to last, ``edge`` the parallel
    part of each. ``advice`` is what practice does, line by line."""

    sheet: str
    title: str
    tag: str
    area: str
    fluid: str
    salinity: float | None
    design: Flow
    other: Flow
    pipe: float
    edge: float
    target: float
    margin: float
    support: float
    stress: float
    bores: tuple[float, ...]
    advice: tuple[str, ...]
    logarithmic: bool = False
    """Pressures of the chart on a logarithmic axis."""


DUTIES = (
    Duty(
        "Pump minimum flow", "feed pump minimum-flow recirculation to the deaerator", "24-RO-431", "boiler house",
        "boiler feed water", None,
        Flow("minimum flow, hot", 105.0, 32.0, 63.0, 3.2),
        Flow("load rejection, deaerator at low pressure", 105.0, 32.0, 62.0, 1.45),
        77.9, 1.5, 2.2, 0.05, 100.0, 110.0, (15.75, 18.0, 20.75, 23.75, 27.0, 30.75),
        (
            "The pump needs its minimum flow whatever the deaerator does: look at 'flow that the set passes' in both "
            "cases, and compare it with the pump's minimum at the temperature of the case.",
            "One target index for all plates is not one margin: a wider bore has a higher limit, so the last plate is "
            "the first to cross it. The design of equal margin below mends that with the same number of plates.",
            "When the deaerator's pressure falls the last plates cavitate first. Practice: the last plate near the "
            "deaerator, above its water level, so that the column of the riser stays on the set.",
        ),
        logarithmic=True,
    ),
    Duty(
        "RO brine let-down", "brine let-down past the energy recovery to the outfall", "22-RO-241", "reverse osmosis",
        "brine", 66.0,
        Flow("let-down at full recovery", 24.0, 85.0, 57.0, 4.2),
        Flow("start-up, outfall at low tide", 20.0, 60.0, 51.0, 2.4),
        107.1, 2.0, 2.2, 0.05, 140.0, 110.0, (27.0, 30.25, 34.5, 39.0, 43.5),
        (
            "Brine of the membranes took up its gas at the intake: below about 0.7 bar absolute in a long run after "
            "the set it comes out of solution and looks like cavitation. Keep the run to the outfall full.",
            "Salt lowers the vapour pressure by a few per cent and raises the density by five: type the salinity of "
            "the brine, not of the sea.",
            "Fixed plates pass what the pressure gives, not what the flow case asks for. Where the recovery rate must "
            "be held in every case, practice puts a control valve before fewer plates.",
        ),
    ),
    Duty(
        "Boiler blowdown", "continuous blowdown, cooled against make-up, to the flash vessel", "24-RO-452",
        "boiler house", "water", None,
        Flow("normal", 195.0, 6.0, 44.0, 18.0, 2.5),
        Flow("cooler fouled", 203.0, 6.0, 45.0, None, 3.0),
        52.5, 0.8, 2.2, 0.05, 75.0, 100.0, (8.1, 9.2, 10.4, 11.75, 9.9),
        (
            "The last plate flashes: the vessel is below the vapour pressure, and no number of plates changes that. "
            "The plates before it keep the liquid above its vapour pressure, so that only one plate carries vapour.",
            "Practice: the flashing plate at the nozzle of the vessel with no pipe after it, or an angle valve with a "
            "hardened venturi outlet there; a vessel and nozzle sized for the vapour; a target plate opposite the jet.",
            "A choked plate rules the flow: it does not rise when the vessel's pressure falls. Bores below about 3 mm "
            "plug with scale; a strainer stands before the set.",
            "The other way is to cool further: below the boiling temperature at the vessel's pressure (on the sheet) "
            "nothing flashes, and the whole drop can be staged.",
        ),
    ),
)  # fmt: skip
