"""What the property tests draw: services, piping and valves as plants have them."""

from __future__ import annotations

from dataclasses import dataclass

from hypothesis import strategies as st

from properties.standard import Piping, Service

__all__ = ["Valve", "piping", "services", "valves"]

SIZES = (25.0, 50.0, 80.0, 100.0, 150.0, 200.0, 300.0)


@st.composite
def services(draw: st.DrawFn) -> Service:
    """A liquid that is liquid at the inlet, from far from choking to flashing."""
    p1 = draw(st.floats(150.0, 20_000.0))
    pc = draw(st.floats(3_000.0, 22_064.0))
    pv = min(p1, pc) * draw(st.floats(1e-4, 0.9))
    return Service(p1, p1 * draw(st.floats(0.02, 0.98)), pv, pc, draw(st.floats(400.0, 1500.0)))


@st.composite
def piping(draw: st.DrawFn) -> Piping:
    """Line size, or any pair of pipes as wide as the valve or wider."""
    if draw(st.booleans()):
        return Piping()
    d = draw(st.sampled_from(SIZES))
    wider = st.one_of(st.just(1.0), st.floats(1.0, 3.0))
    return Piping(d, d * draw(wider), d * draw(wider))


@dataclass(frozen=True)
class Valve:
    """A valve in its piping: flow coefficient (Kv) and recovery factor."""

    coefficient: float
    fl: float
    piping: Piping


@st.composite
def valves(draw: st.DrawFn) -> Valve:
    """Up to 0.045 Kv/mm2, beyond what the standard vouches for; the outlet's gain leaves a third of the losses."""
    pipes = draw(piping())
    d = pipes.d or draw(st.sampled_from(SIZES))
    coefficient = d * d * draw(st.floats(1e-5, 0.045))
    while pipes.bracket(coefficient) < 1 / 3:
        coefficient *= 0.7
    return Valve(coefficient, draw(st.floats(0.3, 1.0)), pipes)
