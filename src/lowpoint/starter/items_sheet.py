"""The sheet Items: one row an item, judged by the worst of its cases."""

from __future__ import annotations

from typing import Any

from openpyxl.comments import Comment

from lowpoint.starter.frame import FIRST, HEADINGS, ITEMS_LAST, Head, name_column, put_table
from lowpoint.starter.notes import AUTHOR, unit_label
from lowpoint.starter.plant import Plant
from lowpoint.styling import style

__all__ = ["KEYS", "write"]

_MATCHED = "INDEX(List_{0},MATCH({order},List_rank,0))"
_FIRST_ROW = "=INDEX(List_{0},MATCH({tag},List_tag,0))"


def _worst(key: str) -> str:
    """What the list says in the item's worst case; no answer where no case has one."""
    return '=IF({order}="",NA(),' + _MATCHED.replace("{0}", key) + ")"


# An item is called good only when all its cases have an answer; what is known to be bad is said at once.
_STATE = (
    '=IF({order}="","no answer",IF(AND({open}>0,OR(' + ",".join(
        _MATCHED.replace("{0}", "regime") + f'="{word}"' for word in ("incipient", "unjudged", "clear")
    ) + ')),"incomplete",' + _MATCHED.replace("{0}", "regime") + "))"
)  # fmt: skip


def _first(key: str) -> str:
    return _FIRST_ROW.replace("{0}", key)


_COLUMNS: tuple[tuple[str, str, str, str, float, str], ...] = (
    # key, heading, dimension, format, width, formula; notes below
    ("tag", "Tag", "", "tag", 13, ""),
    ("area", "Area", "", "text", 20, _first("area")),
    ("service", "Service", "", "text", 32, _first("service")),
    ("fluid", "Liquid", "", "text", 21, _first("fluid")),
    ("size", "Valve size d", "size", "size", 8, _first("valve_size")),
    ("cases", "Cases", "", "whole", 7, "=COUNTIF(List_tag,{tag})"),
    ("open", "Cases without an answer", "", "whole", 10, '=COUNTIFS(List_tag,{tag},List_errors,">0")'),
    ("crossed", "Cases below the limit to keep", "", "whole", 11, '=COUNTIFS(List_tag,{tag},List_kept,"no")'),
    ("verdict", "Verdict, worst case", "", "verdict", 32,
     '=IF({order}="","no answer",IF({regime}="incomplete","incomplete: "&{open}&" of "&{cases}&" without an answer",'
     + _MATCHED.replace("{0}", "verdict") + '&IF({open}>0,", others without an answer","")))'),
    ("worst", "Worst case", "", "text", 10, _worst("case")),
    ("margin", "Margin", "ratio", "percent", 9, _worst("margin")),
    ("sigma", "Index sigma", "ratio", "index", 9, _worst("sigma")),
    ("keep", "Limit to keep", "", "text", 11, _worst("keep")),
    ("limit", "Its value", "ratio", "index", 9, _worst("limit")),
    ("drop", "Drop p1-p2", "pressure", "pressure", 9, _worst("drop")),
    ("allowed", "Largest drop that keeps it", "pressure", "pressure", 11, _worst("allowed_drop")),
    ("regime", "State of the flow (working)", "", "text", 12, _STATE),
    ("order", "Order (working)", "", "working", 10,
     '=IF(COUNTIFS(List_tag,{tag},List_rank,"<1E+99")=0,"",_xlfn.MINIFS(List_rank,List_tag,{tag}))'),
)  # fmt: skip
KEYS = tuple(column[0] for column in _COLUMNS)
_NOTES = {
    "tag": "Type the tag of every item of sheet List once; copy the formulas of a row for a new one.",
    "open": "Cases with an error in a computed cell; sheet List says why, row by row.",
    "verdict": "The verdict of the case with the least margin to the limit that the item must keep, and the basis of "
    "that verdict. incomplete: what has an answer is good, but another case has none. no answer: no case has one.",
    "worst": "The case with the least margin.",
    "margin": "Index over the limit to keep, less one; at or below 0 it is crossed.",
    "order": "The least margin of the item, with a trace of its row number; empty where there is none.",
}


def write(book: Any, plant: Plant) -> None:
    """Add the sheet; the names of sheet List must be there when it is computed."""
    sheet = book.create_sheet("Items")
    style.title(sheet, f"{plant.name}: items by their worst case", "Each item is judged by the case with the least "
                "margin to the limit that it must keep. One row an item: to be issued.")  # fmt: skip
    heads = [Head(f"{text}\n{unit_label(d, plant.system)}" if unit_label(d, plant.system) else text, width, fmt)
             for _, text, d, fmt, width, _ in _COLUMNS]  # fmt: skip
    letters = {key: sheet.cell(1, place).column_letter for place, key in enumerate(KEYS, start=1)}
    rows = []
    for row, item in enumerate(plant.items, start=FIRST):
        places = {key: f"${letter}{row}" for key, letter in letters.items()}
        rows.append([formula.format_map(places) if formula else item.tag for *_, formula in _COLUMNS])
    formats = style.FORMATS[plant.system] | {"text": "General"}
    last = put_table(sheet, HEADINGS, heads, rows, formats, typed=(0,)) - 1
    sheet.row_dimensions[HEADINGS].height = 52
    for place, key in enumerate(KEYS, start=1):
        name_column(book, f"Items_{key}", "Items", place, ITEMS_LAST)
        if key in _NOTES:
            text = _NOTES[key]
            sheet.cell(HEADINGS, place).comment = Comment(
                text, AUTHOR, width=320, height=30 + 17 * (len(text) // 45 + 1)
            )
    _mark(sheet, letters, last)
    sheet.freeze_panes = f"B{FIRST}"
    sheet.auto_filter.ref = f"A{HEADINGS}:{letters['order']}{last}"
    sheet.print_area = f"A{HEADINGS}:{letters['allowed']}{last}"
    style.print_setup(sheet, rows=f"{HEADINGS}:{HEADINGS}", paper=8 if plant.system == "metric" else 3)


def _mark(sheet: Any, letters: dict[str, str], last: int) -> None:
    def cells(key: str, to: str | None = None) -> tuple[str, str]:
        first = f"{letters[key]}{FIRST}"
        return f"{first}:{letters[to or key]}{last}", first

    style.mark_verdicts(sheet, *cells("verdict"))
    style.mark_errors(sheet, *cells("tag", "order"))
    for key in ("open", "crossed"):
        area, first = cells(key)
        sheet.conditional_formatting.add(area, style.rule(f"{first}>0", ink="bad", bold=True))
    area, first = cells("margin")
    sheet.conditional_formatting.add(area, style.rule(f"AND(ISNUMBER({first}),{first}<=0)", ink="bad", bold=True))
