"""The checked callable: what a kernel becomes for users. Checks, units, defaults, blocks of rows, and reasons."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
import numpy.typing as npt

from lowpoint import messages
from lowpoint.columns import Column, closed_word, first_error, number_column, read_table, word_column
from lowpoint.declare import Declaration, Parameter
from lowpoint.problems import CellError, Ledger
from lowpoint.quantities import Quantity, Table, Text, Word
from lowpoint.rows import from_si, numbers_block, table_fault, to_si, with_default, words_block
from lowpoint.units import Unit, dimension

__all__ = ["Checked", "Outcome"]

BLOCK = 4096
"""Rows a kernel sees at once: its temporaries stay in the processor's cache."""


@dataclass(slots=True)
class Outcome:
    """The answers of one call: a value a row (NaN or None where ``ledger`` has a fault), and what explains them."""

    values: npt.NDArray[Any]
    ledger: Ledger
    good: npt.NDArray[np.intp]
    given: dict[str, Any]
    """The arguments of the rows in ``good``, defaults filled in; numbers in the user's unit."""


class Checked:
    """One declared function in one set of units, over columns that were read by :mod:`lowpoint.columns`."""

    def __init__(self, declaration: Declaration, system: str) -> None:
        self.declaration = declaration
        self.system = system
        prefix = "LPU_" if system == "us" else "LP_"
        self.name = prefix + declaration.name
        self.parameters = declaration.parameters
        self.units: dict[str, Unit] = {}
        self._resolvers: dict[str, Callable[[str], str]] = {}
        for parameter in self.parameters:
            self._prepare(parameter)
        self.returns_text = isinstance(declaration.returns, Word | Text)
        self.unit = Unit("") if self.returns_text else self._unit_of(declaration.returns)
        self._is_table = {p.name: p.is_table for p in self.parameters}
        self._limits = {
            p.name: self._bounds(p.kind) for p in self.parameters if isinstance(p.kind, Quantity)
        }  # fmt: skip

    def _unit_of(self, kind: Any) -> Unit:
        return dimension(kind.dimension).unit(self.system)

    def _prepare(self, parameter: Parameter) -> None:
        kind = parameter.kind
        if isinstance(kind, Quantity | Table):
            self.units[parameter.name] = self._unit_of(kind)
        elif isinstance(kind, Word):
            self._resolvers[parameter.name] = closed_word(kind)
        else:
            free = self.declaration.resolve.get(parameter.name, _as_given)
            self._resolvers[parameter.name] = lru_cache(4096)(free)

    def _bounds(self, kind: Quantity) -> tuple[float, float]:
        """The possible range in this function's user unit."""
        metric, mine = dimension(kind.dimension).metric, self._unit_of(kind)
        if self.system != "us" or metric == mine:
            return kind.low, kind.high
        low = kind.us_low if kind.us_low is not None else _carried(kind.low, metric, mine)
        return low, _carried(kind.high, metric, mine)

    def bounds(self, name: str) -> tuple[float, float]:
        """The possible range of a number argument, in this function's unit."""
        return self._limits[name]

    def resolver(self, name: str) -> Callable[[str], str]:
        """What turns the text of a word argument into its canonical word; ValueError for an unknown one."""
        return self._resolvers[name]

    # --- reading -----------------------------------------------------------------------------------------------

    def column(self, parameter: Parameter, cells: Any) -> Column:
        """One non-table argument as a column, whatever the caller passed."""
        if parameter.is_number:
            return number_column(cells)
        default = parameter.default if isinstance(parameter.default, str) else None
        return word_column(cells, self._resolvers[parameter.name], default)

    # --- evaluating --------------------------------------------------------------------------------------------

    def evaluate(self, columns: Mapping[str, Column], tables: Mapping[str, Any], rows: int) -> Outcome:
        """Check, convert and compute ``rows`` rows; ``tables`` holds each table argument as it was passed."""
        ledger = Ledger(rows)
        self._errors_in(columns, tables, ledger)
        read = self._read_tables(tables, ledger)
        user = {p.name: self._check(p, columns.get(p.name), ledger) for p in self.parameters if not p.is_table}
        self._check_relations(user, ledger)
        good = ledger.good()
        given = self._filled(user, good if not ledger.clean else None)
        given.update(read)
        values = self._compute(given, good, rows)
        self._no_answer(values, given, good, ledger)
        return Outcome(values, ledger, good, given)

    def _errors_in(self, columns: Mapping[str, Column], tables: Mapping[str, Any], ledger: Ledger) -> None:
        """Errors passed in, the leftmost first, before anything else is looked at."""
        for parameter in self.parameters:
            if parameter.is_table:
                error = first_error(tables.get(parameter.name))
                found = {} if error is None else {error: np.ones(1, np.bool_)}
            else:
                found = _by_error(columns.get(parameter.name))
            for error, mask in found.items():
                ledger.blame(mask, error, messages.passed_on(self, parameter, error))

    def _read_tables(self, tables: Mapping[str, Any], ledger: Ledger) -> dict[str, Any]:
        everything = np.ones(1, np.bool_)
        read: dict[str, Any] = {}
        for parameter in self.parameters:
            if not parameter.is_table:
                continue
            cells = tables.get(parameter.name)
            if first_error(cells) is not None:
                continue
            if cells is None or (isinstance(cells, str) and not cells):
                if parameter.required:
                    ledger.blame(everything, CellError.NA, messages.blank(self, parameter))
                read[parameter.name] = parameter.default
                continue
            table, error, words = read_table(parameter, cells)
            if error is not None:
                ledger.blame(everything, error, messages.sentence(self, words, parameter.kind.remedy))
            read[parameter.name] = table
        if ledger.clean:
            self._check_tables(read, ledger)
        return {name: self._table_si(name, table) for name, table in read.items()}

    def _check_tables(self, read: dict[str, Any], ledger: Ledger) -> None:
        """Tables of one call are as long as each other; rows blank in all of them are dropped."""
        arrays = {name: table for name, table in read.items() if isinstance(table, np.ndarray)}
        if not arrays:
            return
        everything = np.ones(1, np.bool_)
        lengths = {name: len(table) for name, table in arrays.items()}
        if len(set(lengths.values())) > 1:
            words = "tables must be equally long, got " + ", ".join(f"{n} {k}" for n, k in lengths.items())
            ledger.blame(everything, CellError.VALUE, messages.sentence(self, words))
            return
        kept = ~np.all(np.hstack([np.isnan(table) for table in arrays.values()]), axis=1)
        for parameter in self.parameters:
            if parameter.name not in arrays:
                continue
            table = read[parameter.name] = arrays[parameter.name][kept]
            error, words = table_fault(parameter, table)
            if error is not None:
                ledger.blame(everything, error, messages.sentence(self, words, parameter.kind.remedy))

    def _table_si(self, name: str, table: Any) -> Any:
        if not isinstance(table, np.ndarray):
            return table
        table = table[:, 0] if table.shape[1] == 1 else table
        return to_si(table, self.units[name])

    def _check(self, parameter: Parameter, column: Column | None, ledger: Ledger) -> Any:
        """One argument's values in the user's unit, faults entered; None where it is wholly omitted."""
        if column is None:
            if parameter.required:
                ledger.blame(np.ones(1, np.bool_), CellError.NA, messages.blank(self, parameter))
            return parameter.default if parameter.is_text else None
        if column.texts:
            mask = _mask(column.size, list(column.texts))
            ledger.blame(mask, CellError.VALUE, messages.not_understood(self, parameter, column))
        if parameter.is_text:
            return self._check_words(parameter, column, ledger)
        return self._check_numbers(parameter, column, ledger)

    def _check_words(self, parameter: Parameter, column: Column, ledger: Ledger) -> Any:
        words = column.words
        if parameter.required:
            blank = np.array([words is None]) if not isinstance(words, np.ndarray) else words == None  # noqa: E711
            ledger.blame(np.asarray(blank, np.bool_), CellError.NA, messages.blank(self, parameter))
        return words

    def _check_numbers(self, parameter: Parameter, column: Column, ledger: Ledger) -> Any:
        kind = parameter.kind
        assert isinstance(kind, Quantity)
        assert column.numbers is not None
        x = column.numbers
        low, high = self._limits[parameter.name]
        good = (x >= low if kind.closed_low else x > low) & (x <= high if kind.closed_high else x < high)
        if good.all():
            return x
        if kind.zero_is_blank and not parameter.required and (x == 0.0).any():
            x = np.where(x == 0.0, np.nan, x)
        absent = np.isnan(x)
        if parameter.required:
            wrong_kind = _mask(column.size, [*column.texts, *column.errors])
            ledger.blame(absent & ~wrong_kind, CellError.NA, messages.blank(self, parameter))
        bad = ~good & ~absent
        if bad.any():
            ledger.blame(bad, CellError.NUM, messages.out_of_bounds(self, parameter, x, low, high))
        return None if absent.all() else x

    def _check_relations(self, user: dict[str, Any], ledger: Ledger) -> None:
        for given, needed in self.declaration.needs.items():
            if user.get(given) is None:
                continue
            present = _present(user[given])
            for name in needed:
                missing = present & ~_present(user.get(name))
                ledger.blame(missing, CellError.NA, messages.needed(self, given, name))
        for must in self.declaration.must:
            low, high = user.get(must.low), user.get(must.high)
            if low is None or high is None:
                continue
            broken = low > high if must.equal else low >= high
            ledger.blame(broken, CellError.NUM, messages.out_of_order(self, must, low, high))

    def _filled(self, user: dict[str, Any], good: npt.NDArray[np.intp] | None) -> dict[str, Any]:
        """The arguments of the good rows: defaults filled in, one element or one a row."""
        filled: dict[str, Any] = {}
        for parameter in self.parameters:
            if parameter.is_table:
                continue
            name, x = parameter.name, user[parameter.name]
            if good is not None and isinstance(x, np.ndarray) and len(x) > 1:
                x = x[good]
            if isinstance(parameter.kind, Quantity):
                x = with_default(parameter, x, filled)
            elif isinstance(x, np.ndarray):
                x = x.astype(str)
            filled[name] = x
        return filled

    def _si(self, given: Mapping[str, Any]) -> dict[str, Any]:
        """The kernel's arguments: numbers in SI."""
        return {
            name: to_si(x, self.units[name]) if isinstance(x, np.ndarray) and x.dtype.kind == "f" and x.ndim == 1
            and not self._is_table[name] else x
            for name, x in given.items()
        }  # fmt: skip

    def _compute(self, given: dict[str, Any], good: npt.NDArray[np.intp], rows: int) -> npt.NDArray[Any]:
        count = len(good)
        if self.declaration.column:
            return self._columns(given, good, rows)
        out: npt.NDArray[Any] = np.empty(rows, object if self.returns_text else np.float64)
        if count < rows:
            out.fill(None if self.returns_text else np.nan)
        if count == 0:
            return out
        with np.errstate(all="ignore"):
            for start in range(0, count, BLOCK):
                stop = min(start + BLOCK, count)
                answer = self.declaration.kernel(*self._block(given, start, stop, count))
                out[good[start:stop] if count < rows else slice(start, stop)] = self._out(answer)
        return out

    def _columns(self, given: dict[str, Any], good: npt.NDArray[np.intp], rows: int) -> npt.NDArray[Any]:
        """Answers that are columns themselves: a row of numbers for each row of arguments."""
        if not len(good):
            return np.full((rows, 1), np.nan)
        with np.errstate(all="ignore"):
            answer = self._out(self.declaration.kernel(*self._block(given, 0, len(good), len(good))))
        out = np.full((rows, answer.shape[1]), np.nan)
        out[good] = answer
        return out

    def _block(self, given: dict[str, Any], start: int, stop: int, count: int) -> list[Any]:
        """The kernel's arguments for some rows, in SI: converted here, where they stay in the processor's cache."""
        block = []
        for parameter in self.parameters:
            x = given[parameter.name]
            if parameter.is_number and x is not None:
                x = numbers_block(x, self.units[parameter.name], start, stop, count)
            elif parameter.is_text and isinstance(x, np.ndarray):
                x = words_block(x, start, stop, count)
            block.append(x)
        return block

    def _out(self, answer: Any) -> Any:
        if self.returns_text:
            words = np.asarray(answer, object)
            words[words == ""] = None
            return words
        return from_si(answer, self.unit)

    def _no_answer(
        self, values: npt.NDArray[Any], given: dict[str, Any], good: npt.NDArray[np.intp], ledger: Ledger
    ) -> None:
        first = values[:, 0] if values.ndim == 2 else values
        silent = first == None if self.returns_text else ~np.isfinite(first)  # noqa: E711
        silent = silent & (ledger.codes() == 0) if not ledger.clean else silent
        if not silent.any():
            return
        if not self.returns_text:
            # A cell holds no infinity.
            infinite, values[silent] = np.isinf(first), np.nan
            ledger.blame(infinite, CellError.NUM, messages.sentence(self, "the answer is too large for a cell"))
        among_good, arguments = silent[good], self._si(given)
        for why in self.declaration.no_answer:
            mask = np.zeros(len(values), np.bool_)
            mask[good] = among_good & np.asarray(self._looked_at(why.when, arguments, len(good)), np.bool_)
            error = CellError.VALUE if why.value else CellError.NA if why.missing else CellError.NUM
            ledger.blame(mask, error, messages.no_answer(self, why.text, _names(why.when), given, good))
        ledger.blame(silent, CellError.NUM, messages.sentence(self, "there is no answer for these values"))

    def _looked_at(self, when: Callable[..., Any] | None, arguments: Mapping[str, Any], count: int) -> Any:
        """The mask of a predicate, over all good rows."""
        if when is None:
            return np.ones(count, np.bool_)
        with np.errstate(all="ignore"):
            return np.broadcast_to(np.asarray(when(*[arguments.get(n) for n in _names(when)])), count)

    # --- explaining --------------------------------------------------------------------------------------------

    def explain(self, outcome: Outcome) -> list[str]:
        """For every row the reason of its error, else its cautions and the basis of its answer, else "ok"."""
        said: list[list[str]] = [[] for _ in range(len(outcome.values))]
        if not len(outcome.good):
            return [outcome.ledger.sentence(row) or "ok" for row in range(len(said))]
        arguments = self._si(outcome.given)
        if not self.returns_text:
            arguments["result"] = to_si(np.asarray(outcome.values[outcome.good], np.float64), self.unit)
        for caution in self.declaration.cautions:
            mask = self._looked_at(caution.when, arguments, len(outcome.good))
            for row in outcome.good[np.asarray(mask, np.bool_)]:
                said[row].append(f"{caution.label}: {caution.text}")
        if self.declaration.basis or self.declaration.basis_text:
            basis = messages.basis(self.declaration)
            for words in said:
                words.append(basis)
        return [outcome.ledger.sentence(row) or "; ".join(words) or "ok" for row, words in enumerate(said)]


def _by_error(column: Column | None) -> dict[CellError, npt.NDArray[np.bool_]]:
    """For each error of a column the mask of its rows."""
    if column is None or not column.errors:
        return {}
    return {
        error: _mask(column.size, [place for place, e in column.errors.items() if e is error])
        for error in dict.fromkeys(column.errors.values())
    }


def _names(when: Callable[..., Any] | None) -> list[str]:
    """Which arguments a predicate looks at; `from_` stands for `from`, a word of Python."""
    return [] if when is None else [name.rstrip("_") for name in messages.argument_names(when)]


def _as_given(text: str) -> str:
    return text


def _carried(bound: float, metric: Unit, mine: Unit) -> float:
    if not np.isfinite(bound):
        return bound
    return float(f"{mine.from_si(metric.to_si(bound)):.12g}")


def _mask(size: int, places: Sequence[int]) -> npt.NDArray[np.bool_]:
    mask = np.zeros(size, np.bool_)
    mask[list(places)] = True
    return mask


def _present(x: Any) -> npt.NDArray[np.bool_]:
    if x is None or isinstance(x, str):
        return np.array([x is not None])
    if x.dtype == object:
        return np.asarray(x != None, np.bool_)  # noqa: E711
    return np.asarray(~np.isnan(x), np.bool_)
