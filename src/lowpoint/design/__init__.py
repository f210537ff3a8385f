"""Design and rating of restriction orifice plates, alone, in sets, and after a valve. Everything in SI.

:mod:`~lowpoint.design.plate` one plate, :mod:`~lowpoint.design.plate_set` a set of plates in series,
:mod:`~lowpoint.design.series` a valve and a plate. What goes in are frozen dataclasses that check themselves
(``Liquid``, ``Cases``, ``Line``, ``Construction``, ``Criteria``, ``Plate``, ``Valve``), each with ``in_units`` for bar,
m3/h, mm; what comes out are ratings: arrays over plates and cases, with cautions beside them.
"""

from lowpoint.design.cases import Cases, Liquid
from lowpoint.design.criteria import Criteria
from lowpoint.design.plate import PlateDesign, design_plate, rate_plate
from lowpoint.design.plate_set import SetDesign, design_set
from lowpoint.design.plates import Construction, Line, Plate, PlateSet
from lowpoint.design.rating import Rating, rate
from lowpoint.design.series import SeriesDesign, SeriesRating, best_plate, rate_series
from lowpoint.design.valve import Valve

__all__ = [
    "Cases",
    "Construction",
    "Criteria",
    "Line",
    "Liquid",
    "Plate",
    "PlateDesign",
    "PlateSet",
    "Rating",
    "SeriesDesign",
    "SeriesRating",
    "SetDesign",
    "Valve",
    "best_plate",
    "design_plate",
    "design_set",
    "rate",
    "rate_plate",
    "rate_series",
]
