"""A wrong declaration fails at import, with a sentence that says what is wrong; modules keep their direction."""

from __future__ import annotations

import ast
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import Annotated, Any

import pytest

import lowpoint
from lowpoint import declare
from lowpoint import quantities as q
from lowpoint.declare import Caution, Must, SameAs, declarations, function
from lowpoint.errors import DeclarationError

PACKAGE = Path(lowpoint.__file__).parent


@pytest.fixture(autouse=True)
def _untouched_registry() -> Iterator[None]:
    before = dict(declarations)
    yield
    declarations.clear()
    declarations.update(before)


def _declare(name: str = "TRIAL", **changes: Any) -> Any:
    options: dict[str, Any] = {"group": "valves", "gives": "a trial", "source_key": "definition", **changes}
    return function(name, **options)


def good(p1: q.P1, p2: q.P2) -> q.Ratio:
    """A kernel that is declared well."""
    return p1 / p2


def test_a_good_declaration_returns_the_kernel_itself() -> None:
    assert _declare()(good) is good
    assert declarations["TRIAL"].kernel is good


@pytest.mark.parametrize("name", ["trial", "TRIAL1", "_TRIAL", "TR-IAL", "T", ""])
def test_bad_names(name: str) -> None:
    with pytest.raises(DeclarationError, match="upper-case words"):
        _declare(name)(good)


def test_clash() -> None:
    _declare()(good)
    with pytest.raises(DeclarationError, match="declared once"):
        _declare()(good)


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"source_key": "a book I once saw"}, "must be one of"),
        ({"group": "miscellaneous"}, "must have a group"),
        ({"basis": "guessed"}, "must have a group"),
        ({"gives": ""}, "must say what it gives"),
        ({"needs": {"p1": ("pv",)}}, "in needs only its own arguments"),
        ({"must": (Must("p2", "pc", "x"),)}, "in must only its own arguments"),
        ({"cautions": (Caution("x", lambda fl: fl > 1),)}, "in its cautions only its own arguments"),
        ({"resolve": {"fluid": str}}, "in resolve only its own arguments"),
    ],
)
def test_bad_parts(changes: dict[str, Any], words: str) -> None:
    with pytest.raises(DeclarationError, match=words):
        _declare(**changes)(good)


def test_an_argument_without_a_quantity() -> None:
    def kernel(p1: float) -> q.Ratio:
        """Bare."""
        return p1  # type: ignore[return-value]

    with pytest.raises(DeclarationError, match="p1 must be annotated"):
        _declare()(kernel)


def test_a_result_without_a_quantity() -> None:
    def kernel(p1: q.P1):  # type: ignore[no-untyped-def]
        """Bare."""
        return p1

    with pytest.raises(DeclarationError, match="the result must be annotated"):
        _declare()(kernel)


def test_a_quantity_without_a_unit() -> None:
    def kernel(p1: Annotated[q.Floats, q.Quantity("p1", "a pressure", "no such dimension")]) -> q.Ratio:
        """Unitless."""
        return p1

    with pytest.raises(DeclarationError, match="must have a unit"):
        _declare()(kernel)


def test_one_name_for_one_symbol() -> None:
    def kernel(inlet: q.P1) -> q.Ratio:
        """Renamed."""
        return inlet

    with pytest.raises(DeclarationError, match="one name for one symbol"):
        _declare()(kernel)


def test_required_after_optional() -> None:
    def kernel(p1: q.P1 = None, *, p2: q.P2) -> q.Ratio:  # type: ignore[assignment]
        """Order."""
        return p1 / p2

    with pytest.raises(DeclarationError, match="required arguments first"):
        _declare()(kernel)


def test_a_word_with_an_unknown_default() -> None:
    def kernel(p1: q.P1, form: q.Form = "sideways") -> q.Ratio:
        """Default."""
        return p1

    with pytest.raises(DeclarationError, match="must default to one of"):
        _declare()(kernel)


def test_a_default_that_names_a_stranger() -> None:
    stranger = SameAs("pv")

    def kernel(p1: q.P1, p2: q.P2 = stranger) -> q.Ratio:  # type: ignore[assignment]
        """Default."""
        return p1 / p2

    with pytest.raises(DeclarationError, match="in its defaults only its own arguments"):
        _declare()(kernel)


def test_no_docstring() -> None:
    def kernel(p1: q.P1) -> q.Ratio:
        return p1

    with pytest.raises(DeclarationError, match="docstring"):
        _declare()(kernel)


# --- direction of imports -------------------------------------------------------------------------------------------

LAYERS = ["errors", "sources", "units", "kinds", "quantities", "declare", "problems", "physics", "design", "columns",
          "messages", "rows", "checked", "scalar", "registry", "cells", "reference", "book", "styling", "survey",
          "audit", "starter", "fleet", "faces"]  # fmt: skip
"""From the bottom up: a module may import only what stands before it, or its own package."""
BOOKS = ("book", "styling", "survey", "audit", "starter")
LAZY = {"openpyxl", "lxml", "formualizer", "CoolProp", "pint", "fluids", "xlwings", "pyopenvba", "jinja2",
        "distributed", "dask", "watchfiles", "filelock", "tqdm"}  # fmt: skip
"""Never imported by a module's first lines, so that start-up pays for none; books may import what reads books."""


def _imports(tree: ast.Module, top_only: bool) -> Iterator[str]:
    typing_only = {
        id(inner) for node in ast.walk(tree) if isinstance(node, ast.If) and ast.unparse(node.test) == "TYPE_CHECKING"
        for inner in ast.walk(node)
    }  # fmt: skip
    nodes = tree.body if top_only else list(ast.walk(tree))
    for node in nodes:
        if id(node) in typing_only:
            continue
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom) and node.module:
            yield from ([f"{node.module}.{a.name}" for a in node.names] if node.module == "lowpoint" else [node.module])


@pytest.mark.parametrize("path", sorted(PACKAGE.rglob("*.py")), ids=lambda p: str(p.relative_to(PACKAGE)))
def test_direction(path: Path) -> None:
    parts = path.relative_to(PACKAGE).with_suffix("").parts
    if parts[0] in ("__init__", "__main__"):
        return
    mine = LAYERS.index(parts[0])
    tree = ast.parse(path.read_text(encoding="utf-8"))
    for module in _imports(tree, top_only=False):
        if module.startswith("lowpoint."):
            other = module.split(".")[1]
            assert other == "__version__" or LAYERS.index(other) <= mine, f"{path.name} imports {module}"
    lazy = LAZY - {"openpyxl", "lxml", "formualizer"} if parts[0] in BOOKS else LAZY
    for module in _imports(tree, top_only=True):
        assert module.split(".")[0] not in lazy, f"{path.name} imports {module} at its top"


def test_start_up_is_light() -> None:
    """``lowpoint --version`` imports no NumPy, no spreadsheet library, no property library."""
    code = (
        "import sys; from lowpoint.faces.cli import main; main(['--version']); "
        f"heavy = sorted(({LAZY!r} | {{'numpy'}}) & set(sys.modules)); print(heavy); sys.exit(bool(heavy))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout


def test_a_sizing_call_imports_no_property_library() -> None:
    code = (
        "import sys, lowpoint; lowpoint.functions['LP_SIGMA'](10, 5, 1); "
        f"heavy = sorted({LAZY!r} & set(sys.modules)); print(heavy); sys.exit(bool(heavy))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout


def test_only_the_engine_imports_formualizer() -> None:
    users = {
        path.relative_to(PACKAGE).as_posix()
        for path in PACKAGE.rglob("*.py")
        if any(m.split(".")[0] == "formualizer" for m in _imports(ast.parse(path.read_text(encoding="utf-8")), False))
    }
    assert users == {"book/engine.py"}


def test_the_groups_and_layers_are_real() -> None:
    assert {d.group for d in declarations.values()} <= set(declare.GROUPS)
    found = {p.stem if p.is_file() else p.name for p in PACKAGE.iterdir() if p.suffix == ".py" or p.is_dir()}
    assert set(LAYERS) <= found
