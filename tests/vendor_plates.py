"""A restriction orifice on a vendor's sheet: its bore by bisection on ISO 5167-2, plain floats (``design.plain``)."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

from design.plain import bisect, discharge, k_iso, velocity
from vendor_rows import Line, Wording, line_of
from vendor_slips import SEA_LEVEL, Item

__all__ = ["PLATE_SLIPS", "Plate", "plate_lines"]

REYNOLDS = 1e6
"""As the package takes it where no viscosity is given."""


@dataclass(frozen=True)
class Plate:
    """One duty; m3/h, bar absolute, mm, kg/m3, deg C."""

    flow: float
    p1: float
    p2: float
    pipe: float
    density: float
    pv: float
    pc: float
    t: float
    form: str = "upstream"

    @property
    def bore(self) -> float:
        """Bore that takes the whole drop: ``dp = K rho v^2/2`` in the pipe, K of ISO 5167-2."""
        pipe, flow = self.pipe / 1000.0, self.flow / 3600.0
        head = 0.5 * self.density * velocity(flow, pipe) ** 2
        wanted = (self.p1 - self.p2) * 1e5 / head

        def spare(beta: float) -> float:
            return wanted - k_iso(beta, discharge(beta, pipe, REYNOLDS))

        return self.pipe * bisect(spare, 0.1, 0.75)

    @property
    def sigma(self) -> float:
        upstream = (self.p1 - self.pv) / (self.p1 - self.p2)
        return upstream - 1.0 if self.form == "downstream" else upstream

    @property
    def speed(self) -> float:
        return velocity(self.flow / 3600.0, self.pipe / 1000.0)


PLATE_SLIPS: dict[str, Callable[[Plate], Plate]] = {
    "gauge_as_absolute_p2": lambda p: replace(p, p2=p.p2 - SEA_LEVEL),
    "gauge_as_absolute_both": lambda p: replace(p, p1=p.p1 - SEA_LEVEL, p2=p.p2 - SEA_LEVEL),
    "index_downstream": lambda p: replace(p, form="downstream"),
    "relative_density_1": lambda p: replace(p, density=999.1),
    "pv_left_out": lambda p: replace(p, pv=0.0),
}
"""Each mistake in plain arithmetic, by the name that the audit gives it."""


def plate_lines(plate: Plate, item: Item, wording: Wording, slips: Sequence[str] = ()) -> list[Line]:
    """The lines of its sheet: one case, one plate."""
    wrong = plate
    for name in slips:
        wrong = PLATE_SLIPS[name](wrong)
    words = {"tag": item.tag, "service": item.service, "fluid": "Water"}
    lines = [Line(key, "head", wording.labels[key][0], word=word) for key, word in words.items()]
    zero = item.atmosphere if item.gauge else 0.0
    if item.gauge:
        lines.append(line_of("atmosphere", "head", item, wording, {None: item.atmosphere}))
    groups: dict[str, dict[str, float]] = {
        "valve": {"pipe_in": plate.pipe, "plates": 1.0, "pc": plate.pc},
        "process": {"flow": plate.flow, "p1": plate.p1 - zero, "p2": plate.p2 - zero, "dp": plate.p1 - plate.p2,
                    "t": plate.t, "pv": plate.pv, "density": plate.density},
        "results": {"bore": wrong.bore, "sigma": wrong.sigma, "velocity_in": wrong.speed},
    }  # fmt: skip
    for group, numbers in groups.items():
        case = None if group == "valve" else ""
        lines += [line_of(key, group, item, wording, {case: number}) for key, number in numbers.items()]
    return lines
