"""Lines of Kestrel Bay that the tests of plates share, and random ones."""

from __future__ import annotations

from typing import Any

from hypothesis import strategies as st

from lowpoint.design import Cases, Line, Liquid, Plate, PlateSet

WATER = Liquid.in_units(density=998.2, pv=0.0233932, pc=220.64, viscosity=1.0016)
HOT = Liquid.in_units(density=917, pv=4.76, pc=220.64, viscosity=0.182)
"""Water at 20 C and at 150 C (IAPWS, rounded)."""


def served(liquid: Liquid = WATER, **values: Any) -> Cases:
    """Cases in bar and m3/h."""
    return Cases.in_units(liquid=liquid, **values)


def plates(*bores: float, pipe: float = 102.26, length: float | None = None, **line: Any) -> PlateSet:
    """A set in mm."""
    built = tuple(Plate.in_units(bore=bore, bore_length=length) for bore in bores)
    return PlateSet(Line.in_units(pipe=pipe, **line), built)


@st.composite
def random_sets(draw: st.DrawFn) -> tuple[PlateSet, Cases]:
    """One to five plates and one to four cases, from gentle to choked and flashing."""
    pipe = draw(st.floats(40.0, 400.0))
    bores = draw(st.lists(st.floats(0.12, 0.9), min_size=1, max_size=5))
    length = draw(st.one_of(st.none(), st.floats(1.0, 40.0)))
    count = draw(st.integers(1, 4))
    p2 = draw(st.lists(st.floats(0.3, 12.0), min_size=count, max_size=count))
    ratio = draw(st.lists(st.floats(1.1, 40.0), min_size=count, max_size=count))
    speed = draw(st.lists(st.floats(0.05, 12.0), min_size=count, max_size=count))
    p1 = [p * r for p, r in zip(p2, ratio, strict=True)]
    liquid = Liquid.in_units(
        density=draw(st.floats(550.0, 1100.0)), pv=draw(st.floats(0.01, 0.95)) * min(p1),
        pc=draw(st.floats(500.0, 900.0)), viscosity=draw(st.one_of(st.none(), st.floats(0.1, 50.0))),
    )  # fmt: skip
    flow = [v * 0.785398 * (pipe * 1e-3) ** 2 * 3600.0 for v in speed]
    held = draw(st.sampled_from(["inlet", "outlet", "both"]))
    built = plates(*(b * pipe for b in bores), pipe=pipe, length=length)
    return built, served(liquid, flow=flow, p1=p1, p2=p2, held=held)
