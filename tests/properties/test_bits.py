"""One row gives the same bits alone, among others, and with some arguments common to all rows."""

from __future__ import annotations

import numpy as np
import pytest

from lowpoint import functions
from lowpoint.quantities import Quantity, Word
from registry_cases import example

MODULES = ("fittings", "sizing", "nonturbulent", "travel", "indices", "limits", "regime")
ROWS = 61
NAMES = [
    name for name, function in functions.items()
    if not function.variadic and function.declaration.kernel.__module__.rpartition(".")[2] in MODULES
]  # fmt: skip


def _bits(x: object) -> object:
    return x if x is None or isinstance(x, str) else np.float64(x).tobytes() if not np.isnan(x) else "NaN"


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("seed", range(3))
def test_bits(name: str, seed: int) -> None:
    function = functions[name]
    rng = np.random.default_rng(seed)
    given = dict(zip((p.name for p in function.parameters), example(name), strict=True))
    first = next(p for p in function.parameters if isinstance(p.kind, Quantity))
    for parameter in function.parameters:
        value = given[parameter.name]
        # With the first seed every argument changes from row to row, then some are common to all rows.
        if parameter.is_table or (seed and parameter is not first and rng.random() < 0.4):
            continue
        if isinstance(parameter.kind, Quantity):
            column = value * rng.uniform(0.7, 1.4, ROWS)
            if not parameter.required and seed == 2:
                column[rng.random(ROWS) < 0.3] = np.nan
        elif isinstance(parameter.kind, Word):
            column = rng.choice(parameter.kind.words, ROWS)
        else:
            continue
        given[parameter.name] = column
    together = function(**given)
    for row in range(ROWS):
        one = {k: (v[row].item() if isinstance(v, np.ndarray) and v.shape == (ROWS,) else v) for k, v in given.items()}
        one = {k: None if isinstance(v, float) and np.isnan(v) else v for k, v in one.items()}
        assert _bits(function(**one)) == _bits(together[row]), (row, one)
