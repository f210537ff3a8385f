"""The table of the other case: plates as drilled, marched from the last to the first with choking in force.

The same march as :mod:`lowpoint.design.march`, in cells: the flow is the least of the one that the whole drop gives
and those at which each plate chokes; a choked plate holds the pressure before it.
"""

from __future__ import annotations

from lowpoint.starter.plates_columns import MOST, OTHER, PLATES
from lowpoint.starter.plates_page import Page, letters_of

__all__ = ["write"]


def write(page: Page, row: int) -> int:
    """Add the table; gives the row after it."""
    lines = page.band(row, "The plates as drilled, other case: marched plate after plate, with choking in force")
    first = page.headings(lines + len(PLATES) + 2, OTHER)
    page.other_first = first
    letters = letters_of(OTHER)
    columns = {key: f"${letter}${first}:${letter}${first + MOST - 1}" for key, letter in letters.items()}
    page.places |= {
        "area": page.formula("PI()/4*({pipe}/1000)^2*3600"), "k_all": columns["k"], "chokes_all": columns["chokes"],
        "floor": page.formula("LP_FF({pv_other},{pc_other})*{pv_other}"), "bore_one": f"${letters['bore']}${first}",
        "before_one": f"${letters['before']}${first}",
    }  # fmt: skip
    _lines(page, lines)
    for number, at in enumerate(range(first, first + MOST), start=1):
        bores = page.duty.bores
        page.put(at, 1, f'=IF(ISBLANK(${letters["bore"]}{at}),"",{number})', "whole")
        page.put(at, 2, bores[number - 1] if number <= len(bores) else None, "working", typed=True)
        last = f"$A{at}=COUNT({columns['bore']})"
        after = page.formula(f"IF({last},{{end_other}},${letters['before']}{at + 1})")
        above = f"SUM(${letters['k']}${first}:${letters['k']}{at - 1})" if number > 1 else "0"
        page.row(OTHER, at, {"next": after if number < MOST else page.places["end_other"], "k_before": above})
    if page.duty.other.p2 is None:
        marched = f"=INDEX({columns['after']},COUNT({columns['bore']})-1)"
        cell = page.sheet[page.places["p2_other"].replace("$", "")]
        page.put(cell.row, cell.column, marched, "pressure")
    page.mark(OTHER, first, first + MOST - 1)
    return first + MOST


def _lines(page: Page, row: int) -> None:
    """The flow of the set, whether it is enough, and how well the march closes."""
    for at, (key, label, fmt, formula) in enumerate(PLATES, start=row):
        page.put(at, 1, label)
        page.places[key] = page.put(at, 2, page.formula(formula), fmt)
    row += len(PLATES)
    page.put(row, 1, "Is that enough?")
    enough = '=IF({passed}<{flow_other},"less than the flow wanted","at least the flow wanted")'
    page.verdict(row, page.formula(enough), "less")
