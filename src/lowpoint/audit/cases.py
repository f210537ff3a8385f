"""Operating cases: which cells name one, which columns, rows or blocks each name governs."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from functools import lru_cache

from lowpoint.audit.cells import Cell, Page
from lowpoint.audit.words import folded, plain

__all__ = ["Cases", "case_name", "find_cases", "is_case_label"]

_STRONG = {
    "minimum", "normal", "maximum", "startup", "upset", "nominal", "turndown", "shutdown", "emergency", "summer",
    "winter", "case", "anfahren", "demarrage", "arranque", "standby", "commissioning",
}  # fmt: skip
"""Words that hardly mean anything but a case."""
_WEAK = {
    "design", "rated", "future", "peak", "cold", "hot", "low", "high", "mid", "start", "trip", "bypass", "part", "full",
    "shutoff",
}  # fmt: skip
"""Words that name a case only where nothing else stands by them."""
_NAMES = _STRONG | _WEAK | {
    "flushing", "filling", "regeneration", "half", "night", "day", "relief", "norm", "storung", "winterfall",
    "volllast", "teillast", "blowdown",
}  # fmt: skip
_AROUND = {
    "case", "flow", "condition", "operating", "load", "rate", "@Q", "no", "number", "operation", "mode", "duty",
    "fall", "cas", "caso", "betrieb", "conditions", "of", "at", "the", "point", "scenario", "process", "service",
}  # fmt: skip
_NUMBERED = re.compile(
    r"(?:operating |process |design |flow |load )?"
    r"(?:case|cond(?:ition)?\.?|point|scenario|fall|cas|caso|mode)(?![a-z])\s*(?:no\.?|nr\.?|#)?\s*[:\-]?\s*"
    r"([A-Z]|\d{1,2}|[IVX]{1,4})\b.*",
    re.IGNORECASE,
)
_LABEL = re.compile(
    r"(?:operating |process |flow |load |design )?"
    r"(?:cases?|conditions?|cond\.?|scenarios?|points?|modes?|fall|betriebsfall|lastfall|cas|caso)"
    r"(?: de (?:marche|operacion|fonctionnement|charge))?\s*(?:no\.?|number|name|#)?\s*(?:of operation)?\s*:?",
    re.IGNORECASE,
)
_Q = re.compile(r"[QWqw]\s*[_ ]?\s*(min|norm|nor|max)\.?", re.IGNORECASE)


@lru_cache(4096)
def case_name(text: str) -> str | None:
    """The name of a case, as it stands there, where a text is one; None otherwise."""
    said = " ".join(text.split()).strip(" :")
    if not said or len(said) > 40 or not said[0].isalpha():
        return None
    inside = re.fullmatch(
        r"(?:(?:operating |process )?(?:case|condition|cas|caso|fall)s?)\s*[:=\-–]\s*(.{1,30})", said, re.IGNORECASE
    )
    if inside and not _NUMBERED.fullmatch(said):
        return inside[1].strip()
    if _NUMBERED.fullmatch(said):
        return said
    if _Q.fullmatch(said):
        return said
    tokens = folded(re.sub(r"[()\[\].]", " ", _joined(said))).tokens
    if (
        tokens & _NAMES
        and tokens <= (_NAMES | _AROUND)
        and (tokens & _STRONG or tokens <= (_WEAK | {"flow", "load", "case"}))
    ):
        return said
    return None


def _joined(said: str) -> str:
    """A name with the words of two parts written as one: start-up, shut down."""
    return re.sub(r"\b(start|shut|turn)[\s-]*(up|down|off)\b", r"\1\2", plain(said), flags=re.IGNORECASE)


def is_case_label(text: str) -> bool:
    """Does a cell announce the names of cases (``Case``, ``Operating condition``)?"""
    return bool(_LABEL.fullmatch(" ".join(text.split()).strip()))


def is_strong(text: str) -> bool:
    """Is it a name that hardly means anything else?"""
    name = case_name(text)
    return name is not None and (bool(_NUMBERED.fullmatch(name)) or bool(folded(_joined(name)).tokens & _STRONG))


@dataclass(eq=False)
class _Header:
    """A row of names: each governs what lies below it, down to ``last``."""

    row: int
    names: list[tuple[Cell, str]]
    last: int = 10**9


@dataclass(eq=False)
class Cases:
    """The cases of a sheet."""

    page: Page
    headers: list[_Header] = field(default_factory=list)
    sections: list[tuple[int, str, Cell]] = field(default_factory=list)
    """A name that stands alone above a block."""
    columns: list[tuple[float, float, int, dict[int, str]]] = field(default_factory=list)
    """A column of names: left, right, row of its head, name by row."""
    used: set[int] = field(default_factory=set)
    """Cells that are names."""

    def of_column(self, cell: Cell) -> tuple[str | None, bool]:
        """The case of a value from a name above it, and whether it lies under several names (then it is for all)."""
        for header in reversed(self.headers):
            if header.row < cell.row <= header.last:
                under = self._under(header, cell)
                if len(under) == 1:
                    return under[0], False
                if len(under) > 1:
                    return None, True
        return None, False

    def _under(self, header: _Header, cell: Cell) -> list[str]:
        if self.page.exact:
            return [name for place, name in header.names if place.over(cell) > 0]
        over = [
            name
            for place, name in header.names
            if place.left < cell.middle < place.right or cell.left < place.middle < cell.right
        ]
        if over:
            return over

        def off(place: Cell) -> float:
            return min(abs(place.middle - cell.middle), abs(place.left - cell.left), abs(place.right - cell.right))

        place, name = min(header.names, key=lambda entry: off(entry[0]))
        apart = min(
            (abs(a.middle - b.middle) for a, _ in header.names for b, _ in header.names if a is not b), default=80.0
        )
        return [name] if off(place) < 0.5 * apart else []

    def header_of(self, cell: Cell) -> _Header | None:
        return next((h for h in reversed(self.headers) if h.row < cell.row <= h.last), None)

    def of_row(self, cell: Cell) -> str | None:
        """The case of a value from a name in its row, for tables whose heads run across."""
        for left, right, head, names in reversed(self.columns):
            if head < cell.row and cell.row in names and (right <= cell.left + 1.0 or left >= cell.right - 1.0):
                return names[cell.row]
        return None

    def of_section(self, cell: Cell) -> str | None:
        """The case of a value from the name that stands alone above its block."""
        above = [entry for entry in self.sections if entry[0] < cell.row]
        return above[-1][1] if above else None

    @property
    def names(self) -> list[str]:
        found = [(h.row, name) for h in self.headers for _, name in h.names]
        found += [(row, name) for _, _, _, names in self.columns for row, name in names.items()]
        found += [(row, name) for row, name, _ in self.sections]
        return list(dict.fromkeys(name for _, name in sorted(found, key=lambda entry: entry[0])))


def find_cases(page: Page, labelled: dict[int, bool], numeric: set[int], others: frozenset[int] = frozenset()) -> Cases:
    """The cases of a page; ``labelled`` says of each label's cell (by id) whether it has values and so is no name of a
    case, ``others`` are labels of no concern."""
    found = Cases(page)
    for row in page.order:
        cells = [c for c in page.rows[row] if c.row == row]
        _header(found, row, cells, labelled, numeric, others)
    _columns(found, labelled, numeric)
    _sections(found, numeric)
    for header, following in zip(found.headers, found.headers[1:], strict=False):
        if any(a.over(b) > 0 for a, _ in header.names for b, _ in following.names):
            header.last = following.row - 1
    return found


def _header(found: Cases, row: int, cells: list[Cell], labelled: dict[int, bool], numeric: set[int],
            others: frozenset[int]) -> None:  # fmt: skip
    """A row of case names: behind the word ``Case``, or at least two names without one."""
    label = next((c for c in cells if is_case_label(c.text)), None)
    # Two quantities and more in the row: it heads columns, and `Max. flow` there is a flow.
    quantities = [labelled[id(c)] for c in cells if id(c) in labelled and id(c) not in others]
    heading = len(quantities) >= 2 and any(quantities) and quantities.count(False) < 2
    if label is not None and not heading:
        names: list[tuple[Cell, str]] = []
        for cell in found.page.right_of(label):
            if labelled.get(id(cell)) or is_case_label(cell.text) or (cell.row != row):
                break
            text = cell.text.strip()
            if re.fullmatch(
                r"units?|uom|symbol|value|remarks?|notes?|einheit|unite|unidad|\[.*\]", text, re.IGNORECASE
            ):
                continue
            names.append((cell, case_name(text) or text))
        if len(names) >= 2 or (len(names) == 1 and case_name(names[0][1])):
            if len(names) == 1 and len([c for c in cells if c is not label]) == 1:
                found.sections.append((row, names[0][1], names[0][0]))
            else:
                found.headers.append(_Header(row, names))
            found.used |= {id(c) for c, _ in names} | {id(label)}
            return
    named = [
        (c, name) for c in cells if id(c) not in numeric and not labelled.get(id(c)) and (name := case_name(c.text))
    ]
    strong = sum(is_strong(c.text) for c, _ in named)
    if not heading and len(named) >= 2 and strong >= 1 and not any(id(c) in numeric for c in cells):
        found.headers.append(_Header(row, named))
        found.used |= {id(c) for c, _ in named}


def _columns(found: Cases, labelled: dict[int, bool], numeric: set[int]) -> None:
    """Columns of case names: below the word ``Case``, or two names and more one below the other."""
    page = found.page
    taken: set[int] = set()
    for cell in page.cells:
        if id(cell) in taken or id(cell) in found.used or id(cell) in numeric:
            continue
        announced = is_case_label(cell.text)
        if announced:
            under = _announced(page, cell, labelled)
        elif _begins(page, cell) and (not labelled.get(id(cell)) or _heads_above(page, cell, labelled)):
            under = _named_below(page, cell)
        else:
            continue
        names = {c.row: case_name(c.text) or c.text for c in under if any(id(v) in numeric for v in page.rows[c.row])}
        if len(names) >= (1 if announced else 2):
            found.columns.append((cell.left, cell.right, cell.row if announced else cell.row - 1, names))
            taken |= {id(c) for c in under}
            found.used |= {id(c) for c in under} | {id(cell)}


def _announced(page: Page, head: Cell, labelled: dict[int, bool]) -> list[Cell]:
    """The cells below the word ``Case``, whatever their texts, over a row of units."""
    under: list[Cell] = []
    last = head.bottom
    for below in page.below(head):
        if below.row > last + 3 or (labelled.get(id(below)) and not case_name(below.text)):
            break
        under.append(below)
        last = below.bottom
    return [c for c in under if not re.fullmatch(r"[\[(]?[-–]?[\])]?", c.text)]


def _begins(page: Page, cell: Cell) -> bool:
    """Does a column of names begin here: with a strong one, or a weak one above a strong one?"""
    if is_strong(cell.text):
        return True
    under = page.below(cell, 1) if case_name(cell.text) else []
    return bool(under) and is_strong(under[0].text)


def _named_below(page: Page, first: Cell) -> list[Cell]:
    """A name and the names right below it."""
    under, last = [first], first.bottom
    for below in page.below(first):
        if below.row > last + 1 or not case_name(below.text):
            break
        under.append(below)
        last = below.bottom
    return under


def _heads_above(page: Page, cell: Cell, labelled: dict[int, bool]) -> bool:
    """Do labels of quantities head the columns right of a name (so that ``Max. flow`` is a case, not a flow)?"""
    for row in range(cell.row - 4, cell.row):
        heads = [c for c in page.rows.get(row, ()) if c.left >= cell.right - 1.0 and labelled.get(id(c))]
        if len(heads) >= 2:
            return True
    return False


def _sections(found: Cases, numeric: set[int]) -> None:
    """Names that stand alone in their row, above a block."""
    page = found.page
    alone = []
    for row in page.order:
        cells = [c for c in page.rows[row] if c.row == row]
        if (
            len(cells) == 1
            and id(cells[0]) not in found.used
            and id(cells[0]) not in numeric
            and is_strong(cells[0].text)
        ):
            alone.append((row, case_name(cells[0].text) or "", cells[0]))
    if alone:
        found.sections += alone
        found.used |= {id(c) for _, _, c in alone}
    found.sections.sort(key=lambda entry: entry[0])
