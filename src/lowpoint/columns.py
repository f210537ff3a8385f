"""From what callers pass to columns of one kind: numbers with NaN for blank, words, tables, and what was wrong.

Blank is ``None``, NaN or the empty text (a spreadsheet's add-in cannot always tell these apart); a logical
counts as 1 or 0, as the programs themselves do; any other text where a number belongs is a fault.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import numpy.typing as npt

from lowpoint.declare import Parameter
from lowpoint.problems import CellError
from lowpoint.quantities import Table, Word

__all__ = ["OMITTED", "Column", "first_error", "number_column", "read_table", "word_column"]


class _Omitted:
    """An argument that the caller left out, as different from a blank cell given."""

    _one: _Omitted | None = None

    def __new__(cls) -> _Omitted:
        cls._one = cls._one or super().__new__(cls)
        return cls._one

    def __repr__(self) -> str:
        return "OMITTED"

    def __reduce__(self) -> tuple[Any, ...]:
        return (_Omitted, ())


OMITTED = _Omitted()

_BLANKABLE = frozenset({float, int, type(None), np.float64})


@dataclass(slots=True)
class Column:
    """One argument for every row, or one element for all rows.

    ``numbers`` for quantities (NaN blank), ``words`` for text (None blank): one str for all rows or an object
    array. ``errors`` are cell errors passed in and ``texts`` wrong kinds of value, both by place.
    """

    numbers: npt.NDArray[np.float64] | None = None
    words: Any = None
    errors: dict[int, CellError] = field(default_factory=dict)
    texts: dict[int, object] = field(default_factory=dict)

    @property
    def size(self) -> int:
        if self.numbers is not None:
            return len(self.numbers)
        return len(self.words) if isinstance(self.words, np.ndarray) else 1


def number_column(cells: Any) -> Column:
    """A column of numbers from one cell, an array, or a sequence of cells."""
    if isinstance(cells, np.ndarray) and cells.dtype.kind in "fiub":
        return Column(numbers=np.asarray(cells, np.float64).ravel())
    if not isinstance(cells, list | tuple | np.ndarray):
        cells = [cells]
    elif isinstance(cells, np.ndarray):
        cells = cells.ravel().tolist()
    kinds = set(map(type, cells))
    # NumPy's own conversion is used only where it means what we mean: it would read '12' as a number.
    if kinds <= _BLANKABLE:
        return Column(numbers=np.array(cells, np.float64))
    return _mixed_numbers(cells)


def _mixed_numbers(cells: Sequence[object]) -> Column:
    column = Column(numbers=np.full(len(cells), np.nan))
    assert column.numbers is not None
    for place, cell in enumerate(cells):
        if cell is None or cell is OMITTED:
            continue
        if isinstance(cell, CellError):
            column.errors[place] = cell
        elif isinstance(cell, str):
            if cell:
                column.texts[place] = str(cell)
        else:
            try:
                column.numbers[place] = float(cell)  # type: ignore[arg-type]
            except (TypeError, ValueError, OverflowError):
                column.texts[place] = cell
    return column


def word_column(cells: Any, resolve: Callable[[str], str], default: str | None) -> Column:
    """A column of canonical words; ``resolve`` raises ValueError for an unknown one, with the sentence."""
    if not isinstance(cells, list | tuple | np.ndarray):
        cells = [cells]
    elif isinstance(cells, np.ndarray):
        cells = cells.ravel().tolist()
    column = Column()
    known: dict[object, object] = {}
    words = np.empty(len(cells), object)
    for place, cell in enumerate(cells):
        if isinstance(cell, CellError):
            column.errors[place] = cell
            continue
        # 0 is no word: it is how a spreadsheet's add-in is shown a single blank cell.
        if cell is None or cell is OMITTED or cell == "" or (cell == 0 and cell is not False) or cell != cell:
            words[place] = default
            continue
        if not isinstance(cell, str):
            column.texts[place] = cell
            continue
        if cell not in known:
            try:
                known[cell] = resolve(cell)
            except ValueError as unknown:
                known[cell] = unknown
        found = known[cell]
        if isinstance(found, str):
            words[place] = found
        else:
            column.texts[place] = found
    one = len(cells) > 0 and not column.errors and not column.texts and (words == words[0]).all()
    column.words = words[0] if one else words
    return column


def closed_word(kind: Word | Table) -> Callable[[str], str]:
    """What resolves a word of a closed list, any case, spaces around it ignored."""
    words = kind.words if isinstance(kind, Word) else kind.or_words
    table = {word.casefold(): word for word in words}

    def resolve(text: str) -> str:
        word = table.get(" ".join(text.split()).casefold())
        if word is None:
            raise ValueError(f"{kind.symbol} must be one of {', '.join(words)}, got '{text}'")
        return word

    return resolve


def first_error(cells: Any) -> CellError | None:
    """The first error among the cells of a table argument, row by row."""
    if isinstance(cells, np.ndarray):
        cells = cells.ravel().tolist() if cells.dtype == object else []
    if isinstance(cells, list | tuple):
        return next((found for found in map(first_error, cells) if found is not None), None)
    return cells if isinstance(cells, CellError) else None


def read_table(parameter: Parameter, cells: Any) -> tuple[Any, CellError | None, str]:
    """A table argument: (array of ``width`` columns or a word, None, '') or (None, error, what is wrong).

    Blank cells stay NaN here: the caller, who has looked for errors already, drops rows blank in all tables of a call.
    """
    kind = parameter.kind
    assert isinstance(kind, Table)
    name = parameter.name
    if isinstance(cells, str) and cells and kind.or_words:
        try:
            return closed_word(kind)(cells), None, ""
        except ValueError as unknown:
            return None, CellError.VALUE, f"{unknown}, or a table of {kind.width} columns"
    rows = cells.tolist() if isinstance(cells, np.ndarray) else cells
    if not isinstance(rows, list | tuple):
        rows = [rows]
    rows = [list(row) if isinstance(row, list | tuple) else [row] for row in rows]
    if kind.width == 1:
        rows = [[cell] for row in rows for cell in row]
    if any(len(row) != kind.width for row in rows):
        return None, CellError.VALUE, f"{name} must be a table of {kind.width} columns"
    flat = number_column([cell for row in rows for cell in row])
    if flat.texts:
        return None, CellError.VALUE, f"{name} must hold numbers only, got '{flat.texts[min(flat.texts)]}'"
    assert flat.numbers is not None
    return flat.numbers.reshape(len(rows), kind.width), None, ""
