"""Computing beside the office: a process that may die, settings that may be wrong, a package of another version."""

from __future__ import annotations

import json
import os
import signal
import struct
import subprocess
import sys
import threading
import time
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from lowpoint import __version__, cells
from lowpoint.faces.calc_addin import answers, installing
from lowpoint.faces.calc_addin.inside import link as links
from lowpoint.faces.calc_addin.inside.link import PLAIN_NAMES, Link
from lowpoint.faces.calc_addin.inside.settings import FILE, LOG, Settings
from lowpoint.faces.calc_addin.inside.values import error_value, from_line, to_line, to_office
from lowpoint.faces.calc_addin.signatures import fingerprint
from lowpoint.problems import CellError

posix = pytest.mark.skipif(not Path("/proc/self").exists(), reason="stops and finds processes as Linux does")
SIGMA = (10.0, 5.0, 1.0, None)
ANSWER = (10 - 1) / (10 - 5)  # definition of the upstream index


class Made:
    """A link as the office makes it, with settings of our choice."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.links: list[Link] = []

    def link(
        self, text: str | None = None, *, mode: str = "helper", version: str = __version__, **changes: Any
    ) -> Link:
        own = installing.own_settings()
        if text is None:
            data = {"python": own.python, "release": own.release, "paths": own.paths, "mode": mode, **changes}
            text = Settings(**data).as_text()
        (self.folder / FILE).write_text(text)
        link = Link(self.folder, version, fingerprint())
        self.links.append(link)
        return link

    @property
    def log(self) -> list[str]:
        path = self.folder / LOG
        return path.read_text().splitlines() if path.exists() else []


@pytest.fixture
def made(tmp_path: Path) -> Iterator[Made]:
    making = Made(tmp_path)
    yield making
    for link in making.links:
        link.close()


def shows(value: Any) -> str:
    """The error that the office shows for a NaN."""
    assert isinstance(value, float)
    assert value != value
    code = struct.unpack("<Q", struct.pack("<d", value))[0] & 0xFFFF
    return {503: "#NUM!", 519: "#VALUE!", 32767: "#N/A"}[code]


def helper_pid(link: Link) -> int:
    assert link._helper is not None
    assert link._helper._process is not None
    return link._helper._process.pid


# --- values ----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("error", list(CellError))
def test_errors_are_told_from_texts(error: CellError) -> None:
    """Codes as in the office's help, 'Error Codes in LibreOffice Calc'; what it does not know is #VALUE!."""
    codes = {"#NULL!": 521, "#DIV/0!": 532, "#VALUE!": 519, "#REF!": 524, "#NAME?": 525, "#NUM!": 503, "#N/A": 32767}
    bits = struct.pack("<Q", 0x7FF8 << 48 | codes.get(str(error), 519))
    assert struct.pack("<d", to_office(error)) == bits
    assert struct.pack("<d", from_line(json.loads(json.dumps(to_line(error))))) == bits
    assert to_office(str(error)) == str(error)
    assert from_line(json.loads(json.dumps(to_line(str(error))))) == str(error)


def test_grids_go_both_ways() -> None:
    grid = [[1.5, "clear"], [CellError.NA, 0.1]]
    for taken in (to_office(grid), from_line(json.loads(json.dumps(to_line(grid))))):
        assert taken[0] == (1.5, "clear")
        assert taken[1][1] == 0.1
        assert shows(taken[1][0]) == "#N/A"


def test_an_error_of_an_unknown_name_is_value() -> None:
    assert shows(error_value("#SPILL!")) == "#VALUE!"


# --- two ways, one answer --------------------------------------------------------------------------------------------


@pytest.mark.parametrize("mode", ["auto", "helper"])
def test_both_ways_give_the_same(made: Made, mode: str) -> None:
    link = made.link(mode=mode)
    assert link.call("LP_SIGMA", SIGMA) == ANSWER
    assert shows(link.call("LP_SIGMA", (10.0, 5.0, 0.0, None))) == "#NUM!"
    assert shows(link.call("LP_SIGMA", (None, 5.0, 1.0, None))) == "#N/A"
    assert shows(link.call("LP_SIGMA", ("x", 5.0, 1.0, None))) == "#VALUE!"
    range_ = ((10.0,), ("",), (12.0,))
    rows = link.call("LP_SIGMA", (range_, 5.0, 1.0, None))
    assert (rows[0], shows(rows[1][0]), rows[2]) == ((ANSWER,), "#N/A", (11 / 7,))
    why = link.call("LP_WHY", ("LP_SIGMA", (10.0, 5.0, 0.0)))
    assert why == cells.call("LP_WHY", ["LP_SIGMA", 10.0, 5.0, 0.0])
    assert made.log == []
    assert (link._helper is None) == (mode == "auto")


def test_another_python_version_means_a_helper(made: Made) -> None:
    link = made.link(mode="auto", release=(sys.version_info[0], sys.version_info[1] + 1))
    assert link.call("LP_SIGMA", SIGMA) == ANSWER
    assert link._helper is not None


def test_a_package_that_cannot_be_loaded_into_the_office(made: Made, monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(self: Link, settings: Settings) -> None:
        raise ImportError("numpy is of another make")

    monkeypatch.setattr(Link, "_open_here", broken)
    link = made.link(mode="auto")
    assert link.call("LP_SIGMA", SIGMA) == ANSWER
    assert link._helper is not None
    assert "cannot be loaded into the office (numpy is of another make); a helper process is used" in made.log[0]


def test_a_numpy_of_the_offices_own_is_not_computed_with(made: Made) -> None:
    home = installing.own_settings().paths[0]
    link = made.link(mode="auto", paths=(home,) if not Path(home, "numpy").is_dir() else ("/nowhere",))
    link.call("LP_SIGMA", SIGMA)
    assert "the office has a numpy of its own" in made.log[0]


# --- crashes ---------------------------------------------------------------------------------------------------------


def test_a_bug_in_a_function_is_value_in_that_cell_and_one_line_in_the_log(
    made: Made, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(name: str, arguments: Any) -> Any:
        raise ZeroDivisionError("oops")

    monkeypatch.setattr(answers, "cell_of", broken)
    link = made.link(mode="auto")
    for _ in range(50):
        assert shows(link.call("LP_WHY", ("LP_SIGMA", ()))) == "#VALUE!"
    assert link.call("LP_SIGMA", SIGMA) == ANSWER  # the short way is not the broken one
    assert [line.split(" ", 2)[2] for line in made.log] == ["LP_WHY: ZeroDivisionError: oops"]


def test_a_bug_in_the_helper_does_not_end_it(made: Made) -> None:
    link = made.link()
    assert link.call("LP_SIGMA", SIGMA) == ANSWER
    before = helper_pid(link)
    assert link._helper is not None
    link.calls["broken"] = links._through(link._helper, "no such function", link._lock)
    assert shows(link.call("broken", ())) == "#VALUE!"
    assert "KeyError" in made.log[-1]
    assert link.call("LP_SIGMA", SIGMA) == ANSWER
    assert helper_pid(link) == before


def test_a_helper_that_died_between_calls_is_replaced_silently(made: Made) -> None:
    link = made.link()
    assert link.call("LP_SIGMA", SIGMA) == ANSWER
    first = helper_pid(link)
    os.kill(first, signal.SIGTERM)
    assert link._helper is not None
    assert link._helper._process is not None
    link._helper._process.wait(10)
    assert link.call("LP_SIGMA", SIGMA) == ANSWER
    assert helper_pid(link) != first


@posix
def test_a_helper_killed_during_a_call(made: Made) -> None:
    link = made.link()
    assert link.call("LP_SIGMA", SIGMA) == ANSWER
    pid = helper_pid(link)
    os.kill(pid, signal.SIGSTOP)
    killer = threading.Timer(0.3, os.kill, (pid, signal.SIGKILL))
    killer.start()
    assert shows(link.call("LP_SIGMA", SIGMA)) == "#VALUE!"
    killer.join()
    assert "The helper process ended during a call of LP_SIGMA" in made.log[-1]
    assert link.call("LP_SIGMA", SIGMA) == ANSWER


@posix
def test_a_helper_that_does_not_answer_is_ended(made: Made, monkeypatch: pytest.MonkeyPatch) -> None:
    from lowpoint.faces.calc_addin.inside import helper

    link = made.link()
    assert link.call("LP_SIGMA", SIGMA) == ANSWER
    monkeypatch.setattr(helper, "ANSWERING", 0.2)
    os.kill(helper_pid(link), signal.SIGSTOP)
    begun = time.monotonic()
    assert shows(link.call("LP_SIGMA", SIGMA)) == "#VALUE!"
    assert time.monotonic() - begun < 5
    monkeypatch.undo()
    assert link.call("LP_SIGMA", SIGMA) == ANSWER


@posix
def test_helpers_that_die_again_and_again_are_not_started_for_every_cell(made: Made, tmp_path: Path) -> None:
    """A Python that greets properly and then dies in every call: a column of cells must not take an hour."""
    dying = tmp_path / "dying"
    greeting = json.dumps(answers.greeting())
    dying.write_text(f"#!/bin/sh\ncat <<'END'\n{greeting}\nEND\nread line\nexit 3\n")
    dying.chmod(0o755)
    link = made.link(python=str(dying))
    begun = time.monotonic()
    for _ in range(500):
        assert shows(link.call("LP_SIGMA", SIGMA)) == "#VALUE!"
    assert time.monotonic() - begun < 30
    assert "as others before it" in made.log[-1]
    assert link.call("LP_WHY", ("LP_SIGMA", ())).startswith("The helper process ended")


# --- what cannot work says so ----------------------------------------------------------------------------------------


def refused(link: Link) -> str:
    """Functions show #VALUE!, and LP_WHY says why."""
    assert shows(link.call("LP_SIGMA", SIGMA)) == "#VALUE!"
    sentence = link.call("LP_WHY", ("LP_SIGMA", SIGMA))
    assert isinstance(sentence, str)
    assert "\n" not in sentence
    assert "lowpoint calc install" in sentence
    return sentence


def test_no_settings(made: Made) -> None:
    link = made.link()
    (made.folder / FILE).unlink()
    assert refused(link).startswith("Lowpoint is not set up for this profile")


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("{ not json", "cannot be read"),
        ("[]", "are incomplete"),
        ('{"python": 1}', "are incomplete"),
        ('{"python": "p", "paths": "x", "mode": "auto", "release": [3, 11]}', "are incomplete"),
        ('{"python": "p", "paths": [], "mode": "sometimes", "release": [3, 11]}', "are incomplete"),
    ],
)
def test_broken_settings(made: Made, text: str, words: str) -> None:
    assert words in refused(made.link(text))


def test_no_such_python(made: Made) -> None:
    assert "The Python at /no/such/python cannot be started" in refused(made.link(python="/no/such/python"))


@posix
def test_a_python_without_the_package(made: Made, tmp_path: Path) -> None:
    bare = tmp_path / "bare"
    bare.write_text(f'#!/bin/sh\nexec "{sys.executable}" -I -S "$@"\n')
    bare.chmod(0o755)
    said = refused(made.link(python=str(bare)))
    assert "cannot load Lowpoint" in said
    assert "No module named 'lowpoint'" in said


@pytest.mark.parametrize("mode", ["auto", "helper"])
def test_an_addin_of_another_version_computes_nothing(made: Made, mode: str) -> None:
    said = refused(made.link(mode=mode, version="0.0.1"))
    assert said.startswith("The add-in was made by Lowpoint 0.0.1, but the package of")
    assert f"is {__version__}; nothing is computed" in said


def test_an_addin_of_the_same_version_with_other_functions(made: Made) -> None:
    made.link()
    link = Link(made.folder, __version__, "another")
    made.links.append(link)
    assert f"is another {__version__}" in refused(link)


def test_after_a_cure_it_works_without_a_restart(made: Made, monkeypatch: pytest.MonkeyPatch) -> None:
    link = made.link("{")
    refused(link)
    good = Settings.read(Path(made.link().__dict__["_folder"]) / FILE)
    assert good.python == sys.executable
    monkeypatch.setattr(links, "PAUSE", 0.0)
    link._retry = 0.0
    assert link.call("LP_SIGMA", SIGMA) == ANSWER


def test_a_log_that_cannot_be_written_is_no_reason_to_fail(made: Made) -> None:
    link = made.link(python="/no/such/python")
    (made.folder / LOG).mkdir()
    refused(link)


def test_a_book_that_cannot_be_respelled_is_said(made: Made, tmp_path: Path) -> None:
    book = tmp_path / "book.xlsx"
    book.write_bytes(b"not a workbook")
    for mode in ("auto", "helper"):
        said = made.link(mode=mode).call(PLAIN_NAMES, (str(book),))
        assert "is damaged or protected by a password" in said
    assert book.read_bytes() == b"not a workbook"


# --- in a real office ------------------------------------------------------------------------------------------------


def children_of(profile: Path) -> list[int]:
    """The helper processes of the office on this profile."""
    found = subprocess.run(["ps", "-eo", "pid,args"], capture_output=True, text=True, check=True).stdout
    helpers = [int(line.split()[0]) for line in found.splitlines() if "calc_addin.serve" in line]
    return [pid for pid in helpers if str(profile) in Path(f"/proc/{pid}/environ").read_text(errors="replace")]


@posix
def test_the_office_outlives_its_helper(helper_office: Any) -> None:
    """Killed while a column is computed: one cell shows #VALUE!, the others their values, the log says it once."""
    office, rows = helper_office, 200
    book = office.new()
    office.put_values(book, f"A1:A{rows}", [[10.0 + row] for row in range(rows)])
    office.put(book, f"B1:B{rows}", [[f"=LP_SIGMA(A{row + 1};5;1)"] for row in range(rows)])
    expected = [(10.0 + row - 1) / (10.0 + row - 5) for row in range(rows)]
    assert [row[0] for row in office.cells(book, f"B1:B{rows}")] == expected
    (pid,) = children_of(office.profile)
    os.kill(pid, signal.SIGSTOP)
    killer = threading.Timer(0.5, os.kill, (pid, signal.SIGKILL))
    killer.start()
    office.recalculate(book)
    killer.join()
    shown = [row[0] for row in office.cells(book, f"B1:B{rows}")]
    assert [place for place, value in enumerate(shown) if value == "#VALUE!"] == [0]
    assert shown[1:] == expected[1:]
    assert office.addin_log().count("The helper process ended during a call of LP_SIGMA") == 1
    assert office.alive()
    assert children_of(office.profile) != [pid]
    office.recalculate(book)
    assert [row[0] for row in office.cells(book, f"B1:B{rows}")] == expected
    office.array(book, "D1:D3", "=LP_SIGMA(A1:A3;5;1)")
    assert [row[0] for row in office.cells(book, "D1:D3")] == expected[:3]


def test_a_version_that_differs_is_told_in_the_cell(
    start_office: Any, office_tools: Any, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    from lowpoint.faces import cli
    from lowpoint.faces.calc_addin import bundle

    with monkeypatch.context() as older:
        older.setattr(bundle, "__version__", "0.0.1")
        assert cli.main(["calc", "install", "--profile", str(tmp_path / "profile")]) == 0
    office = start_office(tmp_path / "profile")
    book = office.new()
    office.put(book, "A1:B1", [["=LP_SIGMA(10;5;1)", '=LP_WHY("LP_SIGMA";10;5;1)']])
    ((sigma, why),) = office.cells(book, "A1:B1")
    assert sigma == "#VALUE!"
    assert why.startswith("The add-in was made by Lowpoint 0.0.1")
    office.end()
