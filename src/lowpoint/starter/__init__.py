"""The books to begin with: a valve list with LP_ formulas, metric or US, filled with the plant of Kestrel Bay."""

from __future__ import annotations

import os
from pathlib import Path

from lowpoint.starter.plant import Plant

__all__ = ["sample", "sheet_bytes", "write_sheet"]


def sample(*, us: bool = False) -> Plant:
    """The plant that fills the book: Kestrel Bay, or its north shore in US customary units."""
    if us:
        from lowpoint.starter.kestrel_us import PLANT
    else:
        from lowpoint.starter.kestrel import PLANT
    return PLANT


def sheet_bytes(*, us: bool = False) -> bytes:
    """The book as bytes, the same on every run; its formulas hold no values yet (``lowpoint recalc`` puts them in)."""
    from lowpoint.starter.assemble import assembled
    from lowpoint.styling.packing import packed

    return packed(assembled(sample(us=us)))


def write_sheet(out: str | os.PathLike[str], *, us: bool = False) -> None:
    """Write the book to a path, in US customary units if asked; an existing file is overwritten.

    >>> write_sheet("valves.xlsx")  # doctest: +SKIP
    """
    from lowpoint.book.saving import replace_file

    replace_file(Path(out), lambda sink: sink.write(sheet_bytes(us=us)))
