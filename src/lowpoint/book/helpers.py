"""Worksheet functions that the engine lacks or gets wrong, as call-backs: cells in, cells out, ranges as rows.

Meanings follow OASIS ODF 1.3 part 4 (OpenFormula) and, for the functions that it does not have, the function
reference of the program that brought them; where both are silent, common practice. The modules named here enter
their functions in :data:`HELPERS` when they are imported.
"""

from __future__ import annotations

from . import helpers_array, helpers_lookup, helpers_number, helpers_text
from .helping import HELPERS, PREFIX, broadcast

__all__ = ["HELPERS", "PREFIX", "broadcast", "helpers_array", "helpers_lookup", "helpers_number", "helpers_text"]
