"""The kinds of trim of the sample books, with demo values: invented, plausible, of no vendor.

Lengths in mm and heads in bar here; :func:`in_us` gives the same trim in in and psi. A limit is a property of one
vendor's trim and size: take yours from his test.
"""

from __future__ import annotations

from dataclasses import replace

from lowpoint.starter.plant import Trim
from lowpoint.units import dimension

__all__ = ["BALL", "BUTTERFLY", "CAGE", "CONTOURED", "DOUBLE_PORT", "ECCENTRIC_PLUG", "FOUR_STAGES", "HOLED_CAGE",
           "NEEDLE", "OFFSET_DISC", "THREE_STAGES", "TWO_STAGES", "UNTESTED", "VENTURI_ANGLE", "in_us"]  # fmt: skip

CONTOURED = Trim("globe single port, contoured plug", "open", 0.90, (2.10, 1.65, 1.42), "tested", 80, 6, (0.08, 0.12),
                 fd=0.46)  # fmt: skip
CAGE = Trim("globe single port, characterized cage 4-port", "outward", 0.90, (1.90, 1.52, 1.36), "tested", 100, 8,
            (0.06, 0.12), fd=0.41, characteristic="linear")  # fmt: skip
HOLED_CAGE = Trim("globe single port, 60 equal-diameter-hole cage", "either", 0.92, (1.52, 1.36, 1.26), "tested",
                  100, 10, (0.04, 0.10), fd=0.13, characteristic="linear", rangeability=40.0)  # fmt: skip
DOUBLE_PORT = Trim("globe double port, ported plug", "between seats", 0.88, (2.00, 1.62, 1.45), "published", 100, 6,
                   (0.08, 0.12), fl_basis="published", fd=0.28)  # fmt: skip
UNTESTED = Trim("globe double port, contoured plug", "either", 0.85, (None, None, None), "published", 100, 6,
                (0.0, 0.0), fl_basis="published", fd=0.32)  # fmt: skip
NEEDLE = Trim("small flow trim, tapered needle", "open", 0.95, (1.75, 1.42, 1.26), "tested", 25, 8, (0.0, 0.10),
              rangeability=30.0)  # fmt: skip
VENTURI_ANGLE = Trim("globe angle, venturi", "close", 0.50, (None, None, None), "published", 80, 10, (0.0, 0.0),
                     fl_basis="published", fd=1.0, rangeability=30.0)  # fmt: skip
ECCENTRIC_PLUG = Trim("rotary, eccentric spherical plug", "open", 0.85, (2.40, 1.90, 1.60), "tested", 100, 5,
                      (0.10, 0.12), fd=0.42, characteristic="linear", rangeability=100.0)  # fmt: skip
BUTTERFLY = Trim("butterfly centred shaft, swing-through 60 degrees", "either", 0.72, (3.40, 2.80, 2.35), "tested",
                 150, 4, (0.10, 0.10), fd=0.50)  # fmt: skip
OFFSET_DISC = Trim("butterfly eccentric shaft, offset seat 70 degrees", "either", 0.70, (3.60, 2.95, 2.45),
                   "published", 150, 4, (0.10, 0.10), fl_basis="published", fd=0.57)  # fmt: skip
BALL = Trim("ball, segmented", "either", 0.76, (3.10, 2.50, 2.10), "tested", 100, 5, (0.12, 0.12), fd=0.98,
            rangeability=100.0)  # fmt: skip
TWO_STAGES = Trim("multistage multipath, 2 stages", "either", 0.97, (1.32, 1.20, 1.12), "tested", 50, 20,
                  (0.02, 0.05), characteristic="linear")  # fmt: skip
THREE_STAGES = Trim("multistage multipath, 3 stages", "either", 0.99, (1.17, 1.11, 1.065), "tested", 50, 30,
                    (0.02, 0.04), characteristic="linear")  # fmt: skip
FOUR_STAGES = Trim("multistage single path, 4 stages", "either", 0.99, (1.095, 1.065, 1.040), "tested", 40, 40,
                   (0.0, 0.02), characteristic="linear")  # fmt: skip


def in_us(trim: Trim) -> Trim:
    """The same trim with its test size in in and its test head in psi, rounded as a data sheet would."""
    size, pressure = dimension("size"), dimension("pressure")
    inches = size.us.from_si(size.metric.to_si(trim.size_ref))
    psi = pressure.us.from_si(pressure.metric.to_si(trim.head_ref))
    return replace(trim, size_ref=round(inches * 2.0) / 2.0, head_ref=round(psi / 5.0) * 5.0)
