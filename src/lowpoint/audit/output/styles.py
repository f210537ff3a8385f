"""The look of added sheets in a vendor's book: their styles behind the vendor's own, whose numbers stay."""

from __future__ import annotations

import re
from xml.etree.ElementTree import Element

from lowpoint.audit.output.marks import Edits, Mark, UnfitError, marks, with_prefix
from lowpoint.book.parts import local_name, parse

__all__ = ["grafted", "restyled"]

FIRST_FORMAT = 164
"""Number formats below are built in."""
_LISTS = (("fonts", "fontId"), ("fills", "fillId"), ("borders", "borderId"))
_STYLED = re.compile(rb"""(<(?:c|row|col)\b[^>]*?\s(?:s|style)=")(\d+)(?=")""")


def grafted(vendor: bytes, own: bytes) -> tuple[bytes, int]:
    """The vendor's part with our styles behind his, and by how much the numbers of ours grow; UnfitError where his
    lacks what every style refers to."""
    root, ours = marks(vendor, 2), parse(own, "styles")
    edits = Edits(vendor)
    shift = {attribute: _appended(edits, root, ours, name) for name, attribute in _LISTS}
    formats = _formats(edits, root, ours)
    home = _list(root, "cellXfs")
    grown = [_shifted(item, shift, formats) for item in _items(ours, "cellXfs")]
    _put(edits, home, [with_prefix(item, root.prefix) for item in grown])
    return edits.done(), len(home.children)


def restyled(sheet: bytes, by: int) -> bytes:
    """The part of a sheet with the numbers of its styles raised."""
    return _STYLED.sub(lambda found: found[1] + str(int(found[2]) + by).encode(), sheet)


def _list(root: Mark, name: str) -> Mark:
    found = root.child(name)
    if found is None:
        raise UnfitError(f"its styles have no {name}")
    return found


def _items(root: Element, name: str) -> list[Element]:
    return [item for group in root if local_name(group.tag) == name for item in group]


def _appended(edits: Edits, root: Mark, ours: Element, name: str) -> int:
    home = _list(root, name)
    _put(edits, home, [with_prefix(item, root.prefix) for item in _items(ours, name)])
    return len(home.children)


def _put(edits: Edits, home: Mark, texts: list[str]) -> None:
    edits.append(home, "".join(texts))
    edits.attribute(home, "count", str(len(home.children) + len(texts)))


def _formats(edits: Edits, root: Mark, ours: Element) -> dict[str, str]:
    """Our number formats under free numbers: from the number in our part to that in the vendor's."""
    items = _items(ours, "numFmts")
    home = root.child("numFmts")
    used = [int(item.attributes.get("numFmtId", "0")) for item in home.children] if home else []
    first = max([FIRST_FORMAT - 1, *used]) + 1
    numbers = {item.get("numFmtId", ""): str(first + step) for step, item in enumerate(items)}
    texts = []
    for item in items:
        item.set("numFmtId", numbers[item.get("numFmtId", "")])
        texts.append(with_prefix(item, root.prefix))
    if home is not None:
        _put(edits, home, texts)
    elif texts:
        name = f"{root.prefix}numFmts"
        edits.insert(root.inner, f'<{name} count="{len(texts)}">{"".join(texts)}</{name}>')
    return numbers


def _shifted(style: Element, shift: dict[str, int], formats: dict[str, str]) -> Element:
    for attribute, by in shift.items():
        style.set(attribute, str(int(style.get(attribute, "0")) + by))
    style.set("numFmtId", formats.get(style.get("numFmtId", "0"), style.get("numFmtId", "0")))
    style.set("xfId", "0")
    for applied in ("applyFont", "applyFill", "applyBorder", "applyNumberFormat"):
        style.set(applied, "1")
    return style
