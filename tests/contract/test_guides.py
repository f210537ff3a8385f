"""What README.md and DEVELOPERS.md claim holds."""

from __future__ import annotations

import json
import re
import types
from collections.abc import Iterator
from pathlib import Path

import pytest

from lowpoint import reference, registry
from lowpoint.declare import declarations
from lowpoint.registry import Function, functions

ROOT = Path(__file__).parents[2]


def _block(page: str, mark: str) -> str:
    text = (ROOT / page).read_text(encoding="utf-8")
    found = re.search(rf"<!-- {mark} -->\n```\w*\n(.*?)```", text, re.DOTALL)
    assert found, f"{page} has no block marked {mark}"
    return found[1]


@pytest.fixture
def _declarations_restored() -> Iterator[None]:
    before = dict(declarations)
    # Who follows the guide has it among the kernels already.
    declarations.pop("HEAD_LOSS", None)
    yield
    declarations.clear()
    declarations.update(before)


@pytest.mark.usefixtures("_declarations_restored")
def test_the_worked_example_works(monkeypatch: pytest.MonkeyPatch) -> None:
    """The kernel and the test of DEVELOPERS.md, run as they stand on the page."""
    module = types.ModuleType("example")
    exec(_block("DEVELOPERS.md", "example: kernel"), module.__dict__)
    declaration = declarations["HEAD_LOSS"]
    both = {f.name: f for f in (Function(declaration, "metric"), Function(declaration, "us"))}
    monkeypatch.setattr("lowpoint.functions", {**functions, **both}, raising=False)
    exec(_block("DEVELOPERS.md", "example: test"), module.__dict__)
    module.test_head_loss_of_one_bar()  # type: ignore[attr-defined]
    # A US foot of water is 0.4335 psi at 62.4 lb/ft3 (common practice).
    assert both["LPU_HEAD_LOSS"](p1=20.0, p2=20.0 - 0.43333, density=62.4) == pytest.approx(1.0, abs=1e-4)


def test_reference_page_is_current() -> None:
    page = (ROOT / "addin" / "FUNCTIONS.md").read_text(encoding="utf-8")
    assert page == reference.as_page(), "stale: lowpoint functions --page > addin/FUNCTIONS.md"


def test_every_module_named_in_the_guide_exists() -> None:
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    for name in re.findall(r"`((?:\w+/)*\w+\.py)`", text):
        assert list(ROOT.rglob(name)), f"DEVELOPERS.md names {name}"


def test_readme_figures_are_the_measured_ones() -> None:
    """Each figure in README's table of measurements stands in the file that the benchmark wrote."""
    figures = json.loads((ROOT / "tests/benchmarks/figures.json").read_text(encoding="utf-8"))["figures"]
    measured = {figure["name"]: figure for figure in figures}
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    table = re.search(r"<!-- figures -->\n(.*?)<!-- end of figures -->", text, re.DOTALL)
    assert table
    rows = [[cell.strip() for cell in line.strip("|").split("|")] for line in table[1].splitlines()[2:] if line]
    assert len(rows) >= 8
    for name, value, *_ in rows:
        assert name in measured, name
        assert float(value.split()[0]) == pytest.approx(measured[name]["value"], rel=0.006), name


def test_readme_names_only_real_functions_and_commands() -> None:
    from lowpoint.faces.cli import COMMANDS

    text = (ROOT / "README.md").read_text(encoding="utf-8")
    for name in set(re.findall(r"\bLPU?_[A-Z][A-Z_]+\b", text)):
        assert registry.canonical(name), name
    for command in set(re.findall(r"(?:^|`|bin/)lowpoint ([a-z]+)\b", text, re.MULTILINE)):
        assert command in COMMANDS, command


def test_readme_python_blocks_run(capsys: pytest.CaptureFixture[str]) -> None:
    """The pieces of Python in README.md run as they stand, and say what the page says."""
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    blocks = re.findall(r"```python\n(.*?)```", text, re.DOTALL)
    assert len(blocks) >= 2
    for block in blocks:
        exec(block, {})
    count, bores = capsys.readouterr().out.split(" ", 1)
    assert count == "5"
    assert len(json.loads(bores)) == 5
