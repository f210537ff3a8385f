"""How calls of single worksheet functions are written anew, or that they cannot be.

A rule gets the writer, the function's name and the written arguments, and gives the call anew, or None to leave it.
Rules of text, dates and ``TEXT`` patterns are in :mod:`lowpoint.book.rules_text`.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import TYPE_CHECKING

from .expression import BlockedError, Piece, spans
from .kinds import Pieces, kind_of

if TYPE_CHECKING:
    from .cures import Writer

__all__ = ["RULES", "Rule", "always", "any_array", "filled"]

Rule = Callable[["Writer", str, Pieces], Piece | None]
_ONE_CELL = frozenset({"MODE", "MDETERM", "TYPE", "GCD", "LCM"})


def any_array(pieces: Pieces) -> bool:
    """Whether one of the arguments is an array."""
    return any(piece is not None and piece.array for piece in pieces)


def filled(pieces: Pieces, *defaults: str) -> list[Piece | None]:
    """Arguments left out between others, which a call-back would get as 0, with what the function takes for them."""
    return [piece or Piece(defaults[k]) for k, piece in enumerate(pieces)]


def always(probe: str, *defaults: str, array: bool = False) -> Rule:
    """A rule that calls the helper of the function's name, whatever the arguments are."""

    def rule(writer: Writer, name: str, pieces: Pieces) -> Piece:
        writer.note(probe)
        over = (array or any_array(pieces)) and name not in _ONE_CELL
        return writer.helper(name, filled(pieces, *defaults) if defaults else pieces, over, kind_of(name))

    return rule


def _whole_literal(piece: Piece | None) -> bool:
    return piece is not None and piece.kind in {"literal", "zero"} and piece.text.isdigit()


def _int(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    if len(pieces) != 1 or pieces[0] is None or pieces[0].kind == "whole" or _whole_literal(pieces[0]):
        return None
    writer.note("whole-of-15-digits")
    return writer.helper(name, pieces, pieces[0].array, "whole")


def _step(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    if len(pieces) != 2 or all(map(_whole_literal, pieces)):
        return None
    writer.note("multiples")
    return writer.helper(name, pieces, any_array(pieces))


def _math_step(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """CEILING.MATH and its like, with a step of 1 and the usual direction where nothing else is said."""
    if not 1 <= len(pieces) <= 3 or pieces[0] is None:
        return None
    writer.note("multiples")
    given = filled([*pieces, None, None][:3], "", "1", "0")
    return writer.helper("CEILINGMATH" if "CEILING" in name else "FLOORMATH", given, any_array(pieces))


def _divisor(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    if len(pieces) == 2 and not any_array(pieces):
        return None
    writer.note("divisor-of-many")
    return writer.helper(name, pieces, False, "whole")


def _mode(writer: Writer, name: str, pieces: Pieces) -> Piece:
    writer.note("mode-tie")
    return writer.helper("MODE", pieces)


def _condition(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """The word TRUE or FALSE, written as text, where IF or NOT take a logical."""
    first = pieces[0] if pieces else None
    if first is None or first.array or first.kind not in {"text", "reference"}:
        return None
    writer.note("logical-from-text")
    x = first.text
    made = Piece(f"IF(ISTEXT({x}),{writer.helper('LOGICAL', [first]).text},{x})", False, "logical")
    return writer.plain(name, [made, *pieces[1:]])


def _position(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """ROW or COLUMN of a range: every row or column, where the engine gives the first."""
    piece = pieces[0] if len(pieces) == 1 else None
    if piece is None or not (piece.array or piece.text.startswith(("INDIRECT(", "OFFSET("))):
        return None
    writer.note("row-of-range")
    x = piece.text
    text = f"SEQUENCE(ROWS({x}),1,ROW({x}))" if name == "ROW" else f"SEQUENCE(1,COLUMNS({x}),COLUMN({x}))"
    return Piece(text, True, "whole")


def _n(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """N of a computed array goes cell by cell; of a range it takes the first cell, which is blocked elsewhere."""
    piece = pieces[0] if len(pieces) == 1 else None
    if piece is None or not piece.array or piece.kind == "reference" or re.match(r"OFFSET|IND|CHOOSE", piece.text):
        return None
    return writer.over_cells(name, pieces, "whole" if piece.kind == "logical" else "any")


def _choose(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """CHOOSE({1,2},...) puts ranges side by side."""
    which = re.fullmatch(r"\{(\d+(?:,\d+)*)\}", pieces[0].text) if pieces and pieces[0] else None
    places = [int(number) for number in which[1].split(",")] if which else []
    if not places or not all(1 <= place < len(pieces) for place in places):
        return None
    writer.note("choose-of-several")
    return writer.helper("HSTACK", [pieces[place] for place in places], True)


def _index(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """One number picks a whole row of a table."""
    if len(pieces) != 2 or pieces[0] is None or pieces[1] is None or pieces[1].array:
        return None
    if spans(pieces[0].text) != (True, True):
        return None
    writer.note("index-of-row")
    return Piece(f"INDEX({pieces[0].text},{pieces[1].text},0)", True)


def _indirect(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    if len(pieces) > 1 and (pieces[1] is None or pieces[1].text.upper() not in {"TRUE", "1", "TRUE()"}):
        raise BlockedError("indirect-r1c1", "uses INDIRECT with rows and columns by number (R1C1)")
    return None


def _xlookup(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    if len(pieces) < 5 or pieces[4] is None or pieces[4].text in {"0", "2"}:
        return None
    if pieces[0] is None or pieces[0].array:
        raise BlockedError("range-for-single-value", "gives XLOOKUP a range where it takes a single value")
    writer.note("xlookup-next")
    several = pieces[2] is not None and all(spans(pieces[2].text))
    return writer.helper(name, filled(pieces, "", "", "", "#N/A", "0", "1"), several)


def _approximate(writer: Writer, name: str, pieces: Pieces, mode: int) -> bool:
    """Whether a lookup is for the last key not above the wanted value, with one wanted value."""
    asked = pieces[mode] if len(pieces) > mode else Piece("1")
    if pieces[0] is None or pieces[0].array or asked is None or asked.text.upper() not in {"1", "TRUE", "TRUE()"}:
        return False
    writer.note("keys-out-of-order")
    return True


def _match(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    if len(pieces) not in (2, 3) or not _approximate(writer, name, pieces, 2):
        return None
    return _placed(writer, pieces)


def _placed(writer: Writer, pieces: Pieces) -> Piece:
    """MATCH, and where the engine says #N/A (it refuses keys out of order) the helper."""
    written = writer.plain("MATCH", [*pieces[:2], Piece("1")]).text
    return Piece(f"IFNA({written},{writer.helper('MATCH', pieces[:2]).text})", False, "whole")


def _table_lookup(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    if len(pieces) not in (3, 4) or pieces[2] is None or pieces[2].array:
        return None
    if not _approximate(writer, name, pieces, 3):
        return None
    return Piece(f"IFNA({writer.plain(name, pieces).text},{writer.helper(name, pieces[:3]).text})")


def _lookup(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """LOOKUP in a row or column of cells is INDEX of MATCH; in anything else the helper's."""
    keys = pieces[1] if len(pieces) in (2, 3) else None
    if keys is None or pieces[0] is None or pieces[0].array:
        return None
    if keys.kind != "reference":
        writer.note("lookup-computed")
        return writer.helper(name, pieces)
    writer.note("lookup-blanks")
    results = pieces[2] if len(pieces) == 3 else keys
    if all(spans(keys.text)) or results is None or results.kind != "reference" or all(spans(results.text)):
        return writer.helper(name, pieces)
    return Piece(f"INDEX({results.text},{_placed(writer, pieces).text})")


def _aggregate(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """AGGREGATE by the numbers of its function and option, where both are written as numbers."""
    numbers = [p.text if p is not None and p.kind in {"literal", "zero"} else "" for p in pieces[:2]]
    if len(pieces) < 3 or "" in numbers:
        raise BlockedError("aggregate-form", "uses a form of AGGREGATE that the recalculator's engine does not have")
    if numbers[1] in {"5", "7"} and writer.hiding:
        raise BlockedError("hidden-rows", "leaves hidden rows out, which the recalculator's engine does not see")
    if numbers[1] not in {"4", "5", "6", "7"} or numbers[0] in {"12", "13"}:
        raise BlockedError("aggregate-form", "uses a form of AGGREGATE that the recalculator's engine does not have")
    if int(numbers[0]) < 12:
        return None
    writer.note("aggregate-array")
    option = "6" if numbers[1] in {"6", "7"} else "4"
    several = len(pieces) > 3 and pieces[3] is not None and pieces[3].array
    return writer.helper(name, [pieces[0], Piece(option), *pieces[2:]], several)


def _subtotal(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """1 to 11 leave out what a filter hides, 101 to 111 whatever is hidden; counts pass errors over."""
    number = pieces[0].text if pieces and pieces[0] is not None else ""
    if writer.hiding > (1 if re.fullmatch(r"[1-9]|1[01]", number) else 0):
        raise BlockedError("hidden-rows", "leaves hidden rows out, which the recalculator's engine does not see")
    if number not in {"2", "3", "102", "103"} or any(piece is None for piece in pieces):
        return None
    writer.note("subtotal-of-errors")
    count = writer.plain("COUNT" if number[-1] == "2" else "COUNTA", pieces[1:])
    return Piece(f"IFERROR({writer.plain(name, pieces).text},{count.text})", False, "whole")


def _products(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """SUMPRODUCT of cells, or of whatever may be text or logical: the engine takes these for numbers."""
    doubtful = [p for p in pieces if p is not None and p.kind not in {"number", "whole", "rounded", "literal"}]
    if not doubtful or len(pieces) > sum(piece is not None for piece in pieces):
        return None
    writer.note("product-of-words")
    made = writer.helper(name, pieces)
    if any(piece.kind != "reference" for piece in doubtful):
        return made
    counted = "+".join(f"COUNT({p.text})" for p in doubtful)
    cells = "+".join(f"ROWS({p.text})*COLUMNS({p.text})" for p in doubtful)
    return Piece(f"IF({counted}={cells},{writer.plain(name, pieces).text},{made.text})", False, "number")


def _conditional(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """SUMIFS and its like: an error among the cells that meet the criteria is the answer."""
    _refuse_error_criterion(name, pieces)
    last = name in {"SUMIF", "AVERAGEIF"}
    if any(piece is None for piece in pieces) or len(pieces) < 3:
        return None
    given, pairs = (pieces[2], pieces[:2]) if last else (pieces[0], pieces[1:])
    if given is None or given.kind != "reference" or any(p is not None and p.array for p in pairs[1::2]):
        return None
    writer.note("sum-of-errors")
    found = writer.helper("ERRORIF", [given, *pairs]).text
    return Piece(f"(IF(ISERROR(SUM({given.text})),{found},0)+{writer.plain(name, pieces).text})", False, "number")


def _refuse_error_criterion(name: str, pieces: Pieces) -> None:
    if any(piece is not None and piece.text.startswith('"#') and piece.text[2:3].isupper() for piece in pieces):
        raise BlockedError("error-criterion", f"asks {name} for the cells that hold an error")


def _count_if(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """COUNTIF of an error's name."""
    if name != "COUNTIF" or len(pieces) != 2 or pieces[1] is None or not pieces[1].text.startswith('"#'):
        _refuse_error_criterion(name, pieces)
        return None
    writer.note("count-of-errors")
    return writer.helper("COUNTERROR", pieces, False, "whole")


def _cell(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    if name != "CELL" or _asked(pieces) not in {"row", "col", "contents"}:
        raise BlockedError("cell-info", f"asks {name} for what only the program that shows the workbook knows")
    return None


def _asked(pieces: Pieces) -> str:
    return pieces[0].text.strip('"').lower() if pieces and pieces[0] is not None else ""


def _formula_text(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """The engine writes a formula in its own way, and it gets other formulas than the cells hold."""
    raise BlockedError("formula-text", f"uses {name}, and the recalculator's engine has formulas of its own")


def _numbers_only(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """Text written as an argument is #VALUE! unless it is a number; the engine passes it over."""
    for piece in pieces:
        if piece is not None and piece.kind == "text" and not piece.array and not re.fullmatch(r'"[\d.]+"', piece.text):
            raise BlockedError("text-argument", f"gives {name} a text among its numbers")
    return None


RULES: dict[str, Rule] = {
    **dict.fromkeys(("MMULT", "MINVERSE"), always("array-functions", array=True)),
    "EXPAND": always("array-functions", "", "0", "0", "#N/A", array=True),
    **dict.fromkeys(("WRAPROWS", "WRAPCOLS"), always("array-functions", array=True)),
    "MDETERM": always("array-functions"),
    **dict.fromkeys(("VSTACK", "HSTACK"), always("stack-unequal", array=True)),
    "UNIQUE": always("unique-case", "", "FALSE", "FALSE", array=True),
    "FILTER": always("filter-columns", "", "", '""', array=True),
    "SORT": always("sort-keys", "", "1", "1", "FALSE", array=True),
    "SORTBY": always("sort-keys", "", *("1",) * 252, array=True),
    "CONVERT": always("convert-units"),
    "TYPE": always("type-of-error"),
    "INT": _int,
    **dict.fromkeys(("CEILING", "FLOOR"), _step),
    **dict.fromkeys(("CEILING.MATH", "FLOOR.MATH", "CEILING.PRECISE", "FLOOR.PRECISE", "ISO.CEILING"), _math_step),
    **dict.fromkeys(("GCD", "LCM"), _divisor),
    **dict.fromkeys(("MODE", "MODE.SNGL"), _mode),
    **dict.fromkeys(("IF", "NOT"), _condition),
    **dict.fromkeys(("ROW", "COLUMN"), _position),
    "N": _n,
    "CHOOSE": _choose,
    "INDEX": _index,
    "INDIRECT": _indirect,
    "XLOOKUP": _xlookup,
    "MATCH": _match,
    **dict.fromkeys(("VLOOKUP", "HLOOKUP"), _table_lookup),
    "LOOKUP": _lookup,
    "AGGREGATE": _aggregate,
    "SUBTOTAL": _subtotal,
    "SUMPRODUCT": _products,
    **dict.fromkeys(("SUMIF", "SUMIFS", "AVERAGEIF", "AVERAGEIFS", "MAXIFS", "MINIFS"), _conditional),
    **dict.fromkeys(("COUNTIF", "COUNTIFS"), _count_if),
    **dict.fromkeys(("CELL", "INFO", "SHEET", "SHEETS"), _cell),
    **dict.fromkeys(("FORMULATEXT", "ISFORMULA"), _formula_text),
    **dict.fromkeys(
        ("AVERAGE", "MAX", "MIN", "PRODUCT", "STDEV", "STDEV.S", "STDEVP", "STDEV.P", "VAR", "VAR.S", "MEDIAN"),
        _numbers_only,
    ),
}
