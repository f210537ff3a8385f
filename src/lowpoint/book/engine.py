"""The replaceable formula engine: the one module that knows which library evaluates ordinary formulas.

A successor must offer what :class:`Engine` offers and pass the probe table (:mod:`lowpoint.book.probes`).

Traps of formualizer 0.13, found by trial, and how they are met here:

* One formula that cannot be parsed, or an external reference, makes the whole load fail: ask :func:`unreadable`
  (or ``probes.blocking``, which does) about every formula before it goes into the book.
* Values set before a first ``evaluate_all`` take quadratic time: :meth:`Engine.load` evaluates nothing, so call
  :meth:`Engine.evaluate` before :meth:`Engine.set_values`.
* ``calcPr iterate`` in the file turns iteration on whatever the caller asks: strip it before loading;
  ``diagnostics`` says when iteration took place.
* Cycles are judged at run time, as spreadsheet programs do: ``=IF(TRUE,3,A4)`` in A4 is no circle.
* An unknown function inside IFERROR is swallowed silently: such a formula must be blocked by its text.
* The time limit is looked at between layers of cells only: one call-back or one array (ten million cells at most) is
  not interrupted; only a worker process that is ended from outside cures that.
* NaN and infinity from a call-back come through as they are; 1.0 and -0.0 print as "1" and "-0".
"""

from __future__ import annotations

import datetime
import inspect
import math
import re
import threading
import time
import weakref
from collections.abc import Callable, Iterable, Mapping, Sequence
from contextlib import suppress
from dataclasses import dataclass
from functools import lru_cache, partial
from typing import Any, NamedTuple

import formualizer as fz

from lowpoint.errors import BookError
from lowpoint.problems import CellError

__all__ = ["Engine", "Key", "Unrefreshable", "Word", "knows", "unreadable", "words"]

Grid = list[list[Any]]


class Key(NamedTuple):
    """Where a cell is: sheet, row and column, counted from 1."""

    sheet: str
    row: int
    column: int


@dataclass(frozen=True, slots=True)
class Unrefreshable:
    """What a cell holds whose value the engine cannot vouch for; never written into a book.

    ``kind`` is name, circular, missing, spill, stopped, or fed (it reads another such cell).
    """

    reason: str
    kind: str


_ERRORS = {
    "Null": CellError.NULL,
    "Div": CellError.DIV0,
    "Value": CellError.VALUE,
    "Ref": CellError.REF,
    "Num": CellError.NUM,
    "Na": CellError.NA,
    "Calc": CellError.CALC,
}
_MARKERS = {
    "Name": Unrefreshable("uses a name or function that the recalculator's engine does not know", "name"),
    "Circ": Unrefreshable("is part of a circular reference", "circular"),
    "NImpl": Unrefreshable("uses something that the recalculator's engine does not have", "missing"),
    "Spill": Unrefreshable("has an array result with no room beside it", "spill"),
    "Cancelled": Unrefreshable("was stopped before it was evaluated", "stopped"),
    "Error": Unrefreshable("cannot be evaluated by the recalculator's engine", "missing"),
}
_KINDS = {error: kind for kind, error in _ERRORS.items()} | {CellError.NAME: "Name", CellError.SPILL: "Spill"}
_ADDRESS = re.compile(r"(?:'((?:[^']|'')*)'|([^'!]*))!\$?([A-Z]+)\$?(\d+)")


def _to_cell(value: Any) -> Any:
    """What the engine gives, as a cell value or an :class:`Unrefreshable`."""
    if type(value) is float:
        return value + 0.0 if math.isfinite(value) else CellError.NUM
    if value is None or isinstance(value, (str, bool)):
        return value
    if isinstance(value, int):
        return float(value)
    if isinstance(value, dict):
        kind = str(value.get("kind"))
        return _ERRORS.get(kind) or _MARKERS.get(kind, _MARKERS["Error"])
    if isinstance(value, list):
        return [[_to_cell(cell) for cell in row] for row in value]
    return _serial(value)


def _serial(value: Any) -> Any:
    """A date or time that slipped through although serial numbers were asked for (1900 system)."""
    day = datetime.timedelta(days=1)
    if isinstance(value, datetime.timedelta):
        return value / day
    if isinstance(value, datetime.time):
        return datetime.timedelta(hours=value.hour, minutes=value.minute, seconds=value.second) / day
    if isinstance(value, datetime.date):
        whole = datetime.datetime(value.year, value.month, value.day)
        clock = value.time() if isinstance(value, datetime.datetime) else datetime.time()
        serial = (datetime.datetime.combine(whole, clock) - datetime.datetime(1899, 12, 30)) / day
        return serial if serial > 60 else serial - 1.0
    raise TypeError(f"the engine gave a {type(value).__name__}")


def _from_cell(value: Any) -> Any:
    """A cell value as the engine takes it."""
    if type(value) is float:
        return value if math.isfinite(value) else {"type": "Error", "kind": "Num"}
    if value is None or isinstance(value, bool):
        return value
    if isinstance(value, CellError):
        return {"type": "Error", "kind": _KINDS[value]}
    if isinstance(value, str):
        return str(value)
    if isinstance(value, list):
        return [[_from_cell(cell) for cell in row] for row in value]
    if isinstance(value, Unrefreshable):
        return {"type": "Error", "kind": "NImpl"}
    return float(value)


def _same(callback: Callable[..., Any]) -> Callable[..., Any]:
    return callback


class Word(NamedTuple):
    """One word of a formula: its text, what it is (Operand, Func, OpInfix, ...) and which kind (Range, Open, ...)."""

    text: str
    type: str
    subtype: str


@lru_cache(maxsize=64)
def _label(value: Any) -> str:
    return str(value).rpartition(".")[2].rstrip("_")


def words(formula: str) -> list[Word]:
    """The words of a formula that starts with ``=``; ValueError where the engine cannot read it."""
    trouble = unreadable(formula)
    if trouble is not None:
        raise ValueError(trouble)
    found = (token for token in fz.tokenize(formula) if token is not None)
    return [Word(token.value, _label(token.token_type), _label(token.subtype)) for token in found]


def unreadable(formula: str) -> str | None:
    """Why the engine cannot read a formula; ``None`` where it can."""
    try:
        fz.parse(formula)
    except (fz.ParserError, fz.TokenizerError) as trouble:
        return f"cannot be read by the recalculator's engine ({trouble})"
    return None


@lru_cache(maxsize=4096)
def knows(function: str) -> bool:
    """Whether the engine has a function of this name (without ``_xlfn.``)."""
    if not re.fullmatch(r"[A-Za-z_][\w.]*", function):
        return False
    book = fz.Workbook()
    book.add_sheet("A")
    book.set_formula("A", 1, 1, f"={function}()")
    book.evaluate_all()
    return bool(book.get_value("A", 1, 1) != {"type": "Error", "kind": "Name"})


class Engine:
    """A workbook in the engine's memory; rows and columns count from 1.

    >>> engine = Engine.empty("List")
    >>> engine.set_formulas("List", 1, 1, [["=1/0", "=2+3"]])
    >>> engine.evaluate()
    >>> engine.values("List", 1, 1, 1, 2)
    [[<CellError.DIV0: '#DIV/0!'>, 5.0]]
    """

    def __init__(self, book: fz.Workbook, seconds: float, name: str = "the workbook") -> None:
        book.set_temporal_egress("serial")
        self._book, self.name = book, name
        self._seconds = seconds
        self._until: float | None = None  # set when the first evaluation begins
        self._failure: BaseException | None = None

    @classmethod
    def load(cls, data: bytes, *, date1904: bool = False, seconds: float = 120.0, name: str = "the workbook") -> Engine:
        """Load a package that holds only what the engine can read; ``seconds`` bounds all evaluations together."""
        config = _config(seconds, date1904)
        try:
            book = fz.Workbook.from_bytes(data, config=config)
        except (OSError, RuntimeError, ValueError, fz.ExcelEvaluationError) as trouble:
            raise BookError(
                name, "must hold formulas that the engine can load", _short(trouble), "Please report this workbook."
            ) from trouble
        return cls(book, seconds, name)

    @classmethod
    def empty(cls, *sheets: str, seconds: float = 120.0) -> Engine:
        """A new book with these sheets, ready for :meth:`set_values`."""
        book = fz.Workbook(config=_config(seconds, date1904=False))
        for sheet in sheets:
            book.add_sheet(sheet)
        book.evaluate_all()
        return cls(book, seconds)

    def evaluate(self) -> None:
        """Evaluate whatever changed; BookError when the time is up, a call-back's own exception as it was."""
        self._book.reset_cancel()
        bell = threading.Timer(self.check_time(), self._book.cancel)
        bell.daemon = True
        bell.start()
        try:
            self._book.evaluate_all()
        except Exception as trouble:
            if self._failure is None:
                raise self._stopped(trouble) from trouble
        finally:
            bell.cancel()
        failure, self._failure = self._failure, None
        if failure is not None:
            raise failure

    def check_time(self) -> float:
        """The seconds that are left for evaluating this book; BookError where there are none."""
        now = time.monotonic()
        if self._until is None:
            self._until = now + self._seconds
        if now >= self._until:
            raise self._late()
        return self._until - now

    def cancel(self) -> None:
        """Stop a running evaluation, from another thread or a call-back."""
        self._book.cancel()

    def register(self, name: str, callback: Callable[..., Any], *, override: bool = False) -> None:
        """Make ``name`` a function of the book; it gets and gives cells, ranges are lists of rows.

        An argument left out arrives as 0.0. An exception stops the evaluation and comes out of :meth:`evaluate`.
        The book keeps call-backs where no collector of garbage sees them: were one to hold the engine, or the owner of
        a method, the whole book would stay in memory for good. Whoever registers a method must keep its owner.
        """
        mine = weakref.ref(self)
        found: Callable[[], Any] = (
            weakref.WeakMethod(callback) if inspect.ismethod(callback) else partial(_same, callback)
        )

        def guarded(*arguments: Any) -> Any:
            called, engine = found(), mine()
            assert called is not None
            assert engine is not None
            try:
                return _from_cell(called(*[_to_cell(argument) for argument in arguments]))
            except BaseException as trouble:  # the engine would turn it into #VALUE!, an interrupt too
                engine._failure = engine._failure or trouble
                engine._book.cancel()
                raise

        self._book.register_function(name, guarded, allow_override_builtin=override)

    def set_values(self, sheet: str, row: int, column: int, grid: Sequence[Sequence[Any]]) -> None:
        """Set a rectangle of cells from its upper left corner."""
        self._book.set_values_batch(sheet, row, column, [[_from_cell(cell) for cell in line] for line in grid])

    def set_column(self, sheet: str, row: int, column: int, cells: Sequence[Any]) -> None:
        """Set cells of one column from a row downwards."""
        plain = _all_plain(cells)
        grid = [[cell] for cell in cells] if plain else [[_from_cell(cell)] for cell in cells]
        self._book.set_values_batch(sheet, row, column, grid)

    def set_formulas(self, sheet: str, row: int, column: int, grid: Sequence[Sequence[str]]) -> None:
        """Set a rectangle of formulas, each with its ``=``."""
        self._book.set_formulas_batch(sheet, row, column, [list(line) for line in grid])

    def renew(self, sheet: str, row: int, column: int, formula: str) -> bool:
        """Set a stored formula again; False where the engine refuses a circle that it took from the file."""
        with suppress(RuntimeError):
            self._book.set_formulas_batch(sheet, row, column, [[formula]])
            return True
        return False

    def values(self, sheet: str, row1: int, column1: int, row2: int, column2: int) -> Grid:
        """The values of a rectangle, corners included."""
        area = fz.RangeAddress(sheet, row1, column1, row2, column2)
        return [[_to_cell(cell) for cell in line] for line in self._book.sheet(sheet).get_values(area)]

    def column(self, sheet: str, column: int, first: int, last: int) -> list[Any]:
        """The values of one column, from the first row to the last."""
        area = fz.RangeAddress(sheet, first, column, last, column)
        cells = [line[0] for line in self._book.sheet(sheet).get_values(area)]
        # Adding 0.0 makes 0 of -0, as everywhere here.
        return [cell + 0.0 for cell in cells] if _all_plain(cells) else [_to_cell(cell) for cell in cells]

    def value(self, sheet: str, row: int, column: int) -> Any:
        """The value of one cell."""
        return _to_cell(self._book.get_value(sheet, row, column))

    def spill(self, sheet: str, row: int, column: int) -> tuple[int, int]:
        """How many rows and columns the result of a cell fills; (1, 1) for a single value."""
        role = self._book.inspect_cell(_address(Key(sheet, row, column)), include_values=False).cell.spill
        if role is None or role.extent is None:
            return 1, 1
        first, _, last = role.extent.rpartition("!")[2].replace("$", "").partition(":")
        corners = [_key(f"A!{corner}") for corner in (first, last or first)]
        return corners[1].row - corners[0].row + 1, corners[1].column - corners[0].column + 1

    def dependents(self, key: Key) -> list[Key]:
        """The cells whose formulas read this one by reference, or read what spills from it.

        What INDIRECT and OFFSET reach only while evaluating, and what is read by a defined name, is not among them.
        """
        report = self._book.dependents(_address(key), max_results=2_000_000, max_work=50_000_000)
        return [_key(found.cell) for found in report.dependents]

    def fed(
        self, seeds: Iterable[Key], onward: Callable[[Key], Iterable[Key]] | None = None
    ) -> dict[Key, Unrefreshable]:
        """Every cell that depends on one of ``seeds``, directly or not, each with the seed that it depends on.

        ``seeds`` are the cells that keep an old value: the formulas that were blocked, and those that came out
        :class:`Unrefreshable`. ``onward`` adds what the engine cannot see (calls lifted out of the book).
        """
        found: dict[Key, Unrefreshable] = {}
        queue = [(seed, seed) for seed in seeds]
        known = {seed for seed, _ in queue}
        while queue:
            key, seed = queue.pop()
            for after in [*self.dependents(key), *(onward(key) if onward else ())]:
                if after not in known:
                    known.add(after)
                    found[after] = Unrefreshable(f"depends on {_address(seed)}, which was not refreshed", "fed")
                    queue.append((after, seed))
        return found

    @property
    def diagnostics(self) -> Mapping[str, Any]:
        """What the load left out (names, sheets) and whether the last evaluation iterated over a circle."""
        return {
            "names": list(self._book.name_import_diagnostics),
            "sheets": list(self._book.sheet_import_diagnostics),
            "iterated": self._book.last_cycle_telemetry().iterated_sccs > 0,
        }

    def _stopped(self, trouble: Exception) -> BookError:
        text = str(trouble)
        if "deadline" in text or "CANCELLED" in text:
            return self._late()
        return BookError(self.name, "must be evaluated by the engine", _short(trouble), "Please report it.")

    def _late(self) -> BookError:
        remedy = "Nothing was written. Split the workbook, or allow more: --limit seconds=..."
        return BookError(self.name, f"must be evaluated within {self._seconds:g} s", "more", remedy)


def _all_plain(cells: Sequence[Any]) -> bool:
    """Whether all cells are finite numbers, which pass the border of the engine as they are."""
    return set(map(type, cells)) == {float} and math.isfinite(sum(cells))


def _config(seconds: float, date1904: bool) -> fz.WorkbookConfig:
    settings = fz.EvaluationConfig()
    settings.date_system = "1904" if date1904 else "1900"
    settings.cycle_detection = "runtime"
    settings.cycle_policy = "error"
    settings.max_eval_time_ms = max(1, int(seconds * 1000))
    return fz.WorkbookConfig(mode=fz.WorkbookMode.Ephemeral, eval_config=settings)


def _short(trouble: Exception) -> str:
    return f"'{str(trouble)[:200]}'"


def _address(key: Key) -> str:
    letters, number = "", key.column
    while number:
        number, rest = divmod(number - 1, 26)
        letters = chr(65 + rest) + letters
    sheet = key.sheet.replace("'", "''")
    return f"{key.sheet if sheet.isalnum() else chr(39) + sheet + chr(39)}!{letters}{key.row}"


def _key(address: str) -> Key:
    found = _ADDRESS.fullmatch(address)
    if found is None:
        raise ValueError(f"not the address of a cell: {address}")
    column = 0
    for letter in found[3]:
        column = column * 26 + ord(letter) - 64
    return Key((found[1] or found[2] or "").replace("''", "'"), int(found[4]), column)
