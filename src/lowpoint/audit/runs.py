"""From a label to its values: along the row, or down the column, with the units that stand among them."""

from __future__ import annotations

from dataclasses import dataclass

from lowpoint.audit.cells import Cell
from lowpoint.audit.matching import UNSURE, Label
from lowpoint.audit.numbers import Number
from lowpoint.audit.roles import HEADS, Role, Roles, ends_run, is_formula, is_sentence, is_symbol, takes
from lowpoint.audit.statements import is_answer, keeps_to, statement_of
from lowpoint.audit.unitsigns import PLAIN, Sign

__all__ = ["Taken", "along_row", "down_column", "texts_along", "texts_below"]

FARTHEST = 60
"""Cells looked at beside a label."""


@dataclass(slots=True, eq=False)
class Taken:
    """A value found for a label, with the unit that stands by it."""

    cell: Cell
    number: Number | None
    sign: Sign | None = None
    unit_from: str = ""
    steps: int = 1
    """How many filled cells away from the label."""


def along_row(roles: Roles, role: Role, row: int) -> list[Taken]:
    """Values to the right of a label, up to the next label."""
    cells = [c for c in roles.page.rows.get(row, ()) if c.left >= role.cell.right - (0.0 if roles.page.exact else 1.0)]
    return _collect(roles, role.label, cells)


def _collect(roles: Roles, label: Label, cells: list[Cell]) -> list[Taken]:
    found: list[Taken] = []
    pending: Sign | None = None
    waiting: list[Taken] = []
    for steps, cell in enumerate(cells[:FARTHEST], 1):
        role = roles.of[id(cell)]
        if role.index:
            break
        if id(cell) in roles.names:
            continue
        if role.numbers:
            if cell.row == cell.bottom or not found or found[-1].cell is not cell:
                for number in role.numbers:
                    taken = Taken(cell, number, steps=steps)
                    if number.sign is not None and takes(label, number.sign):
                        taken.sign, taken.unit_from = number.sign, "cell"
                    elif pending is not None:
                        taken.sign, taken.unit_from = pending, "beside"
                    else:
                        waiting.append(taken)
                    found.append(taken)
            continue
        if role.dash or cell.text.strip("[]() ") in PLAIN:
            continue
        if role.sign is not None and takes(label, role.sign) and not (role.label.known and _stands_alone(role, label)):
            if waiting:
                for taken in waiting:
                    taken.sign, taken.unit_from = role.sign, "beside"
                waiting = []
            else:
                pending = role.sign
            continue
        if not found and _is_own_symbol(role, label):
            continue
        if role.sign is not None and not role.label.known:
            if not found and not waiting:
                pending = role.sign  # a unit of another kind: said later
                continue
            break
        if not found and cell.text.startswith("(") and not role.label.known:
            continue
        if ends_run(role):
            break
    return found


def _stands_alone(role: Role, label: Label) -> bool:
    """Is a text that may be a unit rather the symbol of another quantity (T, W, d)?"""
    return (
        len(role.cell.text) == 1
        and role.label.key != label.key
        and role.sign is not None
        and not takes(label, role.sign)
    )


def _is_own_symbol(role: Role, label: Label) -> bool:
    if role.label.known and role.label.key == label.key and is_symbol(role.cell.text):
        return True
    if role.label.key == "?" and label.known and len(role.cell.text) <= 4:
        return True  # Kv, Cv, DN behind "Required flow coefficient" or "Valve size"; a p whose index is lost
    if role.label.key or role.sign is not None:
        return False
    return is_formula(role.cell.text) or (is_symbol(role.cell.text) and len(role.cell.text) <= 4)


def down_column(roles: Roles, role: Role) -> list[Taken]:
    """Values below a label: units and symbols may stand between; text ends it."""
    found: list[Taken] = []
    pending: Sign | None = None
    last = role.cell.bottom
    for steps, cell in enumerate(roles.page.below(role.cell)[:FARTHEST], 1):
        other = roles.of[id(cell)]
        if cell.row > last + 2:
            break
        last = cell.bottom
        if other.numbers:
            for number in other.numbers:
                taken = Taken(cell, number, pending, "head" if pending else "", steps)
                if number.sign is not None and takes(role.label, number.sign):
                    taken.sign, taken.unit_from = number.sign, "cell"
                found.append(taken)
            continue
        bare = cell.text.strip("[]() ")
        if other.dash or bare in PLAIN:
            continue
        if not found and other.sign is not None and (takes(role.label, other.sign) or not other.label.known):
            pending = other.sign
            continue
        if not found and _is_own_symbol(other, role.label):
            continue
        break
    return found


def texts_along(roles: Roles, role: Role, row: int, several: bool) -> list[Taken]:
    """Words to the right of a label of words; a lone weak label there is its value all the same."""
    cells = [c for c in roles.page.rows.get(row, ()) if c.left >= role.cell.right - (0.0 if roles.page.exact else 1.0)]
    found: list[Taken] = []
    for steps, cell in enumerate(cells[:FARTHEST], 1):
        other = roles.of[id(cell)]
        if other.dash:
            continue
        if not found and _is_own_symbol(other, role.label) and not other.numbers and other.label.key:
            continue
        # A flow coefficient is a label even where it is not clear which; a pressure may be part of a service.
        sure = 0.8 if other.label.key == UNSURE and "coefficient" in other.label.words else 0.9
        if other.label.key and other.label.score >= sure and not _says_it(cell.text, role.label):
            break
        if (other.label.known or other.label.key == UNSURE) and other.label.unit is not None:
            break  # a label with a unit asks for a number
        if other.inline is not None or is_sentence(cell.text):
            break
        if HEADS.fullmatch(cell.text) and not _says_it(cell.text, role.label):
            break
        if found and (not several or (other.label.key and not _goes_on(cell, cells[steps:], role.label))):
            break
        found.append(Taken(cell, None, steps=steps))
        if not several:
            break
    return found


def _goes_on(cell: Cell, behind: list[Cell], label: Label) -> bool:
    """Is a text that reads like a label a further answer in a row of statements, rather than the next question?"""
    if not _says_it(cell.text, label):
        return False
    next_answer = bool(behind) and is_answer(behind[0].text)
    return is_answer(cell.text) or (keeps_to(cell.text, label.words) and not next_answer)


def texts_below(roles: Roles, role: Role, several: bool) -> list[Taken]:
    found: list[Taken] = []
    last = role.cell.bottom
    for steps, cell in enumerate(roles.page.below(role.cell)[:FARTHEST], 1):
        other = roles.of[id(cell)]
        if cell.row > last + 1 or (
            other.label.key and other.label.score >= 0.9 and not _says_it(cell.text, role.label)
        ):
            break
        if other.inline is not None or is_sentence(cell.text):
            break
        last = cell.bottom
        if other.dash or cell.text.strip("[]() ") in PLAIN:
            continue
        found.append(Taken(cell, None, steps=steps))
        if not several:
            break
    return found


def _says_it(text: str, label: Label) -> bool:
    """Is a text that reads like a label what this label of words asks for (``Flashing``, ``Flow to open``)?"""
    if label.key == "statement":
        return statement_of(text, label.words) is not None and text.strip().lower() not in ("cavitation", "choked flow")
    return label.key in ("direction", "trim", "style") and any(
        part in text.lower()
        for part in (
            "open",
            "close",
            "flow",
            "plug",
            "cage",
            "stage",
            "ball",
            "butterfly",
            "globe",
            "angle",
            "over",
            "under",
        )
    )
