"""What the add-in asks xlwings for. Nothing is written here: xlwings loads a module anew whose file has changed.

A package that is renewed under a running Excel so keeps the functions it began with, and its own add-in.
"""

from __future__ import annotations

from lowpoint.faces.excel_addin.serving import udfs

globals().update(udfs())
