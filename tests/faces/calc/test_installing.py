"""Installing, asking, removing; and one clear sentence where that cannot be done, with nothing half installed."""

from __future__ import annotations

import json
import sys
from pathlib import Path
from typing import Any

import pytest

from lowpoint import __version__, functions
from lowpoint.errors import LowpointError
from lowpoint.faces import cli
from lowpoint.faces.calc_addin import installing
from lowpoint.faces.calc_addin import office as offices
from lowpoint.faces.calc_addin.office import Office, find_office

Streams = pytest.CaptureFixture[str]


def run(*words: str) -> int:
    return cli.main(["calc", *words])


def contents(folder: Path) -> dict[str, bytes]:
    return {str(p.relative_to(folder)): p.read_bytes() for p in sorted(folder.rglob("*")) if p.is_file()}


@pytest.fixture
def profile(tmp_path: Path, office_tools: Any) -> Path:
    """A profile that does not exist yet."""
    return tmp_path / "a profile"


def test_the_whole_life(profile: Path, capsys: Streams, start_office: Any) -> None:
    """Not there, installed, installed again, used, removed, removed again, and gone from the office."""
    where = ("--profile", str(profile), "--json")
    assert run("status", *where) == 1
    assert json.loads(capsys.readouterr().out)["addin"] is None
    assert run("install", *where) == 0
    assert run("install", *where) == 0
    capsys.readouterr()
    assert run("status", *where) == 0
    told = json.loads(capsys.readouterr().out)
    assert (told["addin"], told["package"], told["problem"]) == (__version__, __version__, None)
    assert told["python"].startswith(sys.executable)
    same = find_office().python == sys.version_info[:2]
    assert told["runs"] == ("in the office" if same else "in a helper process")
    office = start_office(profile)
    book = office.new()
    office.put(book, "A1", [["=LP_SIGMA(10;5;1)"]])
    assert office.cells(book, "A1") == [[(10 - 1) / (10 - 5)]]  # definition of the index
    office.end()
    assert len(list((profile / "user/uno_packages/cache/uno_packages").glob("*/lowpoint.oxt"))) == 1
    assert run("uninstall", *where) == 0
    assert json.loads(capsys.readouterr().out)["removed"] is True
    assert run("uninstall", *where) == 0
    assert json.loads(capsys.readouterr().out)["removed"] is False
    assert run("status", *where) == 1
    assert not (profile / "user" / "lowpoint").exists()
    office = start_office(profile)
    book = office.new()
    office.put(book, "A1", [["=LP_SIGMA(10;5;1)"]])
    assert office.cells(book, "A1") == [["#NAME?"]]
    office.end()


def test_the_wizard_knows_every_function_and_argument(office: Any) -> None:
    wizard = office.wizard()
    assert set(wizard) == set(functions)
    add_in = 11  # com.sun.star.sheet.FunctionCategory.ADDINS
    for name, (category, text, arguments) in wizard.items():
        function = functions[name]
        assert category == add_in
        assert function.summary in text
        assert text.startswith(function.group.capitalize())
        assert [argument[0] for argument in arguments] == [p.name for p in function.parameters]
        for (_, told, _), parameter in zip(arguments, function.parameters, strict=True):
            assert parameter.kind.meaning in told
            if parameter.is_number and not function.variadic:
                assert function.checked.units[parameter.name].label in told
    assert "[bar]" in wizard["LP_COLUMN"][2][0][1]
    assert "[psi]" in wizard["LPU_COLUMN"][2][0][1]


def test_a_profile_in_use_is_refused(office: Any, capsys: Streams) -> None:
    for action in ("install", "uninstall"):
        assert run(action, "--profile", str(office.profile)) == 2
        said = capsys.readouterr().err
        assert "must not be in use" in said
        assert "Close the office first" in said
    assert run("status", "--profile", str(office.profile)) == 0


def test_no_office_on_this_machine(monkeypatch: pytest.MonkeyPatch, capsys: Streams, tmp_path: Path) -> None:
    monkeypatch.setenv("PATH", str(tmp_path))
    monkeypatch.setattr(offices, "_USUAL", ())
    assert run("install", "--profile", str(tmp_path / "p")) == 2
    assert "there must be a LibreOffice on this machine" in capsys.readouterr().err
    assert not (tmp_path / "p").exists()


def test_an_office_without_python(profile: Path, monkeypatch: pytest.MonkeyPatch, capsys: Streams) -> None:
    monkeypatch.setattr(Office, "python", None)
    assert run("install", "--profile", str(profile)) == 2
    assert "the office must be able to run Python, got none. Install the office's Python" in capsys.readouterr().err
    assert not profile.exists()


def test_a_place_that_may_not_be_written(office_tools: Any, tmp_path: Path, capsys: Streams) -> None:
    in_the_way = tmp_path / "file"
    in_the_way.write_text("mine")
    assert run("install", "--profile", str(in_the_way / "profile")) == 2
    assert "the profile must be writable" in capsys.readouterr().err
    assert in_the_way.read_text() == "mine"


def test_the_office_refuses(profile: Path, monkeypatch: pytest.MonkeyPatch, capsys: Streams) -> None:
    """A first install that fails leaves nothing; a later one leaves what was there."""
    with monkeypatch.context() as broken:
        broken.setattr(installing, "bundle", lambda: b"no archive")
        assert run("install", "--profile", str(profile)) == 1
        assert "the office refused the add-in" in capsys.readouterr().err
        assert not list(profile.rglob("*.json"))
    assert run("install", "--profile", str(profile)) == 0
    settings = profile / "user/lowpoint/calc.json"
    settings.write_text(settings.read_text().replace('"auto"', '"helper"'))
    before = contents(profile / "user/lowpoint")
    with monkeypatch.context() as broken:
        broken.setattr(installing, "bundle", lambda: b"no archive")
        assert run("install", "--profile", str(profile)) == 1
    capsys.readouterr()
    assert contents(profile / "user/lowpoint") == before
    assert run("status", "--profile", str(profile)) == 0


def test_status_tells_what_is_wrong(profile: Path, monkeypatch: pytest.MonkeyPatch, capsys: Streams) -> None:
    assert run("install", "--profile", str(profile)) == 0
    settings = profile / "user/lowpoint/calc.json"
    good = settings.read_text()
    for text, words in (
        ("{", "cannot be read"),
        ('{"python": 3}', "are incomplete"),
        (good.replace(json.dumps(sys.executable), '"/no/such/python"'), "There is no Python at /no/such/python"),
    ):
        settings.write_text(text)
        capsys.readouterr()
        assert run("status", "--profile", str(profile)) == 1
        assert words in capsys.readouterr().out
    settings.write_text(good)
    monkeypatch.setattr(installing, "__version__", "99.0")
    capsys.readouterr()
    assert run("status", "--profile", str(profile)) == 1
    assert f"The add-in is of Lowpoint {__version__}, this package of 99.0" in capsys.readouterr().out


def test_settings_name_this_python_and_where_it_looks() -> None:
    settings = installing.own_settings()
    assert settings.python == sys.executable
    assert settings.release == sys.version_info[:2]
    assert str(Path(installing.__file__).resolve().parents[3]) in settings.paths
    assert any(Path(path, "numpy").is_dir() for path in settings.paths)


def test_build_writes_the_same_bytes(tmp_path: Path, capsys: Streams) -> None:
    for name in ("a.oxt", "b.oxt"):
        assert run("build", str(tmp_path / name)) == 0
    assert (tmp_path / "a.oxt").read_bytes() == (tmp_path / "b.oxt").read_bytes()
    assert "wrote" in capsys.readouterr().out


@pytest.mark.parametrize("action", ["build", "install", "status", "uninstall", "repair", "sources"])
def test_every_action_has_help_with_an_example(action: str, capsys: Streams) -> None:
    assert run(action, "--help") == 0
    shown = capsys.readouterr().out
    assert f"example: lowpoint calc {action}" in shown
    assert "--json" in shown


def test_no_action_is_misuse() -> None:
    assert run() == 2


def test_lowpoint_errors_are_one_sentence_with_its_remedy(tmp_path: Path) -> None:
    (tmp_path / ".lock").write_text("")
    with pytest.raises(LowpointError) as caught:
        offices.refuse_if_open(tmp_path)
    assert str(caught.value).count("\n") == 0
