"""The VBA of the add-in, from the registry: one function each, and the texts of the function wizard."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path

from lowpoint.declare import GROUPS
from lowpoint.faces.excel_addin.core import CORE, OPENING, link
from lowpoint.faces.excel_addin.outline import Outline, maker, outlines
from lowpoint.faces.excel_addin.serving import category
from lowpoint.faces.excel_addin.wants import TESTED

__all__ = ["OPENING", "modules", "write_sources"]

_WIDTH = 900
"""Characters of a line; VBA takes 1023, and 24 continuations of a line."""
_CONTINUED = 20


def modules(python: str, xlwings: str) -> Mapping[str, str]:
    """The standard modules by name, as the text of an editor shows them."""
    found = {"LowpointCore": CORE, "LowpointLink": link(python, xlwings, maker())}
    groups = [group for group in GROUPS if _members(group)]
    found["LowpointTexts"] = _all_texts(groups)
    for group in groups:
        found[_module_name(group)] = _functions(_members(group))
        found[_module_name(group) + "Texts"] = _texts(group, _members(group))
    return found


def write_sources(folder: Path) -> list[Path]:
    """Write the text of every module into ``folder``, for reading and for the test that says when it is stale."""
    folder.mkdir(parents=True, exist_ok=True)
    texts = dict(modules("C:\\path\\to\\python.exe", TESTED)) | {"ThisWorkbook": OPENING}
    written = []
    for name, text in texts.items():
        path = folder / f"{name}.bas"
        path.write_text(text, encoding="ascii", newline="\n")
        written.append(path)
    return written


def _members(group: str) -> list[Outline]:
    return [outline for outline in outlines() if outline.group == group]


def _module_name(group: str) -> str:
    return "Lowpoint" + "".join(word.capitalize() for word in group.split() if word != "and")


# --- functions --------------------------------------------------------------------------------------------------


def _functions(members: Sequence[Outline]) -> str:
    return "Option Explicit\n" + "".join("\n" + _function(one) for one in members)


def _function(outline: Outline) -> str:
    if any(one.rest for one in outline.arguments):
        return _variadic(outline)
    names = [one.name for one in outline.arguments]
    head = _wrapped(f"Public Function {outline.name}(", [f"Optional {name}" for name in names], ")")
    body = _wrapped(f"    {outline.name} = LpCell(", [f'"{outline.name}"', *names], ")")
    return f"{head}\n{body}\nEnd Function\n"


def _variadic(outline: Outline) -> str:
    about, rest = (one.name for one in outline.arguments)
    return (
        f"Public Function {outline.name}({about}, ParamArray {rest}() As Variant)\n"
        "    Dim given As Variant\n"
        f"    given = {rest}\n"
        f"    {outline.name} = LpWhy({about}, given)\n"
        "End Function\n"
    )


# --- texts ------------------------------------------------------------------------------------------------------


def _all_texts(groups: Iterable[str]) -> str:
    calls = "".join(f"    {_module_name(group)}Tell\n" for group in groups)
    return f"Option Explicit\nOption Private Module\n\nPublic Sub LpDescribeAll()\n{calls}End Sub\n"


def _texts(group: str, members: Sequence[Outline]) -> str:
    calls = "".join(_told(one) + "\n" for one in members)
    return f"Option Explicit\nOption Private Module\n\nPublic Sub {_module_name(group)}Tell()\n{calls}End Sub\n"


def _told(outline: Outline) -> str:
    help_ = [_quoted(one.text) for one in outline.arguments]
    start = ", ".join(_quoted(text) for text in (outline.name, outline.text, category(outline)))
    return _wrapped(f"    LpTell {start}, Array(", help_, ")")


def _quoted(text: str) -> str:
    if not (text.isascii() and text.isprintable()):
        raise ValueError(f"VBA takes plain signs only: {text}")
    return '"' + text.replace('"', '""') + '"'


def _wrapped(start: str, items: Sequence[str], end: str) -> str:
    """A list over as many lines as it needs, each as long as it may be."""
    lines = [start]
    for place, item in enumerate(items):
        piece = item + (", " if place + 1 < len(items) else end)
        if len(lines[-1]) + len(piece) > _WIDTH:
            lines[-1] = lines[-1].rstrip() + " _"
            lines.append("        ")
        lines[-1] += piece
    if not items:
        lines[-1] += end
    if len(lines) > _CONTINUED or max(map(len, lines)) > 1023:
        raise ValueError(f"too long for VBA: {start}")
    return "\n".join(lines)
