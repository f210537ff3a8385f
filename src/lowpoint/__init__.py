"""Lowpoint: cavitation index, sizing and limits of control valves and orifices, in worksheet cells and without."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

__version__ = "0.1.0"
__all__ = ["__version__", "functions"]

if TYPE_CHECKING:
    from lowpoint.registry import functions


def __getattr__(name: str) -> Any:
    # The registry imports NumPy; `lowpoint --version` must not wait for that.
    if name == "functions":
        from lowpoint.registry import functions

        return functions
    raise AttributeError(f"module 'lowpoint' has no attribute {name!r}")
