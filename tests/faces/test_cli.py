"""The command line: words in, exit codes and clean streams out."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest

from lowpoint import __version__
from lowpoint.errors import LowpointError
from lowpoint.faces import cli

Streams = pytest.CaptureFixture[str]


def test_version(capsys: Streams) -> None:
    assert cli.main(["--version"]) == 0
    assert capsys.readouterr().out == f"lowpoint {__version__}\n"


def test_version_needs_no_heavy_library() -> None:
    """`lowpoint --version` must not wait for NumPy, CoolProp, openpyxl, lxml, pint or the formula engine."""
    heavy = ("numpy", "CoolProp", "openpyxl", "lxml", "pint", "formualizer", "fluids")
    code = (
        "import sys; from lowpoint.faces.cli import main; main(['--version']); "
        f"print([name for name in {heavy} if name in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.splitlines()[-1] == "[]"


def test_no_command_is_misuse_and_shows_the_help(capsys: Streams) -> None:
    assert cli.main([]) == 2
    shown = capsys.readouterr().out
    assert all(command in shown for command in cli.COMMANDS)
    assert "licensed practice" in shown


def test_unknown_command_is_misuse(capsys: Streams) -> None:
    assert cli.main(["fly"]) == 2
    assert "fly" in capsys.readouterr().err


@pytest.mark.parametrize("command", cli.COMMANDS)
def test_every_command_has_help_with_an_example(command: str, capsys: Streams) -> None:
    assert cli.main([command, "--help"]) == 0
    shown = capsys.readouterr().out
    assert f"lowpoint {command}" in shown.rpartition("example")[2]
    assert "--json" in shown


def test_our_bug_is_70_and_says_so(monkeypatch: pytest.MonkeyPatch, capsys: Streams) -> None:
    def broken(options: object) -> int:
        raise ZeroDivisionError("oops")

    monkeypatch.setattr("lowpoint.faces.functions.run", broken)
    assert cli.main(["functions"]) == 70
    assert "this is our bug (ZeroDivisionError)" in capsys.readouterr().err


def test_interrupt_is_130(monkeypatch: pytest.MonkeyPatch, capsys: Streams) -> None:
    def stopped(options: object) -> int:
        raise KeyboardInterrupt

    monkeypatch.setattr("lowpoint.faces.functions.run", stopped)
    assert cli.main(["functions"]) == 130
    assert "interrupted" in capsys.readouterr().err


def test_an_error_with_its_own_code(monkeypatch: pytest.MonkeyPatch, capsys: Streams) -> None:
    def refused(options: object) -> int:
        raise LowpointError.plain("this cannot be done", exit_code=1)

    monkeypatch.setattr("lowpoint.faces.functions.run", refused)
    assert cli.main(["functions"]) == 1
    assert capsys.readouterr().err == "lowpoint: this cannot be done\n"


def test_functions_overview_and_one(capsys: Streams) -> None:
    assert cli.main(["functions"]) == 0
    overview = capsys.readouterr().out
    assert "LP_SIGMA(p1, p2, pv, [form])" in overview
    assert "LP_WHY" in overview
    assert cli.main(["functions", "sigma"]) == 0
    assert "(p1-pv)/(p1-p2)" in capsys.readouterr().out
    assert cli.main(["functions", "LP_TYPICAL"]) == 0
    # Every style that the function knows is listed, as promised.
    assert "globe" in capsys.readouterr().out


def test_functions_as_json(capsys: Streams) -> None:
    from lowpoint import functions

    assert cli.main(["functions", "--json"]) == 0
    everything = json.loads(capsys.readouterr().out)
    assert {one["name"] for one in everything} == set(functions)
    assert cli.main(["functions", "LPU_DROP", "--json"]) == 0
    one = json.loads(capsys.readouterr().out)
    assert one["name"] == "LPU_DROP"
    assert [argument["name"] for argument in one["arguments"]][:3] == ["flow", "coefficient", "p1"]


def test_functions_unknown_name_gets_the_nearest(capsys: Streams) -> None:
    assert cli.main(["functions", "LP_SIGNA"]) == 2
    assert "Nearest: LP_SIGMA" in capsys.readouterr().err


def test_module_runs_as_a_program(tmp_path: Path) -> None:
    done = subprocess.run(
        [sys.executable, "-m", "lowpoint", "functions", "LP_FF"],
        cwd=tmp_path,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0
    assert "0.96 - 0.28 sqrt(pv/pc)" in done.stdout


def test_output_that_cannot_be_printed_is_no_bug() -> None:
    """A full disk behind a redirected output: said so, and nothing untrue about files."""
    full = Path("/dev/full")
    if not full.exists():
        pytest.skip("no device here that is always full")
    with full.open("w") as stream:
        words = [sys.executable, "-m", "lowpoint", "functions"]
        done = subprocess.run(words, stdout=stream, stderr=subprocess.PIPE, text=True, check=False)
    assert done.returncode == 1
    assert "could not be printed (No space left on device)" in done.stderr
    assert "our bug" not in done.stderr
