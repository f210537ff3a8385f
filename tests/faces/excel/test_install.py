"""Installing over a machine of the tests' own: one file, whole or not at all, and one sentence for what is wrong."""

from __future__ import annotations

import dataclasses
import json
from pathlib import Path
from typing import Any

import pytest

from lowpoint import __version__
from lowpoint.errors import LowpointError
from lowpoint.faces import cli, excel
from lowpoint.faces.excel_addin import installing, machine
from lowpoint.faces.excel_addin.building import build
from lowpoint.faces.excel_addin.machine import Machine, Registry

APP_PATHS = r"SOFTWARE\Microsoft\Windows\CurrentVersion\App Paths\excel.exe"
CLICK_TO_RUN = r"SOFTWARE\Microsoft\Office\ClickToRun\Configuration"
TRUSTED = r"SOFTWARE\Microsoft\Office\16.0\Excel\Security\Trusted Locations"
VERSIONS = {"xlwings": "0.37.8", "pyOpenVBA": "6.5.0"}


class Values(Registry):
    """A registry of the tests."""

    def __init__(self, **values: Any) -> None:
        self.values = {("machine", APP_PATHS, ""): r"C:\Office\EXCEL.EXE", ("machine", CLICK_TO_RUN, "Platform"): "x64"}

    def value(self, hive: str, key: str, name: str = "") -> Any:
        return self.values.get((hive, key, name))


@pytest.fixture
def windows(tmp_path: Path) -> Machine:
    """A machine with Excel, an environment of its own and the library of xlwings in it."""
    python = tmp_path / "env" / "Scripts" / "python.exe"
    python.parent.mkdir(parents=True)
    (tmp_path / "env" / "xlwings64-0.37.8.dll").touch()
    (tmp_path / "Roaming").mkdir()
    return Machine("win32", {"APPDATA": str(tmp_path / "Roaming")}, python, Values(), VERSIONS.get)


def fake_build(python: str, versions: Any) -> bytes:
    raise AssertionError("nothing should be built")


def place(windows: Machine) -> Path:
    folder = windows.start_folder()
    assert folder is not None
    return folder / "lowpoint.xlam"


def nothing_written(windows: Machine) -> bool:
    return list(Path(windows.environment["APPDATA"]).rglob("*")) == []


def refused(windows: Machine, building: Any = fake_build) -> str:
    with pytest.raises(LowpointError) as problem:
        installing.install(windows, building)
    assert problem.value.exit_code == 2
    assert nothing_written(windows)
    return str(problem.value)


def test_install_status_uninstall(windows: Machine) -> None:
    pytest.importorskip("pyopenvba", reason="pyOpenVBA is not installed (the extra 'excel')")
    assert installing.status(windows)["addin"] is None
    told = installing.install(windows)
    assert told["problem"] is None
    assert told["addin"] == told["package"] == __version__
    assert told["excel_bits"] == 64
    assert place(windows).read_bytes() == build(str(windows.python))
    assert installing.status(windows) == told
    assert installing.install(windows) == told, "installing twice is no trouble"
    assert [path.name for path in place(windows).parent.iterdir()] == ["lowpoint.xlam"]
    assert installing.uninstall(windows) is True
    assert installing.uninstall(windows) is False
    assert not place(windows).exists()


def test_what_keeps_it_from_being_installed(windows: Machine, tmp_path: Path) -> None:
    assert "Excel: must be installed" in refused(dataclasses.replace(windows, registry=Registry()))
    assert "xlwings: must be installed" in refused(dataclasses.replace(windows, versions={}.get))
    other = dataclasses.replace(windows, versions={"xlwings": "0.37.9", "pyOpenVBA": "6.5.0"}.get)
    assert "xlwings64-0.37.9.dll: must be beside" in refused(other)
    (tmp_path / "env" / "xlwings64-0.37.8.dll").unlink()
    said = refused(windows)
    assert said.startswith("xlwings64-0.37.8.dll: must be beside")
    assert "environment of its own" in said
    assert "APPDATA" in refused_without_folder(windows)


def refused_without_folder(windows: Machine) -> str:
    with pytest.raises(LowpointError) as problem:
        installing.install(dataclasses.replace(windows, environment={}), fake_build)
    return str(problem.value)


def test_32_bit_excel_wants_the_other_library(windows: Machine, tmp_path: Path) -> None:
    registry = Values()
    registry.values["machine", CLICK_TO_RUN, "Platform"] = "x86"
    small = dataclasses.replace(windows, registry=registry)
    assert "xlwings32-0.37.8.dll: must be" in refused(small)
    (tmp_path / "env" / "xlwings32-0.37.8.dll").touch()
    assert installing.install(small, lambda python, versions: b"no add-in")["excel_bits"] == 32


def test_a_failing_build_leaves_nothing(windows: Machine) -> None:
    def broken(python: str, versions: Any) -> bytes:
        raise LowpointError("the add-in", "must be whole")

    assert "must be whole" in refused(windows, broken)


def test_a_locked_file_leaves_the_old_add_in(windows: Machine, monkeypatch: pytest.MonkeyPatch) -> None:
    place(windows).parent.mkdir(parents=True)
    place(windows).write_bytes(b"old")

    def locked(*_: object) -> None:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr("lowpoint.book.saving.os.replace", locked)
    with pytest.raises(LowpointError, match=r"is open in Excel .* Close Excel and retry\."):
        installing.install(windows, lambda python, versions: b"new")
    monkeypatch.setattr(Path, "unlink", locked)
    with pytest.raises(LowpointError, match="is open in Excel"):
        installing.uninstall(windows)
    monkeypatch.undo()
    assert place(windows).read_bytes() == b"old"
    assert [path.name for path in place(windows).parent.iterdir()] == ["lowpoint.xlam"]


def test_a_folder_that_cannot_be_made_leaves_nothing(windows: Machine) -> None:
    (Path(windows.environment["APPDATA"]) / "Microsoft").write_text("a file, no folder", encoding="utf-8")
    with pytest.raises(LowpointError, match="cannot be changed"):
        installing.install(windows, lambda python, versions: b"new")
    assert [path.name for path in Path(windows.environment["APPDATA"]).rglob("*")] == ["Microsoft"]


def test_status_tells_what_would_not_work(windows: Machine, tmp_path: Path) -> None:
    pytest.importorskip("pyopenvba", reason="pyOpenVBA is not installed (the extra 'excel')")
    installing.install(windows)

    def problem(**changes: Any) -> str:
        return str(installing.status(dataclasses.replace(windows, **changes))["problem"])

    switched_off = Values()
    switched_off.values["user", TRUSTED, "AllLocationsDisabled"] = 1
    assert "trusted folders of Excel are switched off" in problem(registry=switched_off)
    newer = {"xlwings": "0.37.9", "pyOpenVBA": "6.5.0"}
    assert "built with xlwings 0.37.8, and 0.37.9 is installed" in problem(versions=newer.get)
    assert "xlwings: must be installed" in problem(versions={}.get)
    assert problem(registry=Registry()) == "Excel is not installed on this machine."
    (tmp_path / "env" / "xlwings64-0.37.8.dll").unlink()
    assert "xlwings64-0.37.8.dll" in problem()
    place(windows).write_bytes(b"not an add-in")
    assert "not an add-in of Lowpoint" in problem()


def test_status_tells_an_older_add_in(windows: Machine, monkeypatch: pytest.MonkeyPatch) -> None:
    pytest.importorskip("pyopenvba", reason="pyOpenVBA is not installed (the extra 'excel')")
    installing.install(windows)
    monkeypatch.setattr(installing, "maker", lambda: "9.9.9 abc")
    assert f"The add-in is of Lowpoint {__version__}" in installing.status(windows)["problem"]


@pytest.mark.parametrize("action", ["install", "status", "uninstall"])
def test_another_system_is_told_in_one_sentence(
    action: str, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(machine.sys, "platform", "linux")
    monkeypatch.setattr(excel, "_machine", lambda: Machine(system="linux"))
    assert cli.main(["excel", action]) == 2
    streams = capsys.readouterr()
    assert streams.out == ""
    assert streams.err.count("\n") == 1
    assert "Windows only" in streams.err
    assert "excel build" in streams.err


def test_the_command_over_a_windows_machine(
    windows: Machine, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    pytest.importorskip("pyopenvba", reason="pyOpenVBA is not installed (the extra 'excel')")
    monkeypatch.setattr(excel, "_machine", lambda: windows)
    assert cli.main(["excel", "status"]) == 1
    assert "is not installed" in capsys.readouterr().out
    assert cli.main(["excel", "install"]) == 0
    assert "start Excel again" in capsys.readouterr().out
    assert cli.main(["excel", "status", "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["addin"] == __version__
    assert cli.main(["excel", "status"]) == 0
    assert str(place(windows)) in capsys.readouterr().out
    assert cli.main(["excel", "uninstall", "--json"]) == 0
    assert json.loads(capsys.readouterr().out) == {"removed": True}
    assert cli.main(["excel", "uninstall"]) == 0


@pytest.mark.parametrize("action", ["build", "install", "status", "uninstall", "sources"])
def test_every_action_has_help_with_an_example(action: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["excel", action, "--help"]) == 0
    shown = capsys.readouterr().out
    assert f"lowpoint excel {action}" in shown.rpartition("example")[2]
    assert "--json" in shown


def test_the_registry_of_another_system_is_empty() -> None:
    assert Registry().value("machine", r"SOFTWARE\No Such Key") is None
