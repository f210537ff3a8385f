"""What the tests of LP_WHY share: a case is a function, its arguments, the error it gives or None, and the words."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from lowpoint import functions
from lowpoint.cells import OMITTED, CellError, call, reason
from lowpoint.declare import declarations

__all__ = ["Case", "arguments", "check", "untold"]

Case = tuple[str, dict[str, Any], CellError | None, str]


def arguments(name: str, given: dict[str, Any]) -> list[Any]:
    """The arguments of a cell, those that are not named omitted."""
    unknown = set(given) - {p.name for p in functions[name].parameters}
    assert not unknown, unknown
    return [given.get(p.name, OMITTED) for p in functions[name].parameters]


def check(case: Case) -> None:
    """The sentence comes with its case: the whole reason of an error, or one of the cautions of an answer."""
    bare, given, error, said = case
    name = f"LP_{bare}"
    args = arguments(name, given)
    words, answer = reason(name, args), call(name, args)
    assert said in words
    if error is None:
        assert not isinstance(answer, CellError), words
        [caution] = [c for c in declarations[bare].cautions if said in c.text]
        assert f"{caution.label}: {caution.text}" in words
    else:
        assert answer is error, words
        assert words.startswith(f"{name}: ")
        assert words.endswith(".")


def untold(cases: Sequence[Case], modules: Sequence[str]) -> list[tuple[str, str]]:
    """Sentences of the functions of these modules that no case reaches."""
    missing = []
    for bare, declaration in declarations.items():
        if declaration.kernel.__module__.rpartition(".")[2] in modules:
            told = [said for name, _, _, said in cases if name == bare]
            texts = [x.text for x in (*declaration.no_answer, *declaration.cautions)]
            missing += [(bare, text) for text in texts if not any(said in text for said in told)]
    return missing
