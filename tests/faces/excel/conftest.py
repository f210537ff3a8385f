"""The built add-in, and Excel as far as the tests need it: real xlwings over stand-ins, VBA run by pyOpenVBA."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

PYTHON = "C:\\env\\Scripts\\python.exe"


@pytest.fixture(scope="session")
def addin(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The add-in, built as a user builds it."""
    pytest.importorskip("xlwings", reason="xlwings is not installed (the extra 'excel')")
    pytest.importorskip("pyopenvba", reason="pyOpenVBA is not installed (the extra 'excel')")
    from lowpoint.faces import cli

    path = tmp_path_factory.mktemp("excel") / "lowpoint.xlam"
    assert cli.main(["excel", "build", str(path), "--python", PYTHON]) == 0
    return path


@pytest.fixture(scope="session")
def excel(addin: Path) -> Any:
    """One Excel for all that does not break it."""
    from faces.excel.office import Excel

    return Excel(addin)


@pytest.fixture
def new_excel(addin: Path) -> Callable[[], Any]:
    """Makes an Excel for a test that breaks something in it."""
    from faces.excel.office import Excel

    return lambda: Excel(addin)
