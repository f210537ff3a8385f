"""A vendor's data sheet in; which of its numbers hold, which do not, and which mistake would explain it.

The way of a sheet: ``reading`` finds quantities by their labels (:class:`model.SheetReading`); ``checking`` computes
every claim again from the sheet's own inputs; ``suspecting`` tries the usual mistakes on each claim that differs. No
suspect is ever stated as fact.
"""
