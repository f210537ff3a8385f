"""The examples in the documentation of the design package work as they are printed."""

from __future__ import annotations

import doctest
import importlib
import pkgutil

import pytest

import lowpoint.design

MODULES = sorted(f"lowpoint.design.{m.name}" for m in pkgutil.iter_modules(lowpoint.design.__path__))


@pytest.mark.parametrize("name", MODULES)
def test_examples(name: str) -> None:
    assert doctest.testmod(importlib.import_module(name)).failed == 0


def test_there_are_examples() -> None:
    """Of one plate, a set, and a valve with a plate."""
    finder = doctest.DocTestFinder()
    for name in ("plate", "plate_set", "series"):
        module = importlib.import_module(f"lowpoint.design.{name}")
        assert sum(len(test.examples) for test in finder.find(module)) >= 4
