"""The collector of garbage is as it was before, whatever happens meanwhile."""

from __future__ import annotations

import gc
from pathlib import Path

import pytest

from lowpoint.book.garbage import uncollected
from lowpoint.book.recalc import recalculate
from lowpoint.errors import BookError


def test_nothing_is_collected_meanwhile_and_everything_as_before_afterwards() -> None:
    assert gc.isenabled()
    with uncollected():
        assert not gc.isenabled()
        with uncollected():
            assert not gc.isenabled()
        assert not gc.isenabled()
    assert gc.isenabled()


def test_a_collector_that_was_off_stays_off() -> None:
    gc.disable()
    try:
        with uncollected():
            pass
        assert not gc.isenabled()
    finally:
        gc.enable()


def test_a_workbook_that_cannot_be_read_leaves_it_on(tmp_path: Path) -> None:
    (tmp_path / "list.xlsx").write_bytes(b"no workbook")
    with pytest.raises(BookError):
        recalculate(tmp_path / "list.xlsx")
    assert gc.isenabled()
