"""A process that works on one book after the other holds none of those that are done."""

from __future__ import annotations

import gc
import weakref
from pathlib import Path
from typing import Any

import pytest

from fleet.helping import book
from lowpoint.book.engine import Engine
from lowpoint.book.recalc import recalculate


def test_no_book_stays_in_the_engine_after_its_recalculation(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Its call-backs are kept where no collector of garbage looks: one that held the engine would hold it for good."""
    made: list[weakref.ref[Engine]] = []
    begin = Engine.__init__

    def noted(engine: Engine, *given: Any, **more: Any) -> None:
        begin(engine, *given, **more)
        made.append(weakref.ref(engine))

    monkeypatch.setattr(Engine, "__init__", noted)
    source = book(tmp_path / "a.xlsx", rows=20)
    assert recalculate(source, per_cell=True).exit_code == 0
    assert recalculate(source).exit_code == 0
    gc.collect()
    assert len(made) >= 2
    assert [engine() for engine in made if engine() is not None] == []
