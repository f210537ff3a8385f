"""A working as lines of text for a terminal or a note, and as Markdown."""

from __future__ import annotations

import re
import textwrap
from collections.abc import Iterator, Sequence

from lowpoint.survey.outcome import Step, Working

__all__ = ["WIDTH", "markdown", "text_lines"]

WIDTH = 100
"""Columns of a line of text."""
_LONGEST = 18
"""Columns of a symbol; a longer one pushes its line to the right."""
_VALUE = 16
HOW_TO_READ = (
    "Pressures are absolute unless they say gauge. Every step is worked out from the numbers as printed, with {} "
    "significant figures; ^ is a power, ln the natural logarithm."
)


def text_lines(working: Working, width: int = WIDTH) -> Iterator[str]:
    """The working within ``width`` columns: symbol, value, meaning and source, then the equation, twice."""
    yield from _wrapped(working.title, "", width)
    yield "=" * min(width, len(working.title))
    yield f"Verdict: {working.verdict}"
    if working.errors:
        yield "No verdict, because:"
        for error in working.errors:
            yield from _wrapped(error, "  - ", width)
    yield ""
    yield from _wrapped(HOW_TO_READ.format(working.figures), "", width)
    column = 2 + min(_LONGEST, max((len(step.symbol) for step in working.steps()), default=0)) + 2
    for title, steps in working.sections:
        yield ""
        yield title
        yield "-" * len(title)
        for step in steps:
            yield from _step(step, column, width)
    yield from _list("Cautions", working.cautions, width)
    yield from _list("Sources", [f"{key}: {citation}" for key, citation in working.citations], width)


def value_of(step: Step) -> str:
    """Value and unit, and the same in US units where these were asked for."""
    other = f" = {step.also}" if step.also else ""
    return f"{step.value} {step.unit}".rstrip() + other


def _step(step: Step, column: int, width: int) -> Iterator[str]:
    head = f"  {step.symbol:<{column - 3}} {value_of(step):<{_VALUE}}  {step.meaning}"
    under = " " * column
    source = f"[{step.source}]"
    if len(head) + len(source) + 2 <= width:
        yield f"{head}  {source}"
    else:
        yield from _wrapped(head, "", width, under)
        if not step.equation:
            yield from _wrapped(source, under, width)
    for line, text in enumerate((step.equation, step.numbers)):
        # A symbol that only takes over another one needs no second line with that number.
        if text and not (line == 1 and text == step.value):
            yield from _parted(text, under, width)
    if step.equation and len(head) + len(source) + 2 > width:
        yield from _wrapped(source, under, width)
    if step.note:
        yield from _wrapped(f"({step.note})", under, width)


def _parted(expression: str, under: str, width: int) -> Iterator[str]:
    """An expression in lines that part behind a blank, a comma or a sign, never inside a number or a symbol."""
    line = f"{under}= "
    for piece in re.split(r"(?<=[ ,*/])", expression):
        if len(line) + len(piece.rstrip()) > width and line.strip() != "=":
            yield line.rstrip()
            line = f"{under}  "
        line += piece
    yield line


def _wrapped(text: str, first: str, width: int, then: str | None = None) -> list[str]:
    """Lines of a text."""
    following = " " * len(first) if then is None else then
    return textwrap.wrap(text, width, initial_indent=first, subsequent_indent=following, break_long_words=False,
                         break_on_hyphens=False, drop_whitespace=True, replace_whitespace=False) or [""]  # fmt: skip


def _list(title: str, texts: Sequence[str], width: int) -> Iterator[str]:
    if texts:
        yield ""
        yield title
        yield "-" * len(title)
        for text in texts:
            yield from _wrapped(text, "  - ", width)


def markdown(working: Working) -> Iterator[str]:
    """The working as Markdown: a table a section."""
    yield f"# {_plain(working.title)}"
    yield ""
    yield f"**Verdict:** {_plain(working.verdict)}"
    if working.errors:
        yield ""
        yield "No verdict, because:"
        yield ""
        yield from (f"- {_plain(error)}" for error in working.errors)
    yield ""
    yield HOW_TO_READ.format(working.figures)
    for title, steps in working.sections:
        yield ""
        yield f"## {_plain(title)}"
        yield ""
        yield "| symbol | meaning | working | value | source |"
        yield "|---|---|---|---|---|"
        yield from map(_table_row, steps)
    for title, texts in (("Cautions", working.cautions), ("Sources", [f"{k}: {c}" for k, c in working.citations])):
        if texts:
            yield ""
            yield f"## {title}"
            yield ""
            yield from (f"- {_plain(text)}" for text in texts)


def _table_row(step: Step) -> str:
    shown = [text for text in (step.equation, step.numbers) if text]
    how = "<br>".join(f"`{text}`" for text in dict.fromkeys(shown))
    note = f" ({_plain(step.note)})" if step.note else ""
    return (f"| `{step.symbol}` | {_plain(step.meaning)}{note} | {how} | {_plain(value_of(step))} | "
            f"{_plain(step.source)} |")  # fmt: skip


def _plain(text: str) -> str:
    """A text that Markdown shows as it stands."""
    for sign in "\\`*_|<>#":
        text = text.replace(sign, f"\\{sign}")
    return " ".join(text.split())
