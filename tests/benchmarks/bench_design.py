"""Design of plates: a staged design with six cases, the fewest plates searched, strength and drills included."""

from __future__ import annotations

from collections.abc import Iterator

from figures import Figure, median_of

from lowpoint.design import (
    Cases,
    Construction,
    Criteria,
    Line,
    Liquid,
    Plate,
    PlateSet,
    Valve,
    best_plate,
    design_set,
    rate,
)

WATER = Liquid.in_units(density=998.2, pv=0.0233932, pc=220.64, viscosity=1.0016)
CASES = Cases.in_units(
    flow=[100, 80, 92, 40, 97, 60], p1=[50, 51, 48, 52.5, 50, 50], p2=[3.0, 2.8, 2.5, 3.5, 4.0, 3.0], liquid=WATER
)
LINE = Line.in_units(pipe=154.05)
MADE = Construction.in_units(stress=120, support_diameter=180)


def figures(quick: bool) -> Iterator[Figure]:
    times = 5 if quick else 41

    def staged() -> None:
        found = design_set(CASES, LINE, MADE, Criteria(margin=0.1))
        assert found.count == 5
        assert found.notes

    yield Figure("a staged design with 6 cases", 1e3 * median_of(times, staged), "ms", at_most=20.0)
    twelve = Criteria(kind="incipient", margin=0.59)
    count = design_set(CASES, LINE, MADE, twelve).count
    yield Figure(
        f"the same of {count} plates", 1e3 * median_of(times, lambda: design_set(CASES, LINE, MADE, twelve)), "ms"
    )
    existing = PlateSet(LINE, tuple(Plate.in_units(bore=b, bore_length=6) for b in (29, 34, 39.5, 45.5, 52)))
    yield Figure("re-rating an existing set, 6 cases", 1e3 * median_of(times, lambda: rate(existing, CASES)), "ms")
    valve = Valve.in_units(fl=0.9, valve_size=100, pipe_in=154.05)
    yield Figure(
        "the best plate after a valve, 6 cases", 1e3 * median_of(times, lambda: best_plate(valve, LINE, CASES)), "ms"
    )
